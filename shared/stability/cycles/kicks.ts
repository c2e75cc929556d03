import type { RunningWindow } from '#shared/model/card-document.ts'
import type { BranchPath } from '../branches.ts'
import { distance, type Frame, snapped } from '../frame.ts'
import type { CycleAt } from './branch-point.ts'
import { isStretch, merged, type Stretch1 } from './coexisting.ts'
import { extentOf } from './cycle.ts'
import { type CycleBranch, crossings } from './cycle-branches.ts'
import type { CycleSpace } from './cycle-system.ts'
import { follow } from './follow.ts'
import type { SteadyNear } from './homoclinic.ts'
import { stableAt } from './steady-at.ts'
import type { WalkedPoint } from './walk-cycles.ts'
import type { WindowLine } from './window-line.ts'

type Kick = NonNullable<RunningWindow['toleratedKick']>[number]

/** Values on a stretch, both ends included, beside those of the branch's own points. */
const atLeast = 9
/** Values at which kicks are found by integration: each costs many runs. */
const byIntegration = 5

/**
 * The tolerated kick along the window: the amplitude of the smallest unstable cycle around the steady state wherever one
 * exists; where something coexists and there is no such cycle, the smallest kick of each single state that the steady
 * state does not survive.
 */
export function toleratedKicks(
  space: CycleSpace,
  branches: readonly CycleBranch[],
  paths: readonly BranchPath[],
  line: WindowLine,
  coexisting: readonly Stretch1[],
): Kick[] {
  const { frame, n } = space
  const unit = frame.unit[n] as number
  const around = branches.filter((branch) => surrounds(frame, branch, line))
  const kicks: Kick[] = []
  const covered: Stretch1[] = []
  for (const stretch of unstableStretches(around, line)) {
    covered.push(stretch)
    for (const p of valuesOn(stretch, around)) {
      const amplitude = smallestAt(around, p)
      if (amplitude !== null) kicks.push({ p: snapped(frame, p * unit), amplitude })
    }
  }
  for (const rest of without(coexisting, covered)) {
    for (let k = 0; k < byIntegration; k++) {
      if (frame.budget.spent()) break
      const p =
        rest.from +
        ((rest.to - rest.from) * (k + (k === 0 ? 0.004 : k === byIntegration - 1 ? -0.004 : 0))) / (byIntegration - 1)
      const kick = kicksAt(space, paths, line, p)
      if (kick) kicks.push({ p: snapped(frame, p * unit), kick })
    }
  }
  return kicks.sort((a, b) => a.p - b.p)
}

/** Whether the cycles of a branch go around the window's steady state: it lies within their extent in every state. */
function surrounds(frame: Frame, { points }: CycleBranch, line: WindowLine): boolean {
  const inside = points.filter(({ at }) => {
    const { p } = at.solution.cycle
    return p > line.from && p < line.to && !at.stable
  })
  const sample = inside[inside.length >> 1]
  const steady = sample && line.at(sample.at.solution.cycle.p)
  return steady !== undefined && steady !== null && isAround(frame, sample as WalkedPoint, steady)
}

function isAround({ n }: Frame, { at }: WalkedPoint, { z }: SteadyNear): boolean {
  for (let i = 0; i < n; i++) {
    const { low, high } = extentOf(at.solution.cycle, n, i)
    const slack = 0.25 * (high - low) + 1e-9
    const value = z[i] as number
    if (value < low - slack || value > high + slack) return false
  }
  return true
}

/** Parts of the window over which unstable cycles of the branches exist. */
function unstableStretches(branches: readonly CycleBranch[], line: WindowLine): Stretch1[] {
  const out: Stretch1[] = []
  for (const { points, hopf, end } of branches) {
    let run: number[] = []
    const flush = (): void => {
      if (run.length > 1) out.push({ from: Math.min(...run), to: Math.max(...run) })
      run = []
    }
    points.forEach(({ at, mark }, i) => {
      const { p } = at.solution.cycle
      if (!at.stable || mark === 'fold') run.push(p)
      else flush()
      if (i === 0 && hopf !== null && !at.stable && Math.abs(p - line.to) < Math.abs(p - line.from))
        run.push(closeTo(p, line.to))
      else if (i === 0 && hopf !== null && !at.stable) run.push(closeTo(p, line.from))
      if (i === points.length - 1 && !at.stable) run.push(end.p)
    })
    flush()
  }
  return merged(
    out.map(({ from, to }) => ({ from: Math.max(from, line.from), to: Math.min(to, line.to) })).filter(isStretch),
  )
}

