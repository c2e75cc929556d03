import {
  axis,
  type CurveVertex,
  correctOnto,
  gap,
  guessBetween,
  normalOf,
  product,
  type Tracer,
  vertexAt,
} from './curve.ts'
import { boundsOf } from './plane.ts'

/** Why a curve ended: at the end of a range, where a state left its box, at omega = 0, in itself, or where it was lost. */
export type CurveEnd = { kind: 'range-end' | 'closed' | 'double-zero' | 'lost' } | { kind: 'box-left'; state: number }

/** A curve from end to end. */
export interface Curve {
  readonly tracer: Tracer
  /** In the order of the walk; a closed curve's last vertex is followed by its first, which is not repeated. */
  readonly vertices: CurveVertex[]
  readonly ends: [CurveEnd, CurveEnd]
  readonly closed: boolean
}

/** Steps in scaled arclength, at most a 96th of box and ranges: dense enough to draw, and for islands of a few percent. */
const longestStep = 1 / 96
const firstStep = 1 / 1000
const shortestStep = 1e-7
/** Largest turn of the tangent in one step, radians. */
const largestTurn = 0.2
const mostVertices = 3000

/**
 * How far beyond the ends of both ranges a curve is followed where it runs along an edge of the plane, as a share of them:
 * now on this side of the edge, now on that, it would be cut to pieces. Its points there keep their true values.
 */
const overhang = 1e-3
/** Arclength for which it must keep to the edge; one that crosses it ends on it. */
const alongEdge = 1e-2

/** Traces the curve through `start` both ways until it ends or closes. */
export function traceCurve(tracer: Tracer, start: CurveVertex): Curve {
  const forth = walkOut(tracer, start)
  if (forth.end.kind === 'closed') {
    return { tracer, vertices: forth.vertices, ends: [forth.end, forth.end], closed: true }
  }
  const back = walkOut(tracer, reversed(start))
  const vertices = [...back.vertices.slice(1).reverse().map(reversed), ...forth.vertices]
  return { tracer, vertices, ends: [back.end, forth.end], closed: false }
}

function reversed(vertex: CurveVertex): CurveVertex {
  return { ...vertex, t: vertex.t.map((value) => -value) }
}

/** To the end of the range; beyond it only where the curve keeps to the edge, or comes back. */
function walkOut(tracer: Tracer, start: CurveVertex): Walked {
  const within = walkCurve(tracer, start, null)
  const last = within.vertices[within.vertices.length - 1]
  if (within.end.kind !== 'range-end' || !last) return within
  const edge = edgeOf(tracer, last)
  if (edge === null) return within
  const beyond = walkCurve(tracer, last, { index: edge, size: overhang })
  let length = 0
  for (let i = 1; i < beyond.vertices.length; i++) {
    length += gap(tracer, (beyond.vertices[i - 1] as CurveVertex).y, (beyond.vertices[i] as CurveVertex).y)
  }
  if (beyond.end.kind === 'lost' || length < alongEdge) return within
  if (beyond.end.kind === 'closed') return within
  return { vertices: [...within.vertices, ...beyond.vertices.slice(1)], end: beyond.end }
}

/** The control whose end a point lies on; null where it lies on neither. */
function edgeOf({ plane }: Tracer, { y }: CurveVertex): number | null {
  for (const index of [plane.n, plane.n + 1]) {
    const { low, high } = boundsOf(plane, index)
    const value = y[index] as number
    if (Math.min(Math.abs(value - low), Math.abs(value - high)) <= 1e-9 * (high - low)) return index
  }
  return null
}

/** How much further out the range of one control is taken. */
type Margin = { readonly index: number; readonly size: number } | null

interface Walked {
  readonly vertices: CurveVertex[]
  readonly end: CurveEnd
}

/**
 * Pseudo-arclength from `start` along its tangent: predictor along the tangent, Newton across it, step length by the turn
 * of the tangent and the work of the corrector. Vertical and turning places are ordinary points to it.
 * Source: Keller 1977; Allgower & Georg, Numerical Continuation Methods 1990, chapters 3 and 6.
 */
