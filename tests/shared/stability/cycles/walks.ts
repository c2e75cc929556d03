import { createBudget } from '#shared/stability/budget.ts'
import { type CycleBranch, crossings, cycleOn, growFromOnsets } from '#shared/stability/cycles/cycle-branches.ts'
import { type CycleSpace, createCycleSpace, type Solution } from '#shared/stability/cycles/cycle-system.ts'
import { type Measures, measure } from '#shared/stability/cycles/measures.ts'
import { createFrame, scaled } from '#shared/stability/frame.ts'
import { compiled, type ShortModel } from '../documents.ts'

/** A Hopf point known in closed form. */
export interface KnownOnset {
  p: number
  x: number[]
  omega: number
}

/** The branches from known onsets, and the space they live in. */
export function branchesOf(model: ShortModel, onsets: KnownOnset[]): { space: CycleSpace; branches: CycleBranch[] } {
  const frame = createFrame(compiled(model), createBudget(20_000_000))
  const space = createCycleSpace(frame)
  const listed = onsets.map(({ p, x, omega }, index) => ({ index, z: scaled(frame, x, p), omega }))
  return { space, branches: growFromOnsets(space, listed).branches }
}

export interface ExactCycle {
  solution: Solution
  measures: Measures
}

/** The cycles of a branch at a control value in its own unit, computed there (not on straight lines), small ones first. */
export function cyclesAt(space: CycleSpace, branch: CycleBranch, p: number): ExactCycle[] {
  const { frame, n } = space
  const own = p / (frame.unit[n] as number)
  return crossings(branch, own)
    .flatMap(({ segment }) => {
      const solution = cycleOn(space, branch, segment, own)
      return solution ? [{ solution, measures: measure(frame, solution.cycle, null) }] : []
    })
    .sort((a, b) => a.measures.amplitude - b.measures.amplitude)
}
