import type { HopfPoint, StabilityCard } from '#shared/model/card-document.ts'
import type { CurvePoint, Piece } from './pieces.ts'

/**
 * How far from an onset its prediction is drawn: 15 % of the control range, or as far as the amplitude stays within 25 %
 * of the observed quantity's span, whichever comes first. The law is exact only at the onset itself; beyond this the
 * next order is no longer small in any model worth a page, and a line there would be believed.
 */
export const reachOfRange = 0.15
export const reachOfSpan = 0.25

/** The small oscillation that is born at an onset: steady value and amplitude at rising distance from it. */
export interface NearOnset {
  hopf: number
  /** True for a soft onset's oscillation, which is settled on; a hard onset's is the border of what is tolerated. */
  stable: boolean
  side: 'above' | 'below'
  points: { p: number; middle: number; amplitude: number }[]
}

const steps = 24

function predicted(
  at: HopfPoint,
  index: number,
  pieces: readonly Piece[],
  range: Range,
  observed: string,
): NearOnset | null {
  const { amplitudeCoefficient: coefficient, cycleSide: side, operating, verdict } = at
  if (!operating || coefficient === null || side === null || coefficient <= 0) return null
  const sign = side === 'above' ? 1 : -1
  const own = pieces.filter((piece) => piece.branch === at.branch).flatMap((piece) => piece.points)
  const run = runFrom(own, at, sign, observed)
  const end = run.at(-1)
  if (!end) return null
  const farthest = Math.min(
    reachOfRange * (range.high - range.low),
    range.span > 0 ? ((reachOfSpan * range.span) / coefficient) ** 2 : Number.POSITIVE_INFINITY,
    // Where the branch turns back or leaves the box there is no steady state to swing about, so the line ends.
    sign * (end.p - at.p),
  )
  if (!(farthest > 0)) return null
  // Even steps of amplitude, not of the control: the curve leaves the onset upright and would show a corner there.
  const points = Array.from({ length: steps + 1 }, (_, i) => {
    const share = i / steps
    const p = at.p + sign * farthest * share * share
    return { p, middle: valueOn(run, p), amplitude: coefficient * Math.sqrt(farthest) * share }
  })
  return { hopf: index, stable: verdict === 'soft', side, points }
}

const gapTo = (at: HopfPoint, point: CurvePoint): number =>
  Object.entries(at.state).reduce((sum, [symbol, value]) => sum + Math.abs(value - (point.state[symbol] ?? value)), 0)

/** The branch from the onset on, in the direction in which the control moves to the cycle's side, as far as it keeps moving. */
function runFrom(own: readonly CurvePoint[], at: HopfPoint, sign: 1 | -1, observed: string): CurvePoint[] {
  const start = own
    .map((point, i) => ({ i, away: Math.abs(point.p - at.p), gap: gapTo(at, point) }))
    .sort((a, b) => a.away - b.away || a.gap - b.gap)
    .slice(0, 8)
    .sort((a, b) => a.gap - b.gap || a.away - b.away)[0]?.i
  if (start === undefined) return []
  const follow = (step: 1 | -1) => {
    const run: CurvePoint[] = []
    for (let i = start; i >= 0 && i < own.length; i += step) {
      const point = own[i]
      const last = run.at(-1)
      if (!point || (last && sign * (point.p - last.p) < 0)) break
      if (!last || point.p !== last.p) run.push(point)
    }
    return run
  }
  const [up, down] = [follow(1), follow(-1)]
  const run = up.length >= down.length ? up : down
  const nearest = own[start]
  if (!nearest) return []
  const first = { ...nearest, p: at.p, state: at.state, value: at.state[observed] ?? nearest.value }
  return [first, ...run.filter((point) => sign * (point.p - at.p) > 0)]
}

/** The observed value of a run at control value `p`. */
function valueOn(run: readonly CurvePoint[], p: number): number {
  for (let i = 1; i < run.length; i++) {
    const a = run[i - 1]
    const b = run[i]
    if (a && b && (a.p - p) * (b.p - p) <= 0) return a.value + ((b.value - a.value) * (p - a.p)) / (b.p - a.p)
  }
  // Outside by rounding, or before the first computed point.
  const [first, last] = [run[0], run.at(-1)]
  return (first && last && Math.abs(first.p - p) <= Math.abs(last.p - p) ? first : last)?.value ?? 0
}

interface Range {
  low: number
  high: number
  /** Span of the observed quantity, 0 where it is not known: then only the share of the range limits. */
  span: number
}

/** The near-onset predictions of a card, one for each onset where a steady state is lost and the kind is decided. */
export function nearOnsets(card: StabilityCard, pieces: readonly Piece[], range: Range): NearOnset[] {
  return (card.hopf ?? []).flatMap((at, index) => predicted(at, index, pieces, range, card.observed) ?? [])
}
