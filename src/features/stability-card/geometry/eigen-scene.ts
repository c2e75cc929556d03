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
  /** Eigenvalues that leave the frame somewhere along the sweep, and the growth rates all of them cover. */
  beyond: { count: number; from: number; to: number } | null
}

const stepsShown = 8

/** Points of one branch from end to end, with the control rising on the whole. */
export function pointsOf(pieces: readonly Piece[], branch: number): CurvePoint[] {
  const points = pieces.filter((piece) => piece.branch === branch).flatMap((piece) => piece.points)
  const rising = (points.at(-1)?.p ?? 0) >= (points[0]?.p ?? 0)
  return rising ? points : points.reverse()
}

/** Positions of the eigenvalues that cross the wall at an onset of this branch; without one, that of the rightmost. */
function inFocus(points: readonly CurvePoint[], onsets: readonly { p: number; omega: number }[]): number[] {
  const count = points[0]?.eigenvalues.length ?? 0
  const all = Array.from({ length: count }, (_, k) => k)
  const crossing = onsets.flatMap(({ p, omega }) => {
    const gap = (k: number) => {
      const place = placeAt(points, k, p)
      return place ? Math.hypot(place.re, Math.abs(place.im) - omega) : Number.POSITIVE_INFINITY
    }
    return [...all].sort((x, y) => gap(x) - gap(y)).slice(0, 2)
  })
  if (crossing.length > 0) return [...new Set(crossing)]
  const right = (k: number) =>
    points.reduce((most, point) => Math.max(most, point.eigenvalues[k]?.re ?? most), Number.NEGATIVE_INFINITY)
  return all.sort((x, y) => right(y) - right(x)).slice(0, 1)
}

function extentOf(points: readonly CurvePoint[], ks: readonly number[]) {
  const values = points.flatMap((point) => ks.flatMap((k) => point.eigenvalues[k] ?? []))
  return {
    low: values.reduce((a, b) => Math.min(a, b.re), 0),
    high: values.reduce((a, b) => Math.max(a, b.re), 0),
    turn: values.reduce((a, b) => Math.max(a, Math.abs(b.im)), 0),
  }
}

/** How far beyond the crossing pairs the frame may reach for others, in spans of theirs. */
const reachForOthers = 0.8

/**
 * The frame of growth rates: the pairs that cross, and as much of the others as does not press those into a line. A mode a
 * hundred times faster runs out of the frame; how many do, and how far, is told under the picture.
 */
function framed(points: readonly CurvePoint[], onsets: readonly { p: number; omega: number }[]) {
  const focus = extentOf(points, inFocus(points, onsets))
  const all = extentOf(points, points[0]?.eigenvalues.map((_, k) => k) ?? [])
  const span = focus.high - focus.low || all.high - all.low || 1
  const low = Math.max(all.low, focus.low - reachForOthers * span)
  const high = Math.min(all.high, focus.high + reachForOthers * span)
  const turn = focus.turn > 0 ? Math.min(all.turn, (1 + reachForOthers) * focus.turn) : all.turn
  const out = (points[0]?.eigenvalues ?? []).filter((_, k) =>
    points.some((point) => {
      const { re, im } = point.eigenvalues[k] ?? { re: 0, im: 0 }
      return re < low || re > high || Math.abs(im) > turn
    }),
  ).length
  return {
    low,
    high,
    span: high - low || 1,
    turn,
    beyond: out > 0 ? { count: out, from: all.low, to: all.high } : null,
  }
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
  const count = points[0]?.eigenvalues.length ?? 0
  if (count === 0) return null
  const shown = Array.from({ length: count }, (_, k) => k)
  const own = events.filter((event) => event.kind === 'onset')
  const onsets = own.flatMap((event) => {
    const omega = omegas.get(event.id)
    return omega === undefined ? [] : [{ event, p: event.p, omega }]
  })
  const { low, high, span, turn, beyond } = framed(points, onsets)
  const reach = turn > 0 ? turn * 1.22 : span
  const height = Math.round(Math.max(190, Math.min(330, width * 0.78)))
  const plot = { left: 44, right: width - 10, top: 34, bottom: height - 40 }
  const x = axisBetween(low - 0.1 * span, high + 0.14 * span, plot.left, plot.right, 4)
  const y = axisBetween(-reach, reach, plot.bottom, plot.top, 5)
  const at = ({ re, im }: { re: number; im: number }): Point => ({ x: x.toPixel(re), y: y.toPixel(im) })
  const crossings = onsets.flatMap(({ event, omega }) =>
    [1, -1].map((sign) => ({ event, at: at({ re: 0, im: sign * omega }) })),
  )
  const eventNear = (place: Point | undefined): CardEvent | null => {
    const near = crossings
      .map((crossing) => ({
        crossing,
        gap: place ? Math.hypot(crossing.at.x - place.x, crossing.at.y - place.y) : 1e9,
      }))
      .sort((a, b) => a.gap - b.gap)[0]
    return near && near.gap < 6 ? near.crossing.event : null
  }
  // A stretch between two onsets takes the hue of the one that ends the steady running.
  const lookOfStretch = (line: readonly Point[]): CardEvent['look'] => {
    const ends = [eventNear(line[0]), eventNear(line.at(-1))]
    return (ends.find((event) => event?.role === 'limit') ?? ends.find(Boolean))?.look ?? null
  }
  const paths = shown.flatMap((k) =>
    stretches(points, k, at).map(
      (part, i): EigenPath => ({
        key: `${k}-${i}`,
        points: part.points,
        stable: part.stable,
        look: part.stable ? null : lookOfStretch(part.points),
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
  const crowded = (dot: Point) =>
    [...crossings, ...arrows].some(({ at: place }) => Math.hypot(place.x - dot.x, place.y - dot.y) < 8)
  return {
    width,
    height,
    plot,
    x,
    y,
    wall: x.toPixel(0),
    paths,
    dots: distinct.filter((dot) => !crowded(dot)),
    arrows,
    crossings,
    beyond,
  }
}