/** The onset's own value where the first cycle is next to it. */
function closeTo(p: number, edge: number): number {
  return Math.abs(p - edge) < 1e-3 ? edge : p
}

/** The branches' own points on a stretch, its ends, and some between: straight lines between them are within 1 %. */
function valuesOn({ from, to }: Stretch1, branches: readonly CycleBranch[]): number[] {
  const values = Array.from({ length: atLeast }, (_, k) => from + ((to - from) * k) / (atLeast - 1))
  for (const { points } of branches) {
    for (const { at } of points) {
      const { p } = at.solution.cycle
      if (!at.stable && p > from && p < to) values.push(p)
    }
  }
  values.sort((a, b) => a - b)
  const least = (to - from) * 1e-4
  return values.filter((p, i) => i === 0 || i === values.length - 1 || p - (values[i - 1] as number) > least)
}

function smallestAt(branches: readonly CycleBranch[], p: number): number | null {
  let least: number | null = null
  for (const branch of branches) {
    for (const { stable, value } of crossings(branch, p)) {
      if (!stable && (least === null || value.amplitude < least)) least = value.amplitude
    }
    // at an end of the stretch the branch may turn, or shrink to the onset
    for (const { at, mark } of branch.points) {
      if (mark === 'fold' && Math.abs(at.solution.cycle.p - p) < 1e-12)
        least = Math.min(least ?? Number.POSITIVE_INFINITY, at.measures.amplitude)
    }
    const first = branch.points[0]?.at
    if (first && branch.hopf !== null && !first.stable && beyond(first, branch, p)) least = 0
  }
  return least
}

/** True where p lies between the first cycle and its onset, or at the onset itself. */
function beyond(first: CycleAt, { points }: CycleBranch, p: number): boolean {
  const second = points[1]?.at.solution.cycle.p
  const here = first.solution.cycle.p
  return second !== undefined && (p - here) * (here - second) > 0 && Math.abs(p - here) < 1e-3
}

function without(stretches: readonly Stretch1[], covered: readonly Stretch1[]): Stretch1[] {
  let left = [...stretches]
  for (const { from, to } of covered) {
    left = left.flatMap((each) => {
      if (to <= each.from || from >= each.to) return [each]
      return [
        { from: each.from, to: from },
        { from: to, to: each.to },
      ].filter(isStretch)
    })
  }
  return left.filter(({ from, to }) => to - from > 1e-4)
}

/** Smallest kick of each state, either way, that is not survived; states that survive any kick within the box: absent. */
function kicksAt(
  space: CycleSpace,
  paths: readonly BranchPath[],
  line: WindowLine,
  p: number,
): Record<string, number> | null {
  const { frame, n } = space
  const home = line.at(p)
  if (!home) return null
  const steady = stableAt(frame, paths, p)
  const which = steady.findIndex(({ z }) => distance(z, home.z) < 1e-7)
  if (which < 0) return null
  const survives = (state: number, kick: number): boolean => {
    const start = Float64Array.from({ length: n }, (_, i) => (home.z[i] as number) * (frame.unit[i] as number))
    start[state] = (start[state] as number) + kick
    const found = follow(space, start, p, { steady, span: 1e9, maxSteps: 8_000, mostTops: 150 })
    return found.kind === 'steady' && found.which === which
  }
  const entries: [string, number][] = []
  frame.model.system.states.forEach(({ symbol, low, high }, state) => {
    let smallest = Number.POSITIVE_INFINITY
    for (const sign of [1, -1]) {
      const most = Math.min(high - low, smallest)
      let safe = 0
      let lost = Number.POSITIVE_INFINITY
      for (const share of [0.02, 0.05, 0.1, 0.2, 0.35, 0.5, 0.75, 1]) {
        if (frame.budget.spent()) return
        const kick = share * most
        if (survives(state, sign * kick)) safe = kick
        else {
          lost = kick
          break
        }
      }
      if (!Number.isFinite(lost)) continue
      for (let pass = 0; pass < 9; pass++) {
        const middle = (safe + lost) / 2
        if (survives(state, sign * middle)) safe = middle
        else lost = middle
      }
      smallest = Math.min(smallest, lost)
    }
    if (Number.isFinite(smallest)) entries.push([symbol, smallest])
  })
  return entries.length > 0 ? Object.fromEntries(entries) : null
}
