import type { CardPart, RunningWindow, StabilityCard } from '#shared/model/card-document.ts'
import { compileModel } from '#shared/model/compile.ts'
import type { CompiledModel } from '#shared/model/compiled-model.ts'
import type { ModelError } from '#shared/model/errors.ts'
import { fingerprint } from '#shared/model/fingerprint.ts'
import { checkModel } from '#shared/model/system.ts'
import { type BranchSet, createBranchSet, growBranches } from './branches.ts'
import { createBudget } from './budget.ts'
import {
  type FoundHopf,
  type ListedState,
  listBranches,
  listBranchPoints,
  listFolds,
  listHopf,
  listSteadyStates,
} from './card-lists.ts'
import {
  createWarnings,
  type WarningList,
  warnOfBranches,
  warnOfHopf,
  warnOfNoWindow,
  warnOfSearch,
  warnOfSpentBudget,
} from './card-warnings.ts'
import { type CyclesPart, computeCycles } from './cycles/compute-cycles.ts'
import { engineVersion } from './engine.ts'
import { createForms, type Forms } from './forms.ts'
import { createFrame, type Frame, scaled } from './frame.ts'
import { findHopfPoints, samePoint } from './hopf.ts'
import { mapOfPlane, type PlaneMap } from './map/map-of-plane.ts'
import type { CardStage } from './messages.ts'
import { markRealCrossings } from './real-crossings.ts'
import { sensitivitiesOf } from './sensitivity.ts'
import { settle } from './settle.ts'
import { findSteadyStates, type SteadyStateResult } from './steady-states.ts'
import { type ListedHopf, type WindowLists, windowAround } from './window.ts'

export interface AnalyseOptions {
  /** Default: everything but the map. */
  parts?: readonly CardPart[]
  /** Told as work goes on: the stage and its share done, 0 to 1. */
  onProgress?: (stage: CardStage, share: number) => void
  /** Asked at least every 50 ms; `true` ends the analysis with what there is. */
  shouldStop?: () => boolean
  /** Handed the card before each of the parts that take longest, complete but for them: the sensitivities, then the map. */
  onCard?: (card: StabilityCard) => void
  /** Handed the map as it grows, curve by curve. */
  onMap?: (map: PlaneMap) => void
}

export type AnalyseResult = { ok: true; card: StabilityCard } | { ok: false; errors: ModelError[] }

/** Values between the ends of the range at which branches are looked for. */
const valuesBetween = 17
/** Evaluations of F and its Jacobian in one analysis: some 20 s for the largest models, never reached by ordinary ones. */
const allowance = 4_000_000

/**
 * From a model document to its stability card: the one entry for worker, server and command line.
 *
 * @param document  JSON text or a parsed value; it is checked here and every fault is told.
 * Never throws on a document, whatever is in it. What cannot be computed within the allowance is left out and told by a
 * warning; where nothing could be, the error is `budget-exceeded`.
 */
export function analyse(document: unknown, options: AnalyseOptions = {}): AnalyseResult {
  const checked = checkModel(document)
  if (!checked.ok) return checked
  const parts = new Set<CardPart>(options.parts ?? ['steady', 'hopf', 'cycles'])
  const warnings = createWarnings(checked.warnings)
  const analysis = compute(compileModel(checked.system), warnings, options)
  if (!analysis) {
    const message = 'The analysis was stopped before anything could be computed.'
    return { ok: false, errors: [{ code: 'budget-exceeded', message }] }
  }
  const { control, observed } = checked.system
  const head = {
    format: 'brinkbook-card',
    version: 1,
    engine: engineVersion,
    fingerprint: fingerprint(checked.document),
    control: checked.system.parameters[control]?.symbol ?? '',
    observed: observed.symbol,
  } as const
  const { body, operating } = partsOf(analysis, parts, warnings, options)
  let card: StabilityCard = { ...head, ...body, warnings: warnings.list() }
  const { frame } = analysis
  if (parts.has('hopf')) {
    options.onCard?.(card)
    const sensitivity = operating.flatMap((hopf, i) => {
      options.onProgress?.('sensitivity', i / operating.length)
      return sensitivitiesOf(frame, hopf)
    })
    if (frame.budget.spent()) warnOfSpentBudget(warnings)
    card = { ...card, sensitivity, warnings: warnings.list() }
  }
  if (parts.has('map')) {
    options.onCard?.(card)
    const map = mapOfPlane(frame.model, warnings, options)
    card = { ...card, ...(map ? { map } : {}), warnings: warnings.list() }
  }
  return { ok: true, card }
}

/** What was computed, before it is put into the card's words. */
interface Analysis {
  frame: Frame
  forms: Forms
  own: SteadyStateResult
  set: BranchSet
  hopf: FoundHopf[]
  /** Branch points that only the eigenvalues tell of. */
  realCrossings: Float64Array[]
}

