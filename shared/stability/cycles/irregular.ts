import type { BranchPath } from '../branches.ts'
import type { Stretch1 } from './coexisting.ts'
import type { CycleSpace } from './cycle-system.ts'
import { follow } from './follow.ts'
import { stableAt } from './steady-at.ts'

/** Longest stretch looked at, as a share of the range, and how finely its end is looked for. */
const farthest = 0.3
const halvings = 5

/**
 * How far into the window an irregular motion that was jumped to goes on beside the steady state: it is followed at values
 * further and further back, each time from where it was. Long irregular transients cannot be told from the motion itself,
 * so the stretch may be given somewhat too long, never as proof. Null where it is gone at once.
 */
export function besideIrregular(
  space: CycleSpace,
  paths: readonly BranchPath[],
  edge: number,
  other: number,
  side: 1 | -1,
  state: Float64Array,
): Stretch1 | null {
  let last = state
  const goesOn = (p: number): boolean => {
    if (space.frame.budget.spent()) return false
    const steady = stableAt(space.frame, paths, p)
    const found = follow(space, last, p, { steady, span: 1e9, maxSteps: 30_000, mostTops: 300 })
    if (found.kind !== 'irregular') return false
    last = found.state
    return true
  }
  const most = Math.min(farthest, Math.abs(edge - other))
  let there = 0
  let gone = most
  for (let distance = 1e-3; distance < most; distance *= 2.5) {
    if (!goesOn(edge - side * distance)) {
      gone = distance
      break
    }
    there = distance
  }
  if (there === 0) return null
  for (let pass = 0; pass < halvings; pass++) {
    const middle = (there + gone) / 2
    if (goesOn(edge - side * middle)) there = middle
    else gone = middle
  }
  const end = edge - side * there
  return { from: Math.min(edge, end), to: Math.max(edge, end) }
}
