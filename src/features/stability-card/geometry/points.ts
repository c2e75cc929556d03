/** Plane geometry in drawing pixels: x to the right, y down. */
export interface Point {
  x: number
  y: number
}
export interface Box {
  left: number
  top: number
  right: number
  bottom: number
}
export interface Segment {
  a: Point
  b: Point
}

/** Far outside any drawing. Larger numbers are cut to it, so that no path ever holds what a browser cannot read. */
const farAway = 1e5

/** A pixel value as it is written into a path: a tenth of a pixel is enough, and it is always a finite number. */
export function pixel(value: number): number {
  if (Number.isNaN(value)) return 0
  const cut = Math.max(-farAway, Math.min(farAway, value))
  return Math.round(cut * 10) / 10 + 0
}

/** The path through these points. One point gives an empty path: there is nothing to draw. */
export function pathThrough(points: readonly Point[], closed = false): string {
  if (points.length < 2) return ''
  const steps = points.map((point, i) => `${i === 0 ? 'M' : 'L'}${pixel(point.x)} ${pixel(point.y)}`)
  return steps.join('') + (closed ? 'Z' : '')
}

export function segmentsOf(points: readonly Point[]): Segment[] {
  return points.slice(1).flatMap((b, i) => {
    const a = points[i]
    return a ? [{ a, b }] : []
  })
}

export const distance = (a: Point, b: Point): number => Math.hypot(b.x - a.x, b.y - a.y)

export const along = (a: Point, b: Point, t: number): Point => ({ x: a.x + (b.x - a.x) * t, y: a.y + (b.y - a.y) * t })

export const moved = (from: Point, direction: Point, by: number): Point => ({
  x: from.x + direction.x * by,
  y: from.y + direction.y * by,
})

const cross = (o: Point, a: Point, b: Point) => (a.x - o.x) * (b.y - o.y) - (a.y - o.y) * (b.x - o.x)

/** True where the two segments meet in a point inside both; touching ends do not count. */
export function segmentsCross(one: Segment, other: Segment): boolean {
  const a = cross(one.a, one.b, other.a)
  const b = cross(one.a, one.b, other.b)
  const c = cross(other.a, other.b, one.a)
  const d = cross(other.a, other.b, one.b)
  return a * b < 0 && c * d < 0
}

const inside = (box: Box, p: Point) => p.x > box.left && p.x < box.right && p.y > box.top && p.y < box.bottom

/** True where any part of the segment lies inside the box. */
export function segmentMeetsBox({ a, b }: Segment, box: Box): boolean {
  if (Math.max(a.x, b.x) <= box.left || Math.min(a.x, b.x) >= box.right) return false
  if (Math.max(a.y, b.y) <= box.top || Math.min(a.y, b.y) >= box.bottom) return false
  if (inside(box, a) || inside(box, b)) return true
  const corners: Point[] = [
    { x: box.left, y: box.top },
    { x: box.right, y: box.top },
    { x: box.right, y: box.bottom },
    { x: box.left, y: box.bottom },
  ]
  const sides = corners.map((corner) => cross(a, b, corner))
  return Math.min(...sides) < 0 && Math.max(...sides) > 0
}

export function boxesMeet(one: Box, other: Box): boolean {
  return one.left < other.right && other.left < one.right && one.top < other.bottom && other.top < one.bottom
}

export function boxWithin(box: Box, outer: Box): boolean {
  return box.left >= outer.left && box.right <= outer.right && box.top >= outer.top && box.bottom <= outer.bottom
}

export const boxAround = (centre: Point, half: number): Box => ({
  left: centre.x - half,
  right: centre.x + half,
  top: centre.y - half,
  bottom: centre.y + half,
})

/** How far from `from` along the unit vector `direction` the segment is met; null where it is not. */
export function rayHit(from: Point, direction: Point, { a, b }: Segment): number | null {
  const ex = b.x - a.x
  const ey = b.y - a.y
  const det = ex * direction.y - ey * direction.x
  if (Math.abs(det) < 1e-12) return null
  const ax = a.x - from.x
  const ay = a.y - from.y
  const far = (ex * ay - ey * ax) / det
  const share = (direction.x * ay - direction.y * ax) / det
  return far > 0 && share >= 0 && share <= 1 ? far : null
}