function compute(model: CompiledModel, warnings: WarningList, options: AnalyseOptions): Analysis | null {
  const budget = createBudget(allowance, options.shouldStop)
  const frame = createFrame(model, budget)
  const forms = createForms(frame)
  const set = createBranchSet()
  const tell = options.onProgress ?? (() => undefined)
  tell('steady-states', 0)
  const own = searchAt(frame, frame.own, options)
  if (budget.spent() && own.states.length === 0) return null
  tell('steady-states', 1)
  const analysis: Analysis = { frame, forms, own, set, hopf: [], realCrossings: [] }
  const values = startValues(frame)
  values.forEach((p, i) => {
    tell('branches', i / values.length)
    if (budget.spent()) return
    const found = p === frame.own ? own : searchAt(frame, p, options)
    growBranches(frame, forms, set, { p, states: found.states.map(({ x }) => x) })
  })
  tell('branches', 1)
  set.paths.forEach((path, i) => {
    tell('onsets', i / set.paths.length)
    const samples = path.vertices.map(({ sample }) => sample)
    const [first, last] = path.ends.map(({ kind }) => kind === 'range-end' || kind === 'box-left')
    const found = findHopfPoints(frame, forms, samples, first ?? false, last ?? false)
    const { points, hopf } = markRealCrossings(frame, path, found)
    analysis.hopf.push(...hopf.map((point) => ({ point, path })))
    analysis.realCrossings.push(...points)
  })
  tell('onsets', 1)
  warnOfSearch(frame, own, warnings)
  warnOfBranches(frame, set, warnings)
  return analysis
}

/** The own value first, then both ends, then values between: not every branch passes the own one. */
function startValues(frame: Frame): number[] {
  const { low, high, own } = frame
  const between = Array.from({ length: valuesBetween }, (_, i) => low + ((high - low) * (i + 1)) / (valuesBetween + 1))
  const inRange = own >= low && own <= high
  return [...new Set([...(inRange ? [own] : []), low, high, ...between])]
}

function searchAt(frame: Frame, p: number, options: AnalyseOptions): SteadyStateResult {
  const parameters = frame.parameters.slice()
  parameters[frame.control] = p
  const { shouldStop } = options
  return findSteadyStates(frame.model, parameters, shouldStop ? { shouldStop } : {})
}

/** The parts asked for. Lists are made in full whatever is asked: indices point from one into another. */
function partsOf(
  analysis: Analysis,
  parts: Set<CardPart>,
  warnings: WarningList,
  options: AnalyseOptions,
): { body: Partial<StabilityCard>; operating: ListedHopf[] } {
  const { frame, forms, own, set } = analysis
  const states = listSteadyStates(frame, own)
  const { listed, judgements } = listHopf(frame, forms, analysis.hopf)
  const folds = listFolds(frame, set.paths)
  const crossings = analysis.realCrossings.map((z) => ({ z, kind: 'other' as const }))
  const branchPoints = listBranchPoints(frame, [...set.branchPoints, ...crossings])
  const out: Partial<StabilityCard> = {}
  if (parts.has('steady')) {
    out.steadyStates = states.map(({ card }) => card)
    out.steadyStatesComplete = own.complete
    out.branches = listBranches(frame, set.paths, listed)
    out.folds = folds.card
    out.branchPoints = branchPoints.card
  }
  const indexIn = (points: readonly Float64Array[]) => (z: Float64Array) =>
    points.findIndex((point) => samePoint(frame, point, z))
  const lists = {
    paths: set.paths,
    hopf: listed,
    foldIndex: indexIn(folds.points),
    branchPointIndex: indexIn(branchPoints.points),
  }
  if (parts.has('hopf')) {
    warnOfHopf(frame, listed, judgements, warnings)
    out.hopf = listed.map(({ card }) => card)
  }
  if (parts.has('hopf') || parts.has('cycles')) {
    options.onProgress?.('window', 0)
    const around = runningWindow(frame, states, lists, warnings)
    out.window = around?.card ?? null
    if (parts.has('cycles')) Object.assign(out, cyclesOf(frame, lists, around, warnings, options))
  }
  return { body: out, operating: listed.filter(({ card }) => card.operating) }
}

/** The oscillations, and the window with what lies beyond its ends. */
function cyclesOf(
  frame: Frame,
  lists: WindowLists,
  window: WindowAround | null,
  warnings: WarningList,
  options: AnalyseOptions,
): Omit<CyclesPart, 'warnings'> {
  const { shouldStop } = options
  const input = { model: frame.model, lists, hopf: lists.hopf, window }
  const { warnings: told, ...part } = computeCycles(shouldStop ? { ...input, shouldStop } : input)
  for (const warning of told) warnings.add(warning)
  return part
}

interface WindowAround {
  card: RunningWindow
  /** The steady state it is around, scaled. */
  z: Float64Array
}

/** The window around the steady state that the model settles on from its start values. */
function runningWindow(
  frame: Frame,
  states: readonly ListedState[],
  lists: WindowLists,
  warnings: WarningList,
): WindowAround | null {
  const { system } = frame.model
  const none = (reason: Parameters<typeof warnOfNoWindow>[0]): null => {
    warnOfNoWindow(reason, warnings)
    return null
  }
  if (frame.own < frame.low || frame.own > frame.high) return none('outside-range')
  if (states.length === 0) return none('no-steady-state')
  const attractors = states.filter(({ card }) => card.stable)
  if (attractors.length === 0) return none('unstable')
  const widths = Float64Array.from(system.states, ({ low, high }) => high - low)
  const start = Float64Array.from(system.states, (state) => state.start)
  const parameters = Float64Array.from(system.parameters, ({ value }) => value)
  const settled = settle(frame.model, parameters, start, widths, attractors, frame.budget)
  if (settled.kind !== 'settled') return none(settled.kind)
  const state = attractors[settled.attractor]
  const z = state && scaled(frame, state.x, frame.own)
  const card = z ? windowAround(frame, lists, z) : null
  return z && card ? { card, z } : none('no-branch')
}
