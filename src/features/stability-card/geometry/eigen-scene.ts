import type { CardEvent } from './events.ts'
import { type Axis, axisBetween } from './frame.ts'
import type { CurvePoint, Piece } from './pieces.ts'
import type { Box, Point } from './points.ts'

/** A stretch of one eigenvalue's path on one side of the wall. */
export interface EigenPath {
  key: string
  points: Point[]
  stable: boolean
  /** Onset whose oscillation the stretch drives, for its hue; null for a real eigenvalue. */
  look: CardEvent['look']
}

export interface EigenScene {
  width: number
  height: number
  plot: Box
  x: Axis
  y: Axis
  /** Pixel of growth rate zero: the wall. */
  wall: number
  paths: EigenPath[]
  /** Places at equal steps of the sweep. */
  dots: Point[]
  /** Where a path ends for a rising control, with its direction. */
  arrows: { at: Point; angle: number }[]
  crossings: { event: CardEvent; at: Point }[]
  /** Eigenvalues that lie so far to the left that they are not drawn, and the nearest growth rate among them. */
  leftOut: { count: number; nearest: number } | null
}

const stepsShown = 8
const mostLeft = 2.5

/** Points of one branch from end to end, with the control rising on the whole. */
export function pointsOf(pieces: readonly Piece[], branch: number): CurvePoint[] {
  const points = pieces.filter((piece) => piece.branch === branch).flatMap((piece) => piece.points)
  const rising = (points.at(-1)?.p ?? 0) >= (points[0]?.p ?? 0)
  return rising ? points : points.reverse()
}

/**
 * Which eigenvalues fit one picture: all whose rightmost place is not more than two and a half times as far left as the span of
 * those that come near the wall. A fast mode a hundred times further left would press all others into one line.
 */
function chosen(points: readonly CurvePoint[]): { shown: number[]; leftOut: EigenScene['leftOut'] } {
  const count = points[0]?.eigenvalues.length ?? 0
  const reach = Array.from({ length: count }, (_, k) => {
    const res = points.map((point) => point.eigenvalues[k]?.re ?? 0)
    return {
      k,
      right: res.reduce((a, b) => Math.max(a, b), Number.NEGATIVE_INFINITY),
      left: res.reduce((a, b) => Math.min(a, b), Number.POSITIVE_INFINITY),
    }
  }).sort((a, b) => b.right - a.right || a.k - b.k)
  const first = reach[0]
  if (!first) return { shown: [], leftOut: null }
  let left = Math.min(first.left, 0)
  let right = Math.max(first.right, 0)
  const shown: number[] = []
  const out: number[] = []
  for (const one of reach) {
    const span = Math.max(right - left, 1e-12)
    if (one === first || Math.abs(one.right) <= mostLeft * span) {
      shown.push(one.k)
      left = Math.min(left, Math.max(one.left, -mostLeft * span))
      right = Math.max(right, one.right)
    } else out.push(one.right)
  }
  const nearest = out.reduce((a, b) => Math.max(a, b), Number.NEGATIVE_INFINITY)
  return { shown, leftOut: out.length > 0 ? { count: out.length, nearest } : null }
}

/** Where the control has gone `share` of the way through the range. */
function placeAt(points: readonly CurvePoint[], k: number, p: number): { re: number; im: number } | null {
  for (let i = 1; i < points.length; i++) {
    const a = points[i - 1]
    const b = points[i]
    if (!a || !b || a.p === b.p || (a.p - p) * (b.p - p) > 0) continue
    const t = (p - a.p) / (b.p - a.p)
    const from = a.eigenvalues[k]
    const to = b.eigenvalues[k]
    if (from && to) return { re: from.re + (to.re - from.re) * t, im: from.im + (to.im - from.im) * t }
  }
  return null
}

