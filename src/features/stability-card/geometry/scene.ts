import type { StabilityCard } from '#shared/model/card-document.ts'
import type { DescribedModel } from '#shared/stability/summary.ts'
import { type CardEvent, eventsOf } from './events.ts'
import { type Extent, type Frame, frameFor } from './frame.ts'
import { type GroundEnd, type GroundShape, groundUnder } from './ground.ts'
import { type NearOnset, nearOnsets } from './near-onset.ts'
import { type CurvePoint, type Piece, type PieceEnd, piecesOf } from './pieces.ts'
import { distance, type Point, pathThrough, type Segment, segmentsOf } from './points.ts'
import { evenly } from './resample.ts'
import { type Subject, subjectOf } from './subject.ts'

/** A card read for drawing: numbers in the model's units, nothing placed yet. */
export interface CardGeometry {
  subject: Subject
  pieces: Piece[]
  events: CardEvent[]
  near: NearOnset[]
  /** The steady state is zero all along: the vertical axis tells amplitudes only. */
  flat: boolean
}

export function geometryOf(document: DescribedModel, card: StabilityCard): CardGeometry {
  const subject = subjectOf(document)
  const pieces = piecesOf(card)
  const values = pieces.flatMap((piece) => piece.points.map((point) => point.value))
  const low = values.reduce((a, b) => Math.min(a, b), Number.POSITIVE_INFINITY)
  const high = values.reduce((a, b) => Math.max(a, b), Number.NEGATIVE_INFINITY)
  const width = subject.box ? subject.box.high - subject.box.low : 0
  const size = values.length > 0 ? Math.max(Math.abs(low), Math.abs(high)) : 0
  const near = nearOnsets(card, pieces, {
    low: subject.control.low,
    high: subject.control.high,
    span: width > 0 ? width : values.length > 0 ? high - low : 0,
  })
  const reach = near.reduce((most, curve) => Math.max(most, curve.points.at(-1)?.amplitude ?? 0), 0)
  const flat = values.length > 0 && near.length > 0 && size <= 1e-7 * (width > 0 ? width : reach)
  return { subject, pieces, events: eventsOf(card, subject, pieces), near, flat }
}

export interface SceneCurve {
  id: string
  path: string
  stable: boolean
  points: Point[]
}

export interface SceneNear {
  curve: NearOnset
  /** One line in an amplitude picture; highest and lowest in a swing otherwise. */
  lines: Point[][]
}

/** The main drawing in pixels, without labels and without the running point. */
export interface Scene {
  geometry: CardGeometry
  frame: Frame
  grounds: (GroundShape & { key: string; main: boolean })[]
  curves: SceneCurve[]
  near: SceneNear[]
  marks: { event: CardEvent; at: Point }[]
  earlier: { curves: SceneCurve[]; near: SceneNear[] } | null
  /** Solid and dashed lines that labels keep off. */
  lines: Segment[]
}

/** The two values an oscillation moves between; in an amplitude picture its amplitude alone. */
const linesOf = ({ points }: NearOnset, flat: boolean): { p: number; value: number }[][] =>
  flat
    ? [points.map(({ p, amplitude }) => ({ p, value: amplitude }))]
    : [1, -1].map((sign) => points.map(({ p, middle, amplitude }) => ({ p, value: middle + sign * amplitude })))

function extentOf(geometries: readonly CardGeometry[], flat: boolean): Extent {
  const subject = geometries[0]?.subject
  const values = geometries.flatMap((geometry) => [
    ...geometry.pieces.flatMap((piece) => piece.points.map((point) => point.value)),
    ...geometry.near.flatMap((curve) => linesOf(curve, flat).flat()).map((point) => point.value),
  ])
  if (values.length === 0) return subject?.box ?? { low: 0, high: 1 }
  const low = flat ? 0 : values.reduce((a, b) => Math.min(a, b))
  const high = values.reduce((a, b) => Math.max(a, b))
  if (high - low > 1e-9 * Math.max(Math.abs(low), Math.abs(high))) return { low, high: high + 0.06 * (high - low) }
  // One value only: a level line in the middle of a span worth reading.
  const half = subject?.box ? 0.25 * (subject.box.high - subject.box.low) : Math.max(Math.abs(low), 1)
  return { low: flat ? 0 : low - half, high: high + half }
}

function endFor(end: PieceEnd, card: StabilityCard, frame: Frame): GroundEnd {
  if (end.kind === 'turning-point' || end.kind === 'branch-point') return { kind: 'taper' }
  if (end.kind !== 'onset' || end.index === null) return { kind: 'none' }
  const verdict = card.hopf?.[end.index]?.verdict
  if (verdict === 'soft') return { kind: 'soft' }
  if (verdict !== 'hard') return { kind: 'undecided' }
  const side = [card.window?.low, card.window?.high].find((edge) => edge?.kind === 'onset' && edge.index === end.index)
  return { kind: 'hard', recovery: side?.returnAt === undefined ? null : frame.x.toPixel(side.returnAt) }
}

