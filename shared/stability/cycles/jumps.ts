import type { RunningWindow } from '#shared/model/card-document.ts'
import type { WindowLists } from '../window.ts'
import type { CycleAt } from './branch-point.ts'
import { type CycleBranch, crossings } from './cycle-branches.ts'
import type { CycleSpace } from './cycle-system.ts'
import { type Destination, follow } from './follow.ts'
import { type SteadyNear, steadyNear } from './homoclinic.ts'
import { growingDirection, stableAt } from './steady-at.ts'

/** Where the system goes past one end of the window, and the control value (over the range) at which that was seen. */
export interface Jump {
  readonly p: number
  readonly to:
    | { kind: 'cycle'; at: CycleAt; fromBranch: boolean }
    | { kind: 'steady'; at: SteadyNear }
    | { kind: 'irregular'; state: Float64Array }
    | { kind: 'leaves-box' }
}

/** A small disturbance: this share of the box. */
const disturbance = 1e-3

/**
 * Where the system goes from a small disturbance just past an end of the window: a soft onset to its own small cycle (as
 * its branch says), else by integration. How far past: so far that the disturbance grows by some 2 % a period, between
 * 0.2 % and 5 % of the range; further out where that does not decide. Null where it could not be found out.
 */
export function jumpPast(
  space: CycleSpace,
  lists: WindowLists,
  branches: readonly CycleBranch[],
  end: RunningWindow['low'],
  z: Float64Array,
  side: 1 | -1,
): Jump | null {
  const { frame, n } = space
  const { low, high, unit, budget } = frame
  const width = unit[n] as number
  const hopf = end.kind === 'onset' && end.index !== undefined ? lists.hopf[end.index] : undefined
  const edge = hopf ? hopf.card.p / width : (z[n] as number)
  const room = side === 1 ? high / width - edge : edge - low / width
  if (room < 1e-6) return null
  const wanted = hopf ? 0.02 / (Math.abs(hopf.card.crossing) * width * hopf.card.period) : 2e-3
  const first = Math.min(0.05, Math.max(2e-3, wanted))
  const softSide = hopf?.card.cycleSide === (side === 1 ? 'above' : 'below')
  if (hopf && hopf.card.verdict === 'soft' && softSide) {
    const own = smallCycle(branches, hopf.index, edge, side, Math.min(first, room))
    if (own) return own
  }
  for (const distance of [first, 4 * first, 12 * first]) {
    if (budget.spent()) return null
    if (distance > 0.15 && distance > first) return null
    const p = edge + side * Math.min(distance, 0.95 * room)
    const jump = integratedJump(space, lists, hopf ? hopf.point.sample.z : z, p, hopf !== undefined)
    if (jump) return jump
    if (distance >= room) return null
  }
  return null
}

/** The stable cycle just past a soft onset on its own branch. */
function smallCycle(
  branches: readonly CycleBranch[],
  index: number,
  edge: number,
  side: 1 | -1,
  distance: number,
): Jump | null {
  for (const share of [1, 0.3, 0.1, 0.03]) {
    const p = edge + side * distance * share
    for (const branch of branches) {
      if (branch.hopf !== index && branch.end.onset !== index) continue
      const there = crossings(branch, p).filter(({ stable }) => stable)
      there.sort((a, b) => a.value.amplitude - b.value.amplitude)
      const smallest = there[0]
      if (smallest) return { p, to: { kind: 'cycle', at: smallest.nearer, fromBranch: true } }
    }
  }
  return null
}

function integratedJump(
  space: CycleSpace,
  lists: WindowLists,
  z: Float64Array,
  p: number,
  oscillates: boolean,
): Jump | null {
  const { frame, n } = space
  const there = z.slice()
  there[n] = p
  const near = steadyNear(frame, there)
  // past a fold Newton's method finds some other state, or none: then the fold's own state is where it starts
  // past a branch point the system comes from the point itself, not from the state that has become a saddle
  const close =
    oscillates && near && Math.max(...there.map((value, i) => Math.abs(value - (near.z[i] as number)))) < 0.2
  const centre = close && near ? near : null
  const direction = (centre && growingDirection(frame, centre)) ?? new Float64Array(n).fill(1 / Math.sqrt(n))
  const steady = stableAt(frame, lists.paths, p)
  const rate = Math.max(centre ? (centre.spectrum.re[0] as number) : 0, 1e-12)
  let best: Jump | null = null
  for (const sign of oscillates ? [1] : [1, -1]) {
    const start = Float64Array.from(
      { length: n },
      (_, i) =>
        (((centre?.z ?? there)[i] as number) + sign * disturbance * (direction[i] as number)) *
        (frame.unit[i] as number),
    )
    const span = centre ? 400 / rate : 1e9
    const found = follow(space, start, p, { steady, span, maxSteps: 80_000 })
    const jump = jumpOf(found, steady, p)
    if (jump && (!best || rank(jump) > rank(best))) best = jump
  }
  return best
}

function jumpOf(found: Destination, steady: readonly SteadyNear[], p: number): Jump | null {
  if (found.kind === 'cycle') return { p, to: { kind: 'cycle', at: found.at, fromBranch: false } }
  if (found.kind === 'steady') return { p, to: { kind: 'steady', at: steady[found.which] as SteadyNear } }
  if (found.kind === 'irregular') return { p, to: found }
  return found.kind === 'leaves-box' ? { p, to: { kind: found.kind } } : null
}

/** Of two ways to go the worse one is told. */
function rank({ to }: Jump): number {
  return ['steady', 'cycle', 'irregular', 'leaves-box'].indexOf(to.kind)
}
