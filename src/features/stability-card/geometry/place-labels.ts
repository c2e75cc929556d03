import {
  type Box,
  boxesMeet,
  boxWithin,
  distance,
  type Point,
  type Segment,
  segmentMeetsBox,
  segmentsCross,
  segmentsOf,
} from './points.ts'
import { wordsWidth } from './text-width.ts'

/**
 * Where the labels of a drawing go. A pure function of its input: the same card gives the same picture on every machine,
 * on paper and in a test.
 *
 * Labels are placed one after another in the order given. Each tries the four places beside its mark, then four rings of
 * twelve directions; a place is refused where the text would lie on a curve, a mark, an axis number or another label, or
 * outside the plot. Of what is left the cheapest wins: distance, plus 45 for every curve its leader crosses and 400 for
 * every label or leader it meets. What finds no place loses its second line, then all but its number, then is left to
 * the list beside the drawing.
 */
export interface LabelRequest {
  id: string
  at: Point
  /** Half the size of the mark at `at`; 0 for a place on a bare curve, which gets a dot. */
  radius: number
  /** Name and value. */
  title: string
  /** Second line, dropped first. */
  detail?: string
  /** The value alone, tried last. */
  short?: string
}

export interface LabelObstacles {
  curves: readonly Segment[]
  /** Marks, axis numbers, dimension texts. */
  boxes: readonly Box[]
  plot: Box
}

export interface PlacedLabel {
  id: string
  /** The text with 4 pixels around it. */
  box: Box
  lines: string[]
  /** Left end, middle or right end of every line. */
  x: number
  anchor: 'start' | 'middle' | 'end'
  /** Baselines, one for each line. */
  baselines: number[]
  /** From the text to the mark; null where the text stands beside it. */
  leader: Point[] | null
  /** A dot where the leader ends on a bare curve. */
  dot: Point | null
  /** Which place was taken, so that the next picture can keep it. */
  slot: string
}

export const labelSize = 13
export const lineHeight = 16
const around = 4
const beside = 8
const rings = [40, 70, 110, 160]
const directions = 12
const shoulder = 12
const curveCost = 45
const meetingCost = 400

interface Candidate {
  slot: string
  box: Box
  anchor: PlacedLabel['anchor']
  leader: Point[] | null
  cost: number
}

function boxAt(left: number, top: number, width: number, height: number): Box {
  return { left, top, right: left + width, bottom: top + height }
}

function candidates({ at, radius }: LabelRequest, width: number, height: number): Candidate[] {
  const gap = radius + beside - around
  const near: Candidate[] = [
    { slot: 'right', box: boxAt(at.x + gap, at.y - height / 2, width, height), anchor: 'start', leader: null, cost: 0 },
    {
      slot: 'left',
      box: boxAt(at.x - gap - width, at.y - height / 2, width, height),
      anchor: 'end',
      leader: null,
      cost: 1,
    },
    { slot: 'below', box: boxAt(at.x - width / 2, at.y + gap, width, height), anchor: 'middle', leader: null, cost: 2 },
    {
      slot: 'above',
      box: boxAt(at.x - width / 2, at.y - gap - height, width, height),
      anchor: 'middle',
      leader: null,
      cost: 3,
    },
  ]
  for (const ring of rings) {
    for (let k = 0; k < directions; k++) {
      const angle = (k * 2 * Math.PI) / directions
      const dx = Math.cos(angle)
      const dy = Math.sin(angle)
      const end = { x: at.x + dx * ring, y: at.y + dy * ring }
      const slot = `${ring}/${k}`
      const cost = ring + k * 0.01
      if (Math.abs(dy) > Math.abs(dx)) {
        const top = dy > 0 ? end.y : end.y - height
        const box = boxAt(end.x - width / 2, top, width, height)
        near.push({ slot, box, anchor: 'middle', leader: [end, at], cost })
      } else {
        const side = Math.sign(dx)
        const left = side > 0 ? end.x + shoulder : end.x - shoulder - width
        const box = boxAt(left, end.y - height / 2, width, height)
        const from = { x: end.x + side * (shoulder + 2), y: end.y }
        near.push({ slot, box, anchor: side > 0 ? 'start' : 'end', leader: [from, end, at], cost })
      }
    }
  }
  return near
}

function fits(box: Box, obstacles: LabelObstacles, placed: readonly PlacedLabel[]): boolean {
  if (!boxWithin(box, obstacles.plot)) return false
  if (obstacles.boxes.some((other) => boxesMeet(box, other))) return false
  if (placed.some((other) => boxesMeet(box, other.box))) return false
  if (placed.some((other) => other.leader && segmentsOf(other.leader).some((segment) => segmentMeetsBox(segment, box))))
    return false
  return !obstacles.curves.some((segment) => segmentMeetsBox(segment, box))
}

