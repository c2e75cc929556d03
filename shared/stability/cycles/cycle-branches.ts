import type { CycleAt } from './branch-point.ts'
import { cycleAt } from './branch-point.ts'
import { type Cycle, extentOf, onMesh, sizeOf } from './cycle.ts'
import { type CycleSpace, controlRow, correctCycle, type Solution } from './cycle-system.ts'
import { firstSize, startAtOnset } from './start-at-onset.ts'
import {
  type CycleEnd,
  type CycleWalk,
  type Onset,
  remeshed,
  turned,
  type WalkedPoint,
  walkCycles,
} from './walk-cycles.ts'

/** A branch of cycles, from its onset (or, found by integration, from the lower of its two ends) to its end. */
export interface CycleBranch {
  /** Position of the onset it begins at in the list given, or null. */
  readonly hopf: number | null
  readonly points: readonly WalkedPoint[]
  /** How it begins, where that is not an onset. */
  readonly start: CycleEnd | null
  readonly end: CycleEnd
}

/**
 * The branches that begin at the given onsets, each once: an onset at which an earlier branch ended has none of its own.
 * `lost` are onsets from which Newton's method found no first cycle.
 */
export function growFromOnsets(
  space: CycleSpace,
  onsets: readonly Onset[],
): { branches: CycleBranch[]; lost: Onset[] } {
  const branches: CycleBranch[] = []
  const lost: Onset[] = []
  const reached = new Set<number>()
  for (const onset of onsets) {
    if (reached.has(onset.index)) continue
    if (space.frame.budget.spent()) break
    const first = startAtOnset(space, onset)
    if (!first) {
      lost.push(onset)
      continue
    }
    const { points, end } = walkCycles(space, first.at, { onsets, smallest: first.size })
    if (end.onset !== undefined) reached.add(end.onset)
    branches.push({ hopf: onset.index, points, start: null, end })
  }
  return { branches, lost }
}

/** The branch through a cycle that was found by integration, walked both ways. */
export function growFromCycle(space: CycleSpace, found: CycleAt, onsets: readonly Onset[]): CycleBranch | null {
  const { cycle } = found.solution
  const solution = correctCycle(space, cycle, cycle, controlRow(cycle))
  const at = solution && cycleAt(space.frame, solution)
  const start = at && (remeshed(space, at, cycle.mesh.length - 1) ?? at)
  if (!start) return null
  const options = { onsets, smallest: firstSize }
  const up = walkCycles(space, start, options)
  if (up.end.kind === 'closed') return { hopf: null, points: up.points, start: up.end, end: up.end }
  const down = walkCycles(space, turned(start), options)
  const back = down.points.slice(1).reverse()
  const points = [...back.map(({ at, mark }) => ({ at: turned(at), mark })), ...up.points]
  return anchored({ hopf: null, points, start: down.end, end: up.end }, up, down)
}

/** A branch that reaches an onset begins there; else the end that says most stands last. */
function anchored(branch: CycleBranch, up: CycleWalk, down: CycleWalk): CycleBranch {
  if (down.end.onset !== undefined) return { ...branch, hopf: down.end.onset, start: null }
  const reversed = (): CycleBranch['points'] =>
    [...branch.points].reverse().map(({ at, mark }) => ({ at: turned(at), mark }))
  if (up.end.onset !== undefined) return { hopf: up.end.onset, points: reversed(), start: null, end: down.end }
  if (down.end.kind === 'homoclinic' && up.end.kind !== 'homoclinic') {
    return { hopf: null, points: reversed(), start: up.end, end: down.end }
  }
  return branch
}

/** Where a cycle lies on one of the branches: between points `segment` and `segment + 1`. */
export interface CyclePosition {
  readonly branch: CycleBranch
  readonly segment: number
}

/**
 * The place on the branches of a cycle, or null. The branch itself is computed at this control value from its points
 * nearby; it is the same cycle where the period agrees within 0.1 % and every state's extent within 2 % of the cycle's size.
 */
