import type { Branch, HopfPoint, StabilityCard, SteadyState } from '#shared/model/card-document.ts'
import type { BranchPath } from './branches.ts'
import type { WalkEnd } from './continuation.ts'
import type { Forms } from './forms.ts'
import { controlOf, type Frame, linearise, observedAt, scaled, snapped, spectrumHere, stateOf } from './frame.ts'
import { type BranchHopf, sameHopf, samePoint } from './hopf.ts'
import { kindOf } from './kinds.ts'
import { eigenvalueList, isStable, type Spectrum } from './spectrum.ts'
import type { SteadyStateResult } from './steady-states.ts'
import { type HopfJudgement, judgeHopf } from './verdict.ts'
import type { ListedHopf } from './window.ts'

/** A steady state of the card with what the window needs of it. */
export interface ListedState {
  readonly card: SteadyState
  readonly x: Float64Array
  readonly spectrum: Spectrum
}

/** Values whose difference is rounding stand in no order: the next criterion decides. */
function compareWithin(a: number, b: number, slack: number): number {
  return Math.abs(a - b) <= slack ? 0 : a - b
}

/** A state as it stands in the card; what is rounding of the box's width is zero. */
export function stateRecord(frame: Frame, x: ArrayLike<number>): Record<string, number> {
  const { states } = frame.model.system
  const entries = states.map(({ symbol, low, high }, i): [string, number] => [
    symbol,
    cleaned(x[i] as number, high - low),
  ])
  return Object.fromEntries(entries)
}

/** A computed zero is zero up to rounding of the scale it was computed on. */
function cleaned(value: number, width: number): number {
  return Math.abs(value) <= 4e-16 * width ? 0 : value
}

function cleanedControl(frame: Frame, z: Float64Array): number {
  return snapped(frame, controlOf(frame, z))
}

/** Steady states at the own value, sorted by the observed value, then by the states in document order. */
export function listSteadyStates(frame: Frame, found: SteadyStateResult): ListedState[] {
  const listed: (ListedState & { observed: number })[] = []
  for (const { x, residual, multiple } of found.states) {
    const z = scaled(frame, x, frame.own)
    if (!linearise(frame, z)) continue
    const spectrum = spectrumHere(frame)
    if (!spectrum) continue
    // at a multiple one the zero eigenvalue is known to half the digits only: the search's own test is the better one
    const kind = multiple ? 'degenerate' : kindOf(spectrum, frame.jacobian)
    const observed = observedAt(frame, z)
    const eigenvalues = eigenvalueList(spectrum)
    const card = { state: stateRecord(frame, x), eigenvalues, stable: !multiple && isStable(spectrum), kind, residual }
    listed.push({ card, x, spectrum, observed })
  }
  const widths = frame.model.system.states.map(({ low, high }) => high - low)
  const spread = Math.max(...listed.map(({ observed }) => Math.abs(observed)), 0)
  return listed.sort((a, b) => {
    const first = compareWithin(a.observed, b.observed, 1e-9 * spread)
    if (first !== 0) return first
    for (let i = 0; i < frame.n; i++) {
      const next = compareWithin(a.x[i] as number, b.x[i] as number, 1e-9 * (widths[i] as number))
      if (next !== 0) return next
    }
    return 0
  })
}

function endOnCard(frame: Frame, path: BranchPath, index: 0 | 1): Branch['ends'][number] {
  const end: WalkEnd = path.ends[index]
  const vertex = path.vertices.at(index === 0 ? 0 : -1)
  const p = vertex ? cleanedControl(frame, vertex.sample.z) : frame.low
  const symbol = end.kind === 'box-left' ? frame.model.system.states[end.state]?.symbol : undefined
  return symbol === undefined ? { kind: end.kind, p } : { kind: end.kind, p, symbol }
}

/** Branches with Hopf points as points of their own; every turning point and branch point is one already. */
export function listBranches(frame: Frame, paths: readonly BranchPath[], hopf: readonly ListedHopf[]): Branch[] {
  return paths.map((path) => {
    const own = hopf.filter((listed) => listed.path === path)
    const points: Branch['points'] = []
    const add = (z: Float64Array, spectrum: Spectrum): void => {
      points.push({
        p: cleanedControl(frame, z),
        state: stateRecord(frame, stateOf(frame, z)),
        stable: isStable(spectrum),
        observed: observedAt(frame, z),
        eigenvalues: eigenvalueList(spectrum),
      })
    }
    path.vertices.forEach(({ sample }, i) => {
      add(sample.z, sample.spectrum)
      const here = own.filter(({ point }) => point.segment === i && i + 1 < path.vertices.length)
      const inOrder = here.sort((a, b) => along(path, i, a.point) - along(path, i, b.point))
      for (const { point } of inOrder) {
        const repeats = [i, i + 1].some((k) => {
          const vertex = path.vertices[k]
          return vertex !== undefined && samePoint(frame, vertex.sample.z, point.sample.z)
        })
        if (!repeats) add(point.sample.z, point.sample.spectrum)
      }
    })
    return { id: path.id, points, ends: [endOnCard(frame, path, 0), endOnCard(frame, path, 1)] }
  })
}

