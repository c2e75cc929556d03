import type { CardWarning, RunningWindow, StabilityCard } from '#shared/model/card-document.ts'
import type { CompiledModel } from '#shared/model/compiled-model.ts'
import { createBudget } from '../budget.ts'
import { createFrame, type Frame } from '../frame.ts'
import type { ListedHopf, WindowLists } from '../window.ts'
import { besideCycles, clipped, inUnits, isStretch, merged, type Stretch1 } from './coexisting.ts'
import { type CycleBranch, growFromCycle, growFromOnsets, isMultiple, positionOf } from './cycle-branches.ts'
import { listCycles } from './cycle-lists.ts'
import { type CycleSpace, createCycleSpace } from './cycle-system.ts'
import { besideIrregular } from './irregular.ts'
import { growFromIntegration } from './isolas.ts'
import { type Jump, jumpPast } from './jumps.ts'
import { toleratedKicks } from './kicks.ts'
import type { Onset } from './walk-cycles.ts'
import { returnValue } from './way-back.ts'
import { type WindowLine, windowLine } from './window-line.ts'

/** What the oscillation branches are computed from: the lists of the card's other parts. */
export interface CyclesInput {
  readonly model: CompiledModel
  readonly lists: WindowLists
  readonly hopf: readonly ListedHopf[]
  /** The window as `windowAround` gives it, with the steady state (scaled) it is around; null where there is none. */
  readonly window: { readonly card: RunningWindow; readonly z: Float64Array } | null
  readonly shouldStop?: () => boolean
  readonly onProgress?: (share: number) => void
}

export type CyclesPart = Required<
  Pick<StabilityCard, 'cycles' | 'cycleFolds' | 'cyclePeriodDoublings' | 'cycleTori'>
> & {
  /** The window with what lies beyond its ends. */
  readonly window: RunningWindow | null
  readonly warnings: readonly CardWarning[]
}

/** Evaluations of the linearised model (and its equal in linear algebra) in one analysis of cycles. */
const allowance = 6_000_000

/**
 * The card's part `cycles`: every oscillation branch that begins at an onset in range, those found by integration only,
 * and for the window where the system goes past its ends, what coexists, the way back and the tolerated kick.
 *
 * Deterministic; never throws on a model. `shouldStop` is asked at least every 64 evaluations; what could not be computed
 * is left out and told by a warning.
 */
export function computeCycles(input: CyclesInput): CyclesPart {
  const { lists, hopf, window } = input
  const budget = createBudget(allowance, input.shouldStop)
  const frame = createFrame(input.model, budget)
  const space = createCycleSpace(frame)
  const tell = input.onProgress ?? (() => undefined)
  const warnings: CardWarning[] = []
  if (frame.n < 2) {
    // one state only: there are no cycles, but the ends of the window lead somewhere too
    const none = { cycles: [], cycleFolds: [], cyclePeriodDoublings: [], cycleTori: [] }
    return { ...none, window: window && completed(space, lists, [], [], window), warnings }
  }
  const onsets = hopf.map(({ point, index }): Onset => ({ index, z: point.sample.z, omega: point.omega }))
  const { branches, lost } = growFromOnsets(space, onsets)
  tell(0.4)
  growFromIntegration(space, branches, lists.paths, onsets)
  tell(0.7)
  const done = window ? completed(space, lists, branches, onsets, window) : null
  const out = listCycles(frame, branches, hopf)
  for (const { index } of lost) {
    if (branches.some(({ hopf: from, end }) => from === index || end.onset === index)) continue
    const p = hopf[index]?.card.p ?? 0
    const message = `No oscillation could be computed from the onset at ${symbolOf(frame)} = ${Number(p.toPrecision(4))}.`
    warnings.push({ code: 'budget-spent', message })
  }
  for (const branch of out.cycles) {
    if (branch.end.kind !== 'budget') continue
    const message = `A branch of oscillations could not be followed beyond ${symbolOf(frame)} = ${Number(branch.end.p.toPrecision(4))}.`
    warnings.push({ code: 'budget-spent', message })
  }
  if (budget.spent()) {
    const message = 'The work allowed for oscillations was used up: branches, jumps or kicks may be missing.'
    warnings.push({ code: 'budget-spent', message })
  }
  tell(1)
  return { ...out, window: done, warnings }
}

