import {
  along,
  type Box,
  distance,
  moved,
  type Point,
  pathThrough,
  rayHit,
  type Segment,
  segmentsOf,
} from './points.ts'

/**
 * What ends the ground on one side: a hard onset's lip, a soft one's ramp, a taper where the steady state itself ends or
 * another takes over, or the edge of what was swept.
 */
export type GroundEnd =
  | {
      kind: 'hard' /** pixel position of the recovery along the control; null where it is not computed */
      recovery: number | null
    }
  | { kind: 'soft' }
  | { kind: 'undecided' }
  | { kind: 'taper' }
  | { kind: 'none' }

/** Heavy outlines of the ground; `dashed` where the place of a face is not computed. */
export interface GroundEdge {
  path: string
  weight: 'heavy' | 'light'
  dashed: boolean
}

export interface GroundShape {
  hatch: string
  edges: GroundEdge[]
  /** The edges as segments: labels keep off them. */
  outline: Segment[]
}

export const lipDepth = 12
const taperSlope = 0.8
const rampOut = 24
const rampDeeper = 10
/** How far back the undercut is drawn where the recovery is not known yet. */
const unknownUndercut = 72

interface Station {
  at: Point
  normal: Point
  tangent: Point
  s: number
  depth: number
}

/** The curve in steps of at most 8 pixels, with arclength, tangent and the normal that points into the ground. */
function stationsAlong(curve: readonly Point[]): Station[] {
  const fine: Point[] = []
  for (const point of curve) {
    const last = fine.at(-1)
    if (!last) {
      fine.push(point)
      continue
    }
    const gap = distance(last, point)
    if (gap < 0.2) continue
    const parts = Math.ceil(gap / 8)
    for (let k = 1; k <= parts; k++) fine.push(along(last, point, k / parts))
  }
  const tangents = fine.map((point, i) => {
    const a = fine[i - 1] ?? point
    const b = fine[i + 1] ?? point
    const length = distance(a, b) || 1
    return { x: (b.x - a.x) / length, y: (b.y - a.y) / length }
  })
  // One side for the whole curve: the lower one, weighed by length. An upright curve stands on ground to its right.
  const down = tangents.reduce((sum, tangent) => sum + tangent.x, 0)
  const upright = tangents.reduce((sum, tangent) => sum + tangent.y, 0)
  const side = Math.abs(down) > 1e-6 ? Math.sign(down) : -Math.sign(upright) || 1
  let s = 0
  return fine.map((at, i) => {
    const before = fine[i - 1]
    if (before) s += distance(before, at)
    const tangent = tangents[i] ?? { x: 1, y: 0 }
    return { at, tangent, normal: { x: -tangent.y * side, y: tangent.x * side }, s, depth: 0 }
  })
}

/**
 * Depth at every station: the full depth, less where another curve, the plot's edge or the inside of a bend leaves no
 * room. It changes by at most 0.7 pixels a pixel, so that the strip narrows instead of jumping.
 */
function setDepths(stations: Station[], full: number, obstacles: readonly Segment[], plot: Box): void {
  const sides: Segment[] = segmentsOf([
    { x: plot.left, y: plot.bottom },
    { x: plot.right, y: plot.bottom },
  ])
  stations.forEach((station, i) => {
    let depth = full
    const from = moved(station.at, station.normal, 1.5)
    for (const obstacle of obstacles) {
      const hit = rayHit(from, station.normal, obstacle)
      if (hit !== null) depth = Math.min(depth, Math.max(0, hit * 0.8 - 2))
    }
    for (const side of sides) {
      const hit = rayHit(from, station.normal, side)
      if (hit !== null) depth = Math.min(depth, hit)
    }
    const next = stations[i + 1]
    const before = stations[i - 1]
    if (next && before) {
      // Turning towards the ground: beyond the bend's radius the offset would run backwards.
      const turn =
        (next.tangent.x - before.tangent.x) * station.normal.x + (next.tangent.y - before.tangent.y) * station.normal.y
      const length = next.s - before.s
      if (turn > 1e-6) depth = Math.min(depth, (0.85 * length) / turn)
    }
    station.depth = Math.max(0, depth)
  })
  const slope = 0.7
  const relax = (from: Station | undefined, to: Station | undefined) => {
    if (from && to) to.depth = Math.min(to.depth, from.depth + slope * Math.abs(to.s - from.s))
  }
  for (let i = 1; i < stations.length; i++) relax(stations[i - 1], stations[i])
  for (let i = stations.length - 1; i > 0; i--) relax(stations[i], stations[i - 1])
}

/** The strip thins out to nothing towards an end. */
function taper(stations: readonly Station[], fromEnd: (station: Station) => number): void {
  for (const station of stations) station.depth = Math.min(station.depth, taperSlope * fromEnd(station))
}

