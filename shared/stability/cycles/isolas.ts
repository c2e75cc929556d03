import type { BranchPath } from '../branches.ts'
import { type CycleBranch, growFromCycle, isMultiple, positionOf } from './cycle-branches.ts'
import type { CycleSpace } from './cycle-system.ts'
import { follow } from './follow.ts'
import { stableAt } from './steady-at.ts'
import type { Onset } from './walk-cycles.ts'

/** Values of the control, beside its own, at which cycles are looked for by integration. */
const values = 6
const mostBranches = 6

/**
 * Branches that begin at no onset in range: from cycles reached by integration at the own value and at values across the
 * range, from the document's start values and from a point elsewhere in the box. They are added to `branches`.
 */
export function growFromIntegration(
  space: CycleSpace,
  branches: CycleBranch[],
  paths: readonly BranchPath[],
  onsets: readonly Onset[],
): void {
  const { frame, n } = space
  const { budget, low, high, own, boxLow, boxHigh } = frame
  const unit = frame.unit[n] as number
  const { states } = frame.model.system
  const start = Float64Array.from(states, (state) => state.start)
  // fixed irrational shares of the box: the same in every run
  const elsewhere = Float64Array.from({ length: n }, (_, i) => {
    const share = (0.37 + 0.5 * (i + 1) * Math.SQRT2) % 1
    return (boxLow[i] as number) + (0.15 + 0.7 * share) * ((boxHigh[i] as number) - (boxLow[i] as number))
  })
  const inRange = own >= low && own <= high ? [own] : []
  const spread = Array.from({ length: values }, (_, i) => low + ((i + 0.5) / values) * (high - low))
  let added = 0
  for (const p of [...inRange, ...spread]) {
    const steady = stableAt(frame, paths, p / unit)
    for (const from of [start, elsewhere]) {
      if (budget.spent() || added >= mostBranches) return
      const maxSteps = p === own ? 12_000 : 6_000
      const destination = follow(space, from, p / unit, { steady, span: 1e9, maxSteps, mostTops: 100 })
      if (destination.kind !== 'cycle') continue
      const { at } = destination
      if (positionOf(space, branches, at) || isMultiple(branches, at)) continue
      const branch = growFromCycle(space, at, onsets)
      // one that reaches an onset which has its branch already is that branch, met on the way
      if (!branch || hasBranch(branches, branch.hopf)) continue
      branches.push(branch)
      added++
    }
  }
}

function hasBranch(branches: readonly CycleBranch[], onset: number | null): boolean {
  return onset !== null && branches.some(({ hopf, end }) => hopf === onset || end.onset === onset)
}