export function positionOf(space: CycleSpace, branches: readonly CycleBranch[], at: CycleAt): CyclePosition | null {
  const { p, period } = at.solution.cycle
  for (const branch of branches) {
    for (const { segment, value } of crossings(branch, p)) {
      if (Math.abs(value.period / period - 1) > 0.2) continue
      const there = cycleOn(space, branch, segment, p)
      if (there && isSame(space.n, there.cycle, at.solution.cycle)) return { branch, segment }
    }
  }
  return null
}

/** The branch's own cycle at control value p between points `segment` and `segment + 1`. */
export function cycleOn(space: CycleSpace, { points }: CycleBranch, segment: number, p: number): Solution | null {
  const a = points[segment]?.at.solution.cycle
  const b = points[segment + 1]?.at.solution.cycle
  if (!a || !b || a.p === b.p) return null
  const s = (p - a.p) / (b.p - a.p)
  const near = s < 0.5 ? a : b
  const far = onMesh(s < 0.5 ? b : a, space.n, near.mesh)
  const share = s < 0.5 ? s : 1 - s
  const u = near.u.map((value, k) => value + share * ((far.u[k] as number) - value))
  const guess: Cycle = { mesh: near.mesh, u, period: near.period + share * (far.period - near.period), p }
  return correctCycle(space, guess, near, controlRow(guess))
}

function isSame(n: number, a: Cycle, b: Cycle): boolean {
  if (Math.abs(a.period / b.period - 1) > 1e-3) return false
  const slack = 0.02 * sizeOf(b, n)
  for (let i = 0; i < n; i++) {
    const [x, y] = [extentOf(a, n, i), extentOf(b, n, i)]
    if (Math.abs(x.low - y.low) > slack || Math.abs(x.high - y.high) > slack) return false
  }
  return true
}

/** What straight lines between a branch's points say where they cross a control value. */
export interface Crossing {
  readonly segment: number
  readonly stable: boolean
  readonly value: { period: number; amplitude: number; max: number; min: number }
  /** The nearer of the two points. */
  readonly nearer: CycleAt
}

export function crossings({ points }: CycleBranch, p: number): Crossing[] {
  const out: Crossing[] = []
  for (let i = 0; i + 1 < points.length; i++) {
    const a = (points[i] as WalkedPoint).at
    const b = (points[i + 1] as WalkedPoint).at
    const from = a.solution.cycle.p
    const to = b.solution.cycle.p
    if ((from - p) * (to - p) > 0 || from === to) continue
    const s = (p - from) / (to - from)
    const mix = (u: number, v: number): number => u + s * (v - u)
    out.push({
      segment: i,
      // beside a point where stability changes it is the other neighbour that tells
      stable: stableBetween(points[i] as WalkedPoint, points[i + 1] as WalkedPoint, s),
      nearer: s < 0.5 ? a : b,
      value: {
        period: mix(a.solution.cycle.period, b.solution.cycle.period),
        amplitude: mix(a.measures.amplitude, b.measures.amplitude),
        max: mix(a.measures.max, b.measures.max),
        min: mix(a.measures.min, b.measures.min),
      },
    })
  }
  return out
}

function stableBetween(a: WalkedPoint, b: WalkedPoint, s: number): boolean {
  if (a.mark !== null && b.mark === null) return b.at.stable
  if (b.mark !== null && a.mark === null) return a.at.stable
  return s < 0.5 ? a.at.stable : b.at.stable
}

/** True where the segment from point i to i + 1 consists of stable cycles. */
export function isStableSegment({ points }: CycleBranch, i: number): boolean {
  const [a, b] = [points[i], points[i + 1]]
  return a !== undefined && b !== undefined && stableBetween(a, b, 0.25) && stableBetween(a, b, 0.75)
}

/** True where a cycle's period is a whole multiple of that of a known cycle at this control value: a doubled one. */
export function isMultiple(branches: readonly CycleBranch[], at: CycleAt): boolean {
  return branches.some((branch) =>
    crossings(branch, at.solution.cycle.p).some(({ value, stable }) => {
      const ratio = at.solution.cycle.period / value.period
      return !stable && Math.round(ratio) >= 2 && Math.abs(ratio / Math.round(ratio) - 1) < 0.05
    }),
  )
}

/** Size of a cycle below which it is the onset itself. */
export function isPoint(at: CycleAt, n: number): boolean {
  return sizeOf(at.solution.cycle, n) < 1.5 * firstSize
}