/** The leader shortened at the mark: there it touches the curve it belongs to. */
function leaderSegments(leader: readonly Point[], radius: number): Segment[] {
  return segmentsOf(leader).map(({ a, b }, i, all) => {
    if (i < all.length - 1) return { a, b }
    const length = distance(a, b) || 1
    const keep = Math.max(0, 1 - (radius + 3) / length)
    return { a, b: { x: a.x + (b.x - a.x) * keep, y: a.y + (b.y - a.y) * keep } }
  })
}

function leaderCost(segments: readonly Segment[], obstacles: LabelObstacles, placed: readonly PlacedLabel[]): number {
  let cost = 0
  for (const segment of segments) {
    cost += curveCost * obstacles.curves.filter((curve) => segmentsCross(segment, curve)).length
    for (const other of placed) {
      if (segmentMeetsBox(segment, other.box)) cost += meetingCost
      if (other.leader && segmentsOf(other.leader).some((theirs) => segmentsCross(segment, theirs))) cost += meetingCost
    }
  }
  return cost
}

function tried(
  request: LabelRequest,
  lines: string[],
  obstacles: LabelObstacles,
  placed: readonly PlacedLabel[],
  kept: string | null,
): PlacedLabel | null {
  const width = Math.max(...lines.map((line, i) => wordsWidth(line, labelSize, i === 0))) + 2 * around
  const height = lines.length * lineHeight + 2 * around - 3
  let best: Candidate | null = null
  for (const candidate of candidates(request, width, height)) {
    // A place that was good is kept unless another is better by far: labels do not hop about during an edit.
    const base = candidate.cost - (candidate.slot === kept ? 30 : 0)
    if (best && base >= best.cost) continue
    if (!fits(candidate.box, obstacles, placed)) continue
    const crossings = candidate.leader
      ? leaderCost(leaderSegments(candidate.leader, request.radius), obstacles, placed)
      : 0
    if (!best || base + crossings < best.cost) best = { ...candidate, cost: base + crossings }
  }
  return best && toLabel(request, lines, best)
}

function toLabel(request: LabelRequest, lines: string[], { slot, box, anchor, leader }: Candidate): PlacedLabel {
  const x = anchor === 'start' ? box.left + around : anchor === 'end' ? box.right - around : (box.left + box.right) / 2
  const baselines = lines.map((_, i) => box.top + around + 11 + i * lineHeight)
  const dot = leader && request.radius === 0 ? request.at : null
  return {
    id: request.id,
    box,
    lines,
    x,
    anchor,
    baselines,
    leader: leader && stopAtMark(leader, request.radius),
    dot,
    slot,
  }
}

/** A leader ends at the edge of the mark, not in it. */
function stopAtMark(leader: readonly Point[], radius: number): Point[] {
  const segments = segmentsOf(leader)
  const last = segments.at(-1)
  if (!last || radius === 0) return [...leader]
  const length = distance(last.a, last.b) || 1
  const keep = Math.max(0, 1 - (radius + 1) / length)
  return [
    ...leader.slice(0, -1),
    { x: last.a.x + (last.b.x - last.a.x) * keep, y: last.a.y + (last.b.y - last.a.y) * keep },
  ]
}

const leadersCross = (one: PlacedLabel, other: PlacedLabel) =>
  segmentsOf(one.leader ?? []).some((a) => segmentsOf(other.leader ?? []).some((b) => segmentsCross(a, b)))

/**
 * @param requests   in the order of their importance.
 * @param previous   what the last picture had: a label of the same lines whose mark moved little keeps its place.
 */
export function placeLabels(
  requests: readonly LabelRequest[],
  obstacles: LabelObstacles,
  previous: readonly PlacedLabel[] = [],
): PlacedLabel[] {
  const placed: PlacedLabel[] = []
  const place = (request: LabelRequest, kept: string | null) => {
    const forms = [
      ...(request.detail ? [[request.title, request.detail]] : []),
      [request.title],
      ...(request.short ? [[request.short]] : []),
    ]
    for (const lines of forms) {
      const label = tried(request, lines, obstacles, placed, kept)
      if (label) return label
    }
    return null
  }
  for (const request of requests) {
    const label = place(request, previous.find((other) => other.id === request.id)?.slot ?? null)
    if (label) placed.push(label)
  }
  return uncrossed(placed, requests, obstacles)
}

/** Where two leaders cross, the later label is tried again without the earlier one's claim, and the earlier after it. */
function uncrossed(placed: PlacedLabel[], requests: readonly LabelRequest[], obstacles: LabelObstacles): PlacedLabel[] {
  for (let j = 1; j < placed.length; j++) {
    for (let i = 0; i < j; i++) {
      const [one, other] = [placed[i], placed[j]]
      if (!one || !other || !leadersCross(one, other)) continue
      const rest = placed.filter((label) => label !== one && label !== other)
      const [first, second] = [requests.find((r) => r.id === other.id), requests.find((r) => r.id === one.id)]
      if (!first || !second) continue
      const a = tried(first, other.lines, obstacles, rest, null)
      const b = a && tried(second, one.lines, obstacles, [...rest, a], null)
      if (a && b && !leadersCross(a, b)) {
        placed[j] = a
        placed[i] = b
      }
    }
  }
  return placed
}
