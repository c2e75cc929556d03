import type { RunningWindow } from '#shared/model/card-document.ts'
import { type WindowLists, windowAround } from '../window.ts'
import { type CycleBranch, isStableSegment, positionOf } from './cycle-branches.ts'
import type { CycleSpace } from './cycle-system.ts'
import type { Jump } from './jumps.ts'

/** A stretch of the control (over the range) on which stable cycles of one branch exist. */
export interface StableStretch {
  readonly branch: CycleBranch
  readonly from: number
  readonly to: number
  /** Segments `first` to `last` of the branch. */
  readonly first: number
  readonly last: number
}

/** All stretches of stable cycles of a branch. A homoclinic end reaches to the control value it tends to. */
export function stableStretches(branch: CycleBranch): StableStretch[] {
  const { points } = branch
  const out: StableStretch[] = []
  for (let i = 0; i + 1 < points.length; ) {
    if (!isStableSegment(branch, i)) {
      i++
      continue
    }
    let j = i
    while (j + 2 < points.length && isStableSegment(branch, j + 1)) j++
    const values = points.slice(i, j + 2).map(({ at }) => at.solution.cycle.p)
    if (j + 2 === points.length) values.push(branch.end.p)
    if (i === 0 && branch.start) values.push(branch.start.p)
    out.push({ branch, from: Math.min(...values), to: Math.max(...values), first: i, last: j })
    i = j + 1
  }
  return out
}

/**
 * Going back, the control value (over the range) at which the state that was jumped to is gone and the steady state is
 * regained: for a cycle the outermost end of its branch's stable stretches that hang together (where one ends within
 * another, the motion goes over to that one); for a steady state the far end of its own window. Null where it reaches to
 * the end of the range, or the attractor's end was not found.
 */
export function returnValue(
  space: CycleSpace,
  lists: WindowLists,
  branches: readonly CycleBranch[],
  end: RunningWindow['low'],
  edge: number,
  side: 1 | -1,
  jump: Jump,
): number | null {
  const { frame } = space
  const unit = frame.unit[frame.n] as number
  if (jump.to.kind === 'cycle') {
    const position = positionOf(space, branches, jump.to.at)
    if (!position) return null
    const stretches = stableStretches(position.branch)
    const own = stretches.find(({ first, last }) => position.segment >= first && position.segment <= last)
    if (!own) return null
    let reach = side === 1 ? own.from : own.to
    for (let grown = true; grown; ) {
      grown = false
      for (const { from, to } of stretches) {
        const next = side === 1 ? from : to
        if (from <= reach && to >= reach && side * (next - reach) < 0) {
          reach = next
          grown = true
        }
      }
    }
    const atRangeEnd = side === 1 ? reach * unit <= frame.low + 1e-9 * unit : reach * unit >= frame.high - 1e-9 * unit
    if (atRangeEnd) return null
    // a cycle that ends before the window begins leaves no hysteresis: the way back ends at the end itself
    return side * (reach - edge) >= -1e-5 ? edge : reach
  }
  if (jump.to.kind === 'steady') {
    const other = windowAround(frame, lists, jump.to.at.z)
    if (!other) return null
    const reach = (side === 1 ? other.from : other.to) / unit
    const otherEnd = side === 1 ? other.low : other.high
    if (otherEnd.kind === 'range-end' || otherEnd.kind === 'box-left') return null
    // an exchange of stability: both states meet there
    if (end.kind === 'branch-point' && Math.abs(reach - edge) < 1e-6) return null
    return side * (reach - edge) > 0 ? edge : reach
  }
  return null
}