function walkCurve(tracer: Tracer, start: CurveVertex, margin: Margin): Walked {
  const vertices = [start]
  const { plane } = tracer
  const outward = leavesAtOnce(tracer, start, margin)
  if (outward) return { vertices, end: outward }
  let current = start
  let step = firstStep
  while (vertices.length < mostVertices && !plane.frame.budget.spent()) {
    if (step < shortestStep) return { vertices, end: { kind: 'lost' } }
    const attempt = tryStep(tracer, current, step)
    if (!attempt || ((attempt.far || attempt.turn > largestTurn) && step > 4 * shortestStep)) {
      step /= attempt && attempt.turn > 2 * largestTurn ? 4 : 2
      continue
    }
    const next = attempt.vertex
    const stop = stopBetween(tracer, current, next, margin)
    if (stop) {
      if (!stop.vertex && step > 4 * shortestStep) {
        step /= 2
        continue
      }
      if (stop.vertex && gap(tracer, stop.vertex.y, current.y) > 1e-9) vertices.push(stop.vertex)
      else if (stop.vertex && vertices.length > 1) vertices[vertices.length - 1] = stop.vertex
      return { vertices, end: stop.end }
    }
    if (vertices.length > 8 && closes(tracer, start, current, next)) return { vertices, end: { kind: 'closed' } }
    vertices.push(next)
    current = next
    const wanted = attempt.turn > 1e-9 ? step * Math.min(2, (0.6 * largestTurn) / attempt.turn) : 2 * step
    step = Math.min(longestStep, attempt.work > 4 ? 0.7 * step : wanted)
  }
  return { vertices, end: { kind: 'lost' } }
}

function tryStep(
  tracer: Tracer,
  from: CurveVertex,
  step: number,
): { vertex: CurveVertex; far: boolean; turn: number; work: number } | null {
  const guess = from.y.map((value, i) => value + step * (from.t[i] as number))
  const y = guess.slice()
  const row = normalOf(tracer, from.t)
  const work = correctOnto(tracer, y, from.reference, row)
  if (work === null) return null
  const { floor } = tracer.system
  const vertex = vertexAt(tracer, y, row)
  if (!vertex) return null
  // a jump of omega² that the tangent did not announce is one onto another pair
  const jump = floor === null ? 0 : Math.abs((y[floor] as number) - (guess[floor] as number))
  const size = floor === null ? 1 : 0.2 * Math.abs(guess[floor] as number) + 2 * step
  const far = gap(tracer, y, guess) > 0.3 * step || jump > size
  return { vertex, far, turn: Math.acos(Math.max(-1, Math.min(1, product(tracer, from.t, vertex.t)))), work }
}

interface Stop {
  readonly end: CurveEnd
  /** Null where Newton did not find the curve on the bound. */
  readonly vertex: CurveVertex | null
}

/** The end of the curve between two neighbours: omega = 0, or the first bound of box and ranges; null where neither. */
function stopBetween(tracer: Tracer, a: CurveVertex, b: CurveVertex, margin: Margin): Stop | null {
  const { floor } = tracer.system
  if (floor !== null && (b.y[floor] as number) < 0) {
    const vertex = vertexOn(tracer, a, b, floor, 0)
    if (!vertex) return { end: { kind: 'double-zero' }, vertex: null }
    if (exitBetween(tracer, a, vertex, margin) === null) return { end: { kind: 'double-zero' }, vertex }
  }
  const exit = exitBetween(tracer, a, b, margin)
  return exit ? { end: exit.end, vertex: vertexOn(tracer, a, b, exit.index, exit.bound) } : null
}