function along(path: BranchPath, segment: number, { sample }: BranchHopf): number {
  const a = path.vertices[segment]?.sample.z
  const b = path.vertices[segment + 1]?.sample.z
  if (!a || !b) return 0
  let sum = 0
  for (let i = 0; i < a.length; i++) {
    sum += ((sample.z[i] as number) - (a[i] as number)) * ((b[i] as number) - (a[i] as number))
  }
  return sum
}

interface Located {
  z: Float64Array
  p: number
  observed: number
}

/** Each point once (1e-6 of box and range), by control value, then by the observed value. */
function located(frame: Frame, points: readonly Float64Array[]): Located[] {
  const kept: Located[] = []
  for (const z of points) {
    if (kept.some((known) => samePoint(frame, known.z, z))) continue
    kept.push({ z, p: cleanedControl(frame, z), observed: observedAt(frame, z) })
  }
  const slack = 1e-9 * (frame.high - frame.low)
  return kept.sort((a, b) => compareWithin(a.p, b.p, slack) || a.observed - b.observed)
}

/** Turning points of all branches, and where they lie (scaled). */
export function listFolds(frame: Frame, paths: readonly BranchPath[]) {
  const marked = paths.flatMap(({ vertices }) => vertices.filter(({ mark }) => mark === 'fold'))
  const points = located(
    frame,
    marked.map(({ sample }) => sample.z),
  )
  const card = points.map(({ z, p }) => ({ p, state: stateRecord(frame, stateOf(frame, z)) }))
  return { card, points: points.map(({ z }) => z) }
}

type PointKind = NonNullable<StabilityCard['branchPoints']>[number]['kind']

/** Branch points of the set and those found by real eigenvalues alone, and where they lie (scaled). */
export function listBranchPoints(frame: Frame, known: readonly { z: Float64Array; kind: PointKind }[]) {
  const points = located(
    frame,
    known.map(({ z }) => z),
  )
  const card = points.map(({ z, p }) => ({
    p,
    state: stateRecord(frame, stateOf(frame, z)),
    kind: known.find((each) => samePoint(frame, each.z, z))?.kind ?? ('other' as const),
  }))
  return { card, points: points.map(({ z }) => z) }
}

/** A Hopf point before it has a place in the list. */
export interface FoundHopf {
  readonly point: BranchHopf
  readonly path: BranchPath
}

/** Hopf points of all branches: each once, judged, by control value, observed value and frequency. */
export function listHopf(
  frame: Frame,
  forms: Forms,
  found: readonly FoundHopf[],
): { listed: ListedHopf[]; judgements: HopfJudgement[] } {
  const kept: (FoundHopf & { p: number; observed: number })[] = []
  for (const { point, path } of found) {
    if (kept.some((known) => sameHopf(frame, known.point, point))) continue
    kept.push({ point, path, p: cleanedControl(frame, point.sample.z), observed: observedAt(frame, point.sample.z) })
  }
  const slack = 1e-9 * (frame.high - frame.low)
  const spread = Math.max(...kept.map(({ observed }) => Math.abs(observed)), 0)
  kept.sort(
    (a, b) =>
      compareWithin(a.p, b.p, slack) ||
      compareWithin(a.observed, b.observed, 1e-9 * spread) ||
      a.point.omega - b.point.omega,
  )
  const judgements = kept.map(({ point }) => judgeHopf(frame, forms, point))
  const listed = kept.map(({ point, path, p }, index): ListedHopf => {
    const { silent: _silent, degenerateBy: _by, ...judged } = judgements[index] as HopfJudgement
    const state = stateRecord(frame, stateOf(frame, point.sample.z))
    const card: HopfPoint = { p, state, branch: path.id, ...judged, proved: false }
    return { point, card, path, index }
  })
  return { listed, judgements }
}