function symbolOf({ model, control }: Frame): string {
  return model.system.parameters[control]?.symbol ?? ''
}

type Given = NonNullable<CyclesInput['window']>

/** The window with jumps, ways back, coexisting stretches and kicks. */
function completed(
  space: CycleSpace,
  lists: WindowLists,
  branches: CycleBranch[],
  onsets: readonly Onset[],
  { card, z }: Given,
): RunningWindow {
  const { frame } = space
  const line = windowLine(frame, lists, card, z)
  if (!line) return card
  const low = beyondEnd(space, lists, branches, onsets, card.low, line, -1)
  const high = beyondEnd(space, lists, branches, onsets, card.high, line, 1)
  const cycles = besideCycles(branches, line)
  const steady = merged([...low.steady, ...high.steady].map((each) => clipped(each, line)).filter(isStretch))
  const irregular = [low.irregular, high.irregular].filter((each) => each !== null)
  const coexisting = [
    ...cycles.map((each) => ({ ...inUnits(frame, each), with: 'cycle' })),
    ...steady.map((each) => ({ ...inUnits(frame, each), with: 'steady' })),
    ...irregular.map((each) => ({ ...inUnits(frame, each), with: 'irregular' })),
  ].sort((a, b) => a.from - b.from)
  const kicks = toleratedKicks(space, branches, lists.paths, line, merged([...cycles, ...steady, ...irregular]))
  return { ...card, low: low.end, high: high.end, coexisting, toleratedKick: kicks }
}

interface Beyond {
  readonly end: RunningWindow['low']
  /** Where the other steady state coexists (controls over the range). */
  readonly steady: Stretch1[]
  /** Where the irregular motion goes on beside the steady state. */
  readonly irregular: Stretch1 | null
}

function beyondEnd(
  space: CycleSpace,
  lists: WindowLists,
  branches: CycleBranch[],
  onsets: readonly Onset[],
  end: RunningWindow['low'],
  line: WindowLine,
  side: 1 | -1,
): Beyond {
  const { frame } = space
  if (end.kind === 'range-end' || end.kind === 'box-left') return { end, steady: [], irregular: null }
  const z = side === 1 ? line.ends.high : line.ends.low
  const edge = side === 1 ? line.to : line.from
  const jump = jumpPast(space, lists, branches, end, z, side)
  if (!jump) return { end, steady: [], irregular: null }
  addFoundBranch(space, branches, onsets, jump)
  const jumpTo =
    jump.to.kind === 'cycle' ? { kind: jump.to.kind, amplitude: jump.to.at.measures.amplitude } : { kind: jump.to.kind }
  const soft = end.kind === 'onset' && end.verdict === 'soft'
  const back = soft ? null : returnValue(space, lists, branches, end, edge, side, jump)
  const unit = frame.unit[frame.n] as number
  const told = back === null ? { ...end, jumpTo } : { ...end, jumpTo, returnAt: back * unit }
  const overlap = jump.to.kind === 'steady' && back !== null && side * (edge - back) > 0
  const steady = overlap ? [{ from: Math.min(edge, back), to: Math.max(edge, back) }] : []
  const other = side === 1 ? line.from : line.to
  const irregular =
    jump.to.kind === 'irregular' ? besideIrregular(space, lists.paths, edge, other, side, jump.to.state) : null
  return { end: told, steady, irregular }
}

/** A cycle that was jumped to and lies on no branch yet brings its own. */
function addFoundBranch(space: CycleSpace, branches: CycleBranch[], onsets: readonly Onset[], { to }: Jump): void {
  if (to.kind !== 'cycle' || to.fromBranch) return
  if (positionOf(space, branches, to.at) || isMultiple(branches, to.at)) return
  const branch = growFromCycle(space, to.at, onsets)
  if (branch) branches.push(branch)
}