const foot = (station: Station, depth = station.depth) => moved(station.at, station.normal, depth)

function stationAt(stations: readonly Station[], s: number): Station | null {
  const i = stations.findIndex((station) => station.s >= s)
  const b = stations[i]
  const a = stations[i - 1] ?? b
  if (!a || !b) return null
  const t = b.s > a.s ? (s - a.s) / (b.s - a.s) : 0
  const normal = along(a.normal, b.normal, t)
  const length = Math.hypot(normal.x, normal.y) || 1
  return {
    at: along(a.at, b.at, t),
    normal: { x: normal.x / length, y: normal.y / length },
    tangent: b.tangent,
    s,
    depth: a.depth + (b.depth - a.depth) * t,
  }
}

/** How much of the curve a hard end undercuts, in pixels from that end. */
function undercut(end: GroundEnd, stations: readonly Station[], atEnd: boolean): number {
  if (end.kind !== 'hard') return 0
  const total = stations.at(-1)?.s ?? 0
  if (end.recovery === null) return Math.min(unknownUndercut, total * 0.42)
  const ordered = atEnd ? [...stations].reverse() : stations
  const edge = ordered[0]
  const reached = ordered.find(
    (station) => edge && (station.at.x - Number(end.recovery)) * (edge.at.x - Number(end.recovery)) <= 0,
  )
  return reached && edge ? Math.abs(reached.s - edge.s) : total
}

/**
 * The ground under one stable piece of a curve: a hatched strip of constant depth along the normal. A hard end thins it
 * to a lip, undercut back to the recovery value; where that is not computed yet, the inner face is dashed and its place
 * means nothing. A soft end runs out in a ramp. Null for a piece too short to stand on.
 */
export function groundUnder(
  curve: readonly Point[],
  depth: number,
  start: GroundEnd,
  end: GroundEnd,
  obstacles: readonly Segment[],
  plot: Box,
): GroundShape | null {
  const stations = stationsAlong(curve)
  const first = stations[0]
  const last = stations.at(-1)
  if (!first || !last || last.s < 6) return null
  setDepths(stations, depth, obstacles, plot)
  if (start.kind === 'taper') taper(stations, (station) => station.s)
  if (end.kind === 'taper') taper(stations, (station) => last.s - station.s)
  const cutStart = undercut(start, stations, false)
  const cutEnd = last.s - undercut(end, stations, true)
  const edges: GroundEdge[] = []
  const outline: Segment[] = []
  const edge = (points: Point[], weight: GroundEdge['weight'], dashed = false) => {
    const path = pathThrough(points)
    if (path) edges.push({ path, weight, dashed })
    outline.push(...segmentsOf(points))
  }
  const lip = (station: Station) => Math.min(lipDepth, station.depth)
  const bottom: Point[] = []

  const startFace = start.kind === 'hard' ? stationAt(stations, cutStart) : null
  const endFace = end.kind === 'hard' ? stationAt(stations, cutEnd) : null
  const lipUnder = (from: Station[]) => from.map((station) => foot(station, lip(station)))
  if (startFace) {
    const under = [...stations.filter((station) => station.s < cutStart), startFace]
    bottom.push(...lipUnder(under))
    edge([first.at, ...lipUnder(under)], 'heavy')
    edge([foot(startFace, lip(startFace)), foot(startFace)], 'heavy', start.kind === 'hard' && start.recovery === null)
  }
  if (start.kind === 'soft') {
    const toe = moved(moved(first.at, first.tangent, -rampOut), first.normal, first.depth + rampDeeper)
    bottom.push(toe)
    edge([first.at, toe], 'heavy')
  }
  if (startFace) bottom.push(foot(startFace))
  for (const station of stations) if (station.s >= cutStart && station.s <= cutEnd) bottom.push(foot(station))
  if (endFace) {
    bottom.push(foot(endFace))
    const under = [endFace, ...stations.filter((station) => station.s > cutEnd)]
    bottom.push(...lipUnder(under))
    edge([foot(endFace), foot(endFace, lip(endFace))], 'heavy', end.kind === 'hard' && end.recovery === null)
    edge([...lipUnder(under), last.at], 'heavy')
  }
  if (end.kind === 'soft') {
    const toe = moved(moved(last.at, last.tangent, rampOut), last.normal, last.depth + rampDeeper)
    bottom.push(toe)
    edge([last.at, toe], 'heavy')
  }
  for (const [kind, station] of [
    [start.kind, first],
    [end.kind, last],
  ] as const) {
    if (kind === 'undecided') edge([station.at, foot(station)], 'light', true)
  }
  const top = stations.map((station) => station.at)
  return { hatch: pathThrough([...top, ...bottom.reverse()], true), edges, outline }
}
