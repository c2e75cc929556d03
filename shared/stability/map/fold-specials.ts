import { createLu, factorBordered, solveLu } from '#shared/numerics/linear-solve.ts'
import { besideZero, pairOnAxis, pairTest } from './beside-the-pair.ts'
import type { CurveVertex } from './curve.ts'
import { foldVectors } from './fold-system.ts'
import { createPlaneForm, linearisePlane, type Plane, statesBlock } from './plane.ts'
import { type SpecialPoint, zerosAlong } from './special-points.ts'
import type { Curve } from './walk-curve.ts'

/**
 * Special points of a curve of turning points, each placed among its vertices: cusps (psiᵀ D2(q, q) = 0), double zeros
 * (psiᵀ q = 0) and zero-Hopf points (a pair on the axis), with A q = 0, psiᵀ A = 0.
 * Source: Kuznetsov, Elements of Applied Bifurcation Theory (3rd ed.), sections 8.2 to 8.5.
 */
export function foldSpecials(curve: Curve): SpecialPoint[] {
  const { plane } = curve.tracer
  const { n } = plane
  const form = createPlaneForm(plane)
  const specials: SpecialPoint[] = []
  const left = leftAlong(curve)
  const bend = (vertex: CurveVertex): number | null => {
    const psi = left(vertex)
    if (!psi) return null
    const q = new Float64Array(plane.width)
    q.set(vertex.y.subarray(plane.width, plane.width + n))
    const out = new Float64Array(n)
    form(vertex.y, q, q, out)
    return psi.reduce((sum, value, i) => sum + value * (out[i] as number), 0)
  }
  const none = (): number => 0
  for (const vertex of zerosAlong(curve, bend, none)) specials.push({ kind: 'cusp', vertex, omega: null, other: null })
  if (n < 2) return specials
  const overlap = (vertex: CurveVertex): number | null =>
    left(vertex)?.reduce((sum, value, i) => sum + value * (vertex.y[plane.width + i] as number), 0) ?? null
  for (const vertex of zerosAlong(curve, overlap, none)) {
    specials.push({ kind: 'double-zero', vertex, omega: null, other: null })
  }
  if (n < 3) return specials
  const pair = (vertex: CurveVertex): number | null => {
    const rest = besideZero(plane, vertex.y)
    return rest && pairTest(rest)
  }
  const noise = (vertex: CurveVertex): number => 1e-11 * (besideZero(plane, vertex.y)?.size ?? 0)
  for (const vertex of zerosAlong(curve, pair, noise)) {
    const rest = besideZero(plane, vertex.y)
    const omega = rest && pairOnAxis(rest)
    if (omega !== null) specials.push({ kind: 'zero-hopf', vertex, omega, other: null })
  }
  return specials
}

/** The left null vector along the curve, of one orientation all along: that of the known vertex nearest in arclength. */
function leftAlong(curve: Curve): (vertex: CurveVertex) => Float64Array | null {
  const { plane } = curve.tracer
  const known = new Map<CurveVertex, Float64Array>()
  let previous: Float64Array | null = null
  const at = (vertex: CurveVertex, like: Float64Array | null): Float64Array | null => {
    const psi = foldVectors(plane, vertex.y)?.left ?? null
    if (!psi || !like) return psi
    const same = psi.reduce((sum, value, i) => sum + value * (like[i] as number), 0)
    return same < 0 ? psi.map((value) => -value) : psi
  }
  for (const vertex of curve.vertices) {
    if (plane.frame.budget.spent()) break
    const psi = at(vertex, previous)
    if (!psi) continue
    known.set(vertex, psi)
    previous = psi
  }
  return (vertex) => {
    const found = known.get(vertex)
    if (found) return found
    let nearest: Float64Array | null = null
    let distance = Number.POSITIVE_INFINITY
    for (const [other, psi] of known) {
      let sum = 0
      for (let i = 0; i < plane.width; i++) sum += ((other.y[i] as number) - (vertex.y[i] as number)) ** 2
      if (sum >= distance) continue
      distance = sum
      nearest = psi
    }
    return at(vertex, nearest)
  }
}

/** At a double zero: the vector that A maps onto the null vector, without a part along it. */
export function generalisedVector(plane: Plane, z: Float64Array): Float64Array | null {
  const vectors = foldVectors(plane, z)
  if (!vectors || !linearisePlane(plane, z)) return null
  const lu = createLu(plane.n + 1)
  if (!factorBordered(lu, statesBlock(plane), vectors.left, vectors.right, 0)) return null
  const solution = new Float64Array(plane.n + 1)
  solution.set(vectors.right)
  solveLu(lu, solution)
  return solution.every((value) => Number.isFinite(value)) ? solution.slice(0, plane.n) : null
}
