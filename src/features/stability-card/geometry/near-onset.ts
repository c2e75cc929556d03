import type { HopfPoint, StabilityCard } from '#shared/model/card-document.ts'
import type { Piece } from './pieces.ts'
import { statesAt } from './states-at.ts'

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

function predicted(at: HopfPoint, index: number, pieces: readonly Piece[], range: Range): NearOnset | null {
  const { amplitudeCoefficient: coefficient, cycleSide: side, operating, verdict } = at
  if (!operating || coefficient === null || side === null || coefficient <= 0) return null
  const sign = side === 'above' ? 1 : -1
  const room = side === 'above' ? range.high - at.p : at.p - range.low
  const farthest = Math.min(
    reachOfRange * (range.high - range.low),
    range.span > 0 ? ((reachOfSpan * range.span) / coefficient) ** 2 : Number.POSITIVE_INFINITY,
    room,
  )
  if (!(farthest > 0)) return null
  const own = pieces.filter((piece) => piece.branch === at.branch)
  const points: NearOnset['points'] = []
  let middle: number | null = null
  for (let i = 0; i <= steps; i++) {
    // Even steps of amplitude, not of the control: the curve leaves the onset upright and would show a corner there.
    const share = i / steps
    const p = at.p + sign * farthest * share * share
    const candidates = statesAt(own, p).map((state) => state.value)
    const expected: number | null = middle ?? onset(at, own)
    if (expected === null) break
    const next: number | undefined = candidates.sort((a, b) => Math.abs(a - expected) - Math.abs(b - expected))[0]
    // The branch turns back or leaves the box: there is no steady state to swing about, so the line ends.
    if (next === undefined && i > 0) break
    middle = next ?? expected
    points.push({ p, middle, amplitude: coefficient * Math.sqrt(farthest) * share })
  }
  return points.length < 2 ? null : { hopf: index, stable: verdict === 'soft', side, points }
}

/** The observed value at the onset, as the piece that ends there has it. */
function onset(at: HopfPoint, own: readonly Piece[]): number | null {
  const states = own
    .flatMap((piece) => piece.points)
    .sort((a, b) => Math.abs(a.p - at.p) - Math.abs(b.p - at.p))
    .slice(0, 8)
  const gap = (state: Readonly<Record<string, number>>) =>
    Object.entries(at.state).reduce((sum, [symbol, value]) => sum + Math.abs(value - (state[symbol] ?? value)), 0)
  return states.sort((a, b) => gap(a.state) - gap(b.state))[0]?.value ?? null
}

interface Range {
  low: number
  high: number
  /** Span of the observed quantity, 0 where it is not known: then only the share of the range limits. */
  span: number
}

/** The near-onset predictions of a card, one for each onset where a steady state is lost and the kind is decided. */
export function nearOnsets(card: StabilityCard, pieces: readonly Piece[], range: Range): NearOnset[] {
  return (card.hopf ?? []).flatMap((at, index) => predicted(at, index, pieces, range) ?? [])
}
