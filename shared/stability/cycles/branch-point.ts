import type { Frame } from '../frame.ts'
import { type Cycle, type Direction, difference, directionDot, scaledDirection } from './cycle.ts'
import { type CycleSpace, correctCycle, type Solution } from './cycle-system.ts'
import { type Measures, measure } from './measures.ts'

/** A point on a branch of cycles. */
export interface CycleAt {
  readonly solution: Solution
  readonly measures: Measures
  readonly stable: boolean
}

/** Multipliers closer to the unit circle than this are on it as far as the mesh can tell. */
const margin = 1e-9

/** Measures a solution. */
export function cycleAt(frame: Frame, solution: Solution): CycleAt | null {
  const measures = measure(frame, solution.cycle, solution.tangent)
  const stable = solution.re.every((re, i) => Math.hypot(re, solution.im[i] as number) < 1 - margin)
  return Number.isFinite(measures.amplitude + measures.max) ? { solution, measures, stable } : null
}

/** The stretch between two points on one mesh, with what interpolation on it needs. */
export interface Stretch {
  readonly a: CycleAt
  readonly b: CycleAt
  readonly chord: Direction
  readonly length: number
}

export function stretchBetween(n: number, a: CycleAt, b: CycleAt): Stretch | null {
  const whole = difference(a.solution.cycle, b.solution.cycle)
  const length = Math.sqrt(directionDot(a.solution.cycle.mesh, n, whole, whole))
  return length > 0 ? { a, b, chord: scaledDirection(whole, 1 / length), length } : null
}

/** Cubic through both values with both rates (per unit of arclength), at share s. */
export function hermite(s: number, length: number, v0: number, d0: number, v1: number, d1: number): number {
  const r = 1 - s
  return (1 + 2 * s) * r * r * v0 + s * r * r * length * d0 + s * s * (3 - 2 * s) * v1 - s * s * r * length * d1
}

/** The cycle at share s of a stretch by cubic interpolation: third-order guess for Newton. */
function guessOn({ a, b, length }: Stretch, s: number): Cycle {
  const [from, to] = [a.solution, b.solution]
  const u = new Float64Array(from.cycle.u.length)
  for (let k = 0; k < u.length; k++) {
    u[k] = hermite(
      s,
      length,
      from.cycle.u[k] as number,
      from.tangent.u[k] as number,
      to.cycle.u[k] as number,
      to.tangent.u[k] as number,
    )
  }
  const period = hermite(s, length, from.cycle.period, periodRate(a), to.cycle.period, periodRate(b))
  const p = hermite(s, length, from.cycle.p, from.tangent.p, to.cycle.p, to.tangent.p)
  return { mesh: from.cycle.mesh, u, period, p }
}

/** Rate of the period along the branch. */
export function periodRate({ solution }: CycleAt): number {
  return solution.tangent.period * solution.cycle.period
}

/** The branch's own point at share s of a stretch (in the plane across the chord). */
export function pointOn(space: CycleSpace, stretch: Stretch, s: number): CycleAt | null {
  const solution = correctCycle(
    space,
    guessOn(stretch, s),
    stretch.a.solution.cycle,
    stretch.chord,
    0.5 * stretch.length,
  )
  return solution && cycleAt(space.frame, solution)
}

/** The branch's own point at a control value near share s of a stretch; its tangent points along the stretch. */
export function pointAtControl(space: CycleSpace, stretch: Stretch, s: number, p: number): CycleAt | null {
  const guess = { ...guessOn(stretch, s), p }
  const row = { u: new Float64Array(guess.u.length), period: 0, p: 1 }
  const solution = correctCycle(space, guess, stretch.a.solution.cycle, row, 0.7 * stretch.length)
  if (!solution) return null
  const along = directionDot(guess.mesh, space.n, solution.tangent, stretch.chord)
  const tangent = along < 0 ? scaledDirection(solution.tangent, -1) : solution.tangent
  return cycleAt(space.frame, { ...solution, tangent })
}

/**
 * A zero of `g` (a function of the point) on a stretch where it changes sign: regula falsi with the Illinois rule, each
 * trial corrected to the branch. Ends at |g| < `small` or after 14 trials; null where the branch cannot be computed.
 */
export function locateOn(
  space: CycleSpace,
  stretch: Stretch,
  g: (at: CycleAt) => number,
  small: number,
): { at: CycleAt; s: number } | null {
  let low = 0
  let high = 1
  let atLow = g(stretch.a)
  let atHigh = g(stretch.b)
  if (!(atLow * atHigh < 0)) return null
  let best: { at: CycleAt; s: number; size: number } | null = null
  // the end that stays twice in a row is halved
  let last: 'low' | 'high' | null = null
  for (let trial = 0; trial < 14; trial++) {
    const share = atLow / (atLow - atHigh)
    const s = low + (high - low) * Math.min(0.999, Math.max(0.001, share))
    const at = pointOn(space, stretch, s)
    if (!at) return best
    const value = g(at)
    if (!best || Math.abs(value) < best.size) best = { at, s, size: Math.abs(value) }
    if (Math.abs(value) < small || high - low < 1e-13) return best
    const side = value * atLow > 0 ? 'low' : 'high'
    if (side === 'low') {
      low = s
      atLow = value
      if (last === side) atHigh /= 2
    } else {
      high = s
      atHigh = value
      if (last === side) atLow /= 2
    }
    last = side
  }
  return best
}