/** Cuts one path at the wall. */
function stretches(
  points: readonly CurvePoint[],
  k: number,
  at: (value: { re: number; im: number }) => Point,
): { points: Point[]; stable: boolean }[] {
  const result: { points: Point[]; stable: boolean }[] = []
  let last: { re: number; im: number } | null = null
  for (const point of points) {
    const value = point.eigenvalues[k]
    if (!value) continue
    const stable = value.re < 0
    const open = result.at(-1)
    if (!open || !last) result.push({ points: [at(value)], stable })
    else if (open.stable === stable) open.points.push(at(value))
    else {
      const share = last.re / (last.re - value.re)
      const wall = at({ re: 0, im: last.im + (value.im - last.im) * share })
      open.points.push(wall)
      result.push({ points: [wall, at(value)], stable })
    }
    last = value
  }
  return result
}

/**
 * The eigenvalues of one branch along the sweep, in the plane of growth rate and rotation. Null where the card carries
 * none for this branch.
 */
export function eigenSceneOf(
  pieces: readonly Piece[],
  branch: number,
  events: readonly CardEvent[],
  omegas: ReadonlyMap<string, number>,
  range: { low: number; high: number },
  width: number,
): EigenScene | null {
  const points = pointsOf(pieces, branch)
  const { shown, leftOut } = chosen(points)
  if (shown.length === 0) return null
  const values = points.flatMap((point) => shown.flatMap((k) => point.eigenvalues[k] ?? []))
  const lowRe = values.reduce((a, b) => Math.min(a, b.re), 0)
  const highRe = values.reduce((a, b) => Math.max(a, b.re), 0)
  const highIm = values.reduce((a, b) => Math.max(a, Math.abs(b.im)), 0)
  const span = highRe - lowRe || 1
  const reach = highIm > 0 ? highIm * 1.22 : span
  const height = Math.round(Math.max(190, Math.min(330, width * 0.78)))
  const plot = { left: 44, right: width - 10, top: 34, bottom: height - 40 }
  const x = axisBetween(lowRe - 0.12 * span, highRe + 0.16 * span, plot.left, plot.right, 4)
  const y = axisBetween(-reach, reach, plot.bottom, plot.top, 5)
  const at = ({ re, im }: { re: number; im: number }): Point => ({ x: x.toPixel(re), y: y.toPixel(im) })
  const own = events.filter((event) => event.kind === 'onset')
  const crossings = own.flatMap((event) => {
    const omega = omegas.get(event.id)
    return omega === undefined ? [] : [1, -1].map((sign) => ({ event, at: at({ re: 0, im: sign * omega }) }))
  })
  const lookNear = (place: Point | undefined): CardEvent['look'] => {
    const near = crossings
      .map((crossing) => ({
        crossing,
        gap: place ? Math.hypot(crossing.at.x - place.x, crossing.at.y - place.y) : 1e9,
      }))
      .sort((a, b) => a.gap - b.gap)[0]
    return near && near.gap < 6 ? near.crossing.event.look : null
  }
  const paths = shown.flatMap((k) =>
    stretches(points, k, at).map(
      (part, i): EigenPath => ({
        key: `${k}-${i}`,
        points: part.points,
        stable: part.stable,
        look: part.stable ? null : (lookNear(part.points[0]) ?? lookNear(part.points.at(-1))),
      }),
    ),
  )
  const dots = shown.flatMap((k) =>
    Array.from({ length: stepsShown + 1 }, (_, i) => range.low + ((range.high - range.low) * i) / stepsShown).flatMap(
      (p) => {
        const place = placeAt(points, k, p)
        return place ? [at(place)] : []
      },
    ),
  )
  const distinct = dots.filter((dot, i) => dots.findIndex((other) => other.x === dot.x && other.y === dot.y) === i)
  const arrows = shown.flatMap((k) => {
    const line = points.flatMap((point) => (point.eigenvalues[k] ? [at(point.eigenvalues[k])] : []))
    const end = line.at(-1)
    const before = [...line].reverse().find((place) => end && Math.hypot(place.x - end.x, place.y - end.y) > 4)
    return end && before ? [{ at: end, angle: (Math.atan2(end.y - before.y, end.x - before.x) * 180) / Math.PI }] : []
  })
  return { width, height, plot, x, y, wall: x.toPixel(0), paths, dots: distinct, arrows, crossings, leftOut }
}
