import { createLu, factorInPlace, type Lu, solveLu } from '#shared/numerics/linear-solve.ts'
import type { Plane } from './plane.ts'

/**
 * A curve in the space of states and both controls, given by a system of `size` - 1 equations for `size` unknowns, of
 * which the first n + 2 are the point z (scaled, see plane.ts) and the rest belong to the system (null vectors and such).
 * Arclength, steps and tangents are measured in z alone.
 */
export interface CurveSystem {
  readonly kind: 'onset' | 'fold'
  readonly plane: Plane
  readonly size: number
  /** Position of the unknown that must not fall below zero (omega² of an onset), or null. */
  readonly floor: number | null
  /**
   * Writes the residual (size - 1) and the matrix (row-major, `size` columns; the last row is the caller's) at y.
   * `reference` is what `renew` gave for a point close by. False where something is not finite.
   */
  fill(y: Float64Array, reference: Float64Array, residual: Float64Array, matrix: Float64Array): boolean
  /** Brings the inner normalisation at y up to date, in place; null where that is impossible. */
  renew(y: Float64Array): Float64Array | null
  /** Angular frequency at y, radians per time unit; null where the curve has none. */
  omega(y: Float64Array): number | null
}

/** A point on a curve. */
export interface CurveVertex {
  readonly y: Float64Array
  readonly reference: Float64Array
  /** Derivative of y by arclength: the first n + 2 entries have length 1. */
  readonly t: Float64Array
}

/** A curve system with the workspace of its solves. */
export interface Tracer {
  readonly system: CurveSystem
  readonly plane: Plane
  readonly lu: Lu
  readonly right: Float64Array
}

/** Makes the workspace. */
export function createTracer(system: CurveSystem): Tracer {
  return { system, plane: system.plane, lu: createLu(system.size), right: new Float64Array(system.size) }
}

/** Unit vector along unknown `index`. */
export function axis({ system }: Tracer, index: number): Float64Array {
  const row = new Float64Array(system.size)
  row[index] = 1
  return row
}

function factorAt(tracer: Tracer, y: Float64Array, reference: Float64Array, row: Float64Array): boolean {
  const { system, lu, right } = tracer
  lu.lu.fill(0)
  right[system.size - 1] = 0
  if (!system.fill(y, reference, right, lu.lu)) return false
  lu.lu.set(row, system.size * (system.size - 1))
  return factorInPlace(lu)
}

/**
 * Newton's method onto the curve in the plane through y with normal `row`; y is moved there in place. Returns the number
 * of steps, or null where it fails. Converges to rounding: the last step is below 1e-9, what is left is its square.
 * Source: Keller 1977 (pseudo-arclength); Allgower & Georg, Numerical Continuation Methods 1990, chapter 3.
 */
export function correctOnto(
  tracer: Tracer,
  y: Float64Array,
  reference: Float64Array,
  row: Float64Array,
): number | null {
  const { right } = tracer
  let before = Number.POSITIVE_INFINITY
  for (let steps = 1; steps <= 10; steps++) {
    if (tracer.plane.frame.budget.spent() || !factorAt(tracer, y, reference, row)) return null
    solveLu(tracer.lu, right)
    let size = 0
    for (let i = 0; i < y.length; i++) {
      const part = right[i] as number
      size += part * part
      y[i] = (y[i] as number) - part
    }
    size = Math.sqrt(size)
    if (!(size < 1e3)) return null
    if (size < 1e-9) return steps
    // steps that no longer shrink at the level of rounding: an ill-conditioned point, good enough where they are
    if (steps > 2 && size > 0.5 * before) return size < 1e-7 ? steps : null
    before = size
  }
  return null
}

/** Completes a point on the curve: inner normalisation, and the tangent with a positive product with `along`. */
export function vertexAt(tracer: Tracer, y: Float64Array, along: Float64Array): CurveVertex | null {
  const { system, right, plane } = tracer
  const reference = system.renew(y)
  if (!reference || !factorAt(tracer, y, reference, along)) return null
  right.fill(0)
  right[system.size - 1] = 1
  solveLu(tracer.lu, right)
  let size = 0
  for (let i = 0; i < plane.width; i++) size += (right[i] as number) ** 2
  size = Math.sqrt(size)
  if (!(size > 1e-12 && size < 1e12)) return null
  return { y, reference, t: right.map((value) => value / size) }
}

/** A point on the curve where no direction is known yet, moved onto the curve; null where the curve has no tangent. */
export function startVertex(tracer: Tracer, y: Float64Array): CurveVertex | null {
  const { plane } = tracer
  for (const index of [plane.n, plane.n + 1, ...Array.from({ length: plane.n }, (_, i) => i)]) {
    if (plane.frame.budget.spent()) return null
    const rough = vertexAt(tracer, y.slice(), axis(tracer, index))
    // an axis almost across the curve gives a poor tangent: take another
    if (!rough || Math.abs(rough.t[index] as number) < 0.05) continue
    const moved = rough.y.slice()
    const row = normalOf(tracer, rough.t)
    if (correctOnto(tracer, moved, rough.reference, row) === null) continue
    const vertex = vertexAt(tracer, moved, row)
    if (vertex) return vertex
  }
  return null
}

/** The part of a direction that arclength counts. */
export function normalOf({ plane, system }: Tracer, t: Float64Array): Float64Array {
  const row = new Float64Array(system.size)
  row.set(t.subarray(0, plane.width))
  return row
}

/** Distance of two points of the space (z only). */
export function gap({ plane }: Tracer, a: Float64Array, b: Float64Array): number {
  let sum = 0
  for (let i = 0; i < plane.width; i++) sum += ((a[i] as number) - (b[i] as number)) ** 2
  return Math.sqrt(sum)
}

/** Product of two directions (z only). */
export function product({ plane }: Tracer, a: Float64Array, b: Float64Array): number {
  let sum = 0
  for (let i = 0; i < plane.width; i++) sum += (a[i] as number) * (b[i] as number)
  return sum
}

/** z at the share s between two neighbours on the cubic through both with their tangents; other unknowns of the nearer. */
export function guessBetween(tracer: Tracer, a: CurveVertex, b: CurveVertex, s: number): CurveVertex {
  const length = gap(tracer, a.y, b.y)
  const near = s <= 0.5 ? a : b
  const y = near.y.slice()
  const h00 = (1 + 2 * s) * (1 - s) * (1 - s)
  const h10 = s * (1 - s) * (1 - s) * length
  const h01 = s * s * (3 - 2 * s)
  const h11 = s * s * (s - 1) * length
  for (let i = 0; i < tracer.plane.width; i++) {
    y[i] = h00 * (a.y[i] as number) + h10 * (a.t[i] as number) + h01 * (b.y[i] as number) + h11 * (b.t[i] as number)
  }
  return { ...near, y }
}

/** The vertex at the share s between two neighbours, in the plane across their chord; null where Newton strays. */
export function vertexBetween(tracer: Tracer, a: CurveVertex, b: CurveVertex, s: number): CurveVertex | null {
  const guess = guessBetween(tracer, a, b, s)
  const y = guess.y.slice()
  const chord = normalOf(
    tracer,
    b.y.map((value, i) => value - (a.y[i] as number)),
  )
  if (correctOnto(tracer, y, guess.reference, chord) === null) return null
  if (gap(tracer, y, guess.y) > 0.5 * gap(tracer, a.y, b.y)) return null
  return vertexAt(tracer, y, chord)
}