/** The piece the window stands on: of those on its branch that reach over its middle, the one of the same extent. */
function windowPiece(pieces: readonly Piece[], card: StabilityCard): Piece | null {
  const window = card.window
  if (!window) return null
  const middle = (window.from + window.to) / 2
  const fitting = pieces
    .filter((piece) => piece.stable && piece.branch === window.branch)
    .map((piece) => {
      const low = piece.points.reduce((a, point) => Math.min(a, point.p), Number.POSITIVE_INFINITY)
      const high = piece.points.reduce((a, point) => Math.max(a, point.p), Number.NEGATIVE_INFINITY)
      return {
        piece,
        covers: low <= middle && middle <= high,
        misfit: Math.abs(low - window.from) + Math.abs(high - window.to),
      }
    })
    .filter(({ covers }) => covers)
  return fitting.sort((a, b) => a.misfit - b.misfit)[0]?.piece ?? null
}

function placed(geometry: CardGeometry, frame: Frame, flat: boolean) {
  const at = ({ p, value }: { p: number; value: number }): Point => ({
    x: frame.x.toPixel(p),
    y: frame.y.toPixel(value),
  })
  const curves = geometry.pieces.map((piece, i): SceneCurve => {
    const points = thinned(piece.points.map((point: CurvePoint) => at(point)))
    return { id: `${piece.branch}-${i}`, path: pathThrough(points), stable: piece.stable, points }
  })
  const near = geometry.near.map(
    (curve): SceneNear => ({ curve, lines: linesOf(curve, flat).map((line) => line.map(at)) }),
  )
  return { at, curves, near }
}

const sameLine = (a: SceneCurve, b: SceneCurve): boolean => {
  const [one, other] = [evenly(a.points, 9), evenly(b.points, 9)]
  const near = (to: readonly Point[]) => one.every((point, i) => to[i] && distance(point, to[i]) < 3)
  return near(other) || near([...other].reverse())
}

/** True where another ground lies under the same line already; the running one is laid before all others. */
function covered(
  curve: SceneCurve,
  main: boolean,
  before: readonly SceneCurve[],
  mainCurve: SceneCurve | undefined,
): boolean {
  if (main) return false
  return (mainCurve !== undefined && sameLine(curve, mainCurve)) || before.some((other) => sameLine(curve, other))
}

/** Points nearer than half a pixel to the one before add nothing. The ends always stay. */
function thinned(points: Point[]): Point[] {
  const kept: Point[] = []
  points.forEach((point, i) => {
    const last = kept.at(-1)
    if (last && i < points.length - 1 && Math.hypot(point.x - last.x, point.y - last.y) < 0.5) return
    kept.push(point)
  })
  return kept
}

/** Lays out the main drawing for a given width. */
export function sceneOf(
  geometry: CardGeometry,
  card: StabilityCard,
  width: number,
  earlier: CardGeometry | null = null,
): Scene {
  const { subject } = geometry
  const flat = geometry.flat && (earlier?.flat ?? true)
  const frame = frameFor(width, subject.control, extentOf(earlier ? [geometry, earlier] : [geometry], flat))
  const { at, curves, near } = placed(geometry, frame, flat)
  const running = windowPiece(geometry.pieces, card)
  const mainCurve = running ? curves[geometry.pieces.indexOf(running)] : undefined
  const solid = curves.filter((curve) => curve.stable)
  const grounds = geometry.pieces.flatMap((piece, i) => {
    const curve = curves[i]
    if (!piece.stable || !curve) return []
    const main = piece === running
    // Two states that do not differ in the observed quantity are one line: it needs one ground.
    if (covered(curve, main, solid.slice(0, solid.indexOf(curve)), mainCurve)) return []
    const obstacles = solid.flatMap((other) => (other === curve ? [] : segmentsOf(other.points)))
    const ends = [endFor(piece.start, card, frame), endFor(piece.end, card, frame)] as const
    const shape = groundUnder(curve.points, main ? frame.depth : frame.otherDepth, ...ends, obstacles, frame.plot)
    return shape ? [{ ...shape, key: curve.id, main }] : []
  })
  // On one spot the limit lies on top.
  const weight = { none: 0, other: 1, limit: 2 } as const
  const marks = geometry.events
    .map((event) => ({ event, at: at(event) }))
    .sort((a, b) => a.at.x - b.at.x || a.at.y - b.at.y || weight[a.event.role] - weight[b.event.role])
  const lines = [
    ...curves.flatMap((curve) => segmentsOf(curve.points)),
    ...near.flatMap((curve) => curve.lines.flatMap(segmentsOf)),
    ...grounds.flatMap((ground) => ground.outline),
  ]
  return { geometry, frame, grounds, curves, near, marks, earlier: earlier && placed(earlier, frame, flat), lines }
}
