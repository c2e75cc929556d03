import { type CycleAt, hermite, periodRate, pointOn, stretchBetween } from './branch-point.ts'
import type { CycleSpace } from './cycle-system.ts'

/** Largest deviation of straight lines from the branch, as a share of amplitude and period. */
const allowed = 0.006
const deepest = 6

/**
 * Points to put between two neighbours (on one mesh) so that straight lines in control, amplitude and period are within
 * 1 % of the branch. The branch between two points is judged by the cubic through both with their rates.
 */
export function fillBetween(space: CycleSpace, a: CycleAt, b: CycleAt, depth = 0): CycleAt[] {
  if (depth >= deepest || !deviates(space, a, b)) return []
  const stretch = stretchBetween(space.n, a, b)
  const middle = stretch && pointOn(space, stretch, 0.5)
  if (!middle) return []
  return [...fillBetween(space, a, middle, depth + 1), middle, ...fillBetween(space, middle, b, depth + 1)]
}

function deviates({ n }: CycleSpace, a: CycleAt, b: CycleAt): boolean {
  const stretch = stretchBetween(n, a, b)
  if (!stretch) return false
  const { length } = stretch
  // an observed quantity that stands still has no amplitude to be right about, only rounding
  const silent = 1e-9 * (Math.abs(b.measures.max) + Math.abs(b.measures.min))
  const [from, to] = [a.solution, b.solution]
  const width = to.cycle.p - from.cycle.p
  // almost vertical: there is nothing to interpolate over
  if (Math.abs(width) < 1e-7) return false
  for (const s of [0.25, 0.5, 0.75]) {
    const p = hermite(s, length, from.cycle.p, from.tangent.p, to.cycle.p, to.tangent.p)
    const share = Math.min(1, Math.max(0, (p - from.cycle.p) / width))
    const amplitude = hermite(
      s,
      length,
      a.measures.amplitude,
      a.measures.amplitudeRate,
      b.measures.amplitude,
      b.measures.amplitudeRate,
    )
    const period = hermite(s, length, from.cycle.period, periodRate(a), to.cycle.period, periodRate(b))
    const chordAmplitude = a.measures.amplitude + share * (b.measures.amplitude - a.measures.amplitude)
    const chordPeriod = from.cycle.period + share * (to.cycle.period - from.cycle.period)
    if (Math.abs(amplitude - chordAmplitude) > allowed * Math.abs(amplitude) + silent) return true
    if (Math.abs(period - chordPeriod) > allowed * period) return true
  }
  return false
}