/** The first bound of box and ranges between two points. Closed, with 1e-9 of each width to spare. */
function exitBetween(
  tracer: Tracer,
  a: CurveVertex,
  b: CurveVertex,
  margin: Margin,
): { index: number; bound: number; end: CurveEnd } | null {
  const { plane } = tracer
  let share = Number.POSITIVE_INFINITY
  let exit: { index: number; bound: number; end: CurveEnd } | null = null
  for (let index = 0; index < plane.width; index++) {
    const { low, high } = boundsOf(plane, index, margin?.index === index ? margin.size : 0)
    const slack = 1e-9 * (high - low)
    const from = a.y[index] as number
    const to = b.y[index] as number
    const bound = to > high + slack ? high : to < low - slack ? low : null
    if (bound === null) continue
    const at = to === from ? 0 : Math.max(0, (bound - from) / (to - from))
    // of bounds met together the range's end is named
    if (at > share || (at === share && index < plane.n)) continue
    share = at
    const end: CurveEnd = index < plane.n ? { kind: 'box-left', state: index } : { kind: 'range-end' }
    exit = { index, bound, end }
  }
  return exit
}

/** The vertex at which unknown `index` has a given value, between two neighbours. */
function vertexOn(tracer: Tracer, a: CurveVertex, b: CurveVertex, index: number, value: number): CurveVertex | null {
  const from = a.y[index] as number
  const to = b.y[index] as number
  const s = to === from ? 0 : Math.min(1, Math.max(0, (value - from) / (to - from)))
  const guess = guessBetween(tracer, a, b, s)
  const y = guess.y.slice()
  y[index] = value
  if (correctOnto(tracer, y, guess.reference, axis(tracer, index)) === null) return null
  y[index] = value
  if (gap(tracer, y, guess.y) > 0.5 * gap(tracer, a.y, b.y) + 1e-9) return null
  const chord = normalOf(
    tracer,
    b.y.map((entry, i) => entry - (a.y[i] as number)),
  )
  return vertexAt(tracer, y, chord)
}

/** On a bound, or at omega = 0, already, with the tangent pointing out. */
function leavesAtOnce(tracer: Tracer, start: CurveVertex, margin: Margin): CurveEnd | null {
  const { floor } = tracer.system
  if (floor !== null && (start.y[floor] as number) < 1e-9 && (start.t[floor] as number) < 0) {
    return { kind: 'double-zero' }
  }
  const ahead = { ...start, y: start.y.map((value, i) => value + 1e-6 * (start.t[i] as number)) }
  return exitBetween(tracer, start, ahead, margin)?.end ?? null
}

/** True where the step from a to b passes the start in the direction in which the walk began. */
function closes(tracer: Tracer, start: CurveVertex, a: CurveVertex, b: CurveVertex): boolean {
  const length = gap(tracer, a.y, b.y)
  if (gap(tracer, start.y, a.y) > length || gap(tracer, start.y, b.y) > length) return false
  const { floor } = tracer.system
  if (floor !== null && Math.abs((start.y[floor] as number) - (b.y[floor] as number)) > 0.2) return false
  return product(tracer, start.t, b.t) > 0.9
}

/**
 * True where z (and omega, on onset curves) lies on the curve: compared with the curve itself, by Newton in the plane
 * through z, to 1e-6 of box and ranges.
 */
export function liesOn(curve: Curve, z: Float64Array, omega: number | null): boolean {
  const { tracer, vertices } = curve
  const { plane, system } = tracer
  const last = curve.closed ? vertices.length : vertices.length - 1
  for (let i = 0; i < last; i++) {
    const a = vertices[i] as CurveVertex
    const b = vertices[(i + 1) % vertices.length] as CurveVertex
    const chord = normalOf(
      tracer,
      b.y.map((value, k) => value - (a.y[k] as number)),
    )
    const offset = z.map((value, k) => value - (a.y[k] as number))
    const length = product(tracer, chord, chord)
    const share = length > 0 ? product(tracer, offset, chord) / length : 0
    const across = gap(tracer, z, a.y) ** 2 - share * share * length
    if (share < -0.01 || share > 1.01 || across > 0.01 * length + 1e-12) continue
    const near = share <= 0.5 ? a : b
    const y = near.y.slice()
    y.set(z.subarray(0, plane.width))
    const row = length > 0 ? chord : normalOf(tracer, a.t)
    if (correctOnto(tracer, y, near.reference, row) === null || gap(tracer, y, z) > 1e-6) continue
    const here = system.omega(y)
    if (omega === null || here === null) return true
    if (Math.abs(here - omega) <= 1e-5 * Math.max(here, omega)) return true
  }
  return false
}
