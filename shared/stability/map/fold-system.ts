import { createLu, factorLu, liftZeroPivots, solveLu, solveLuTransposed } from '#shared/numerics/linear-solve.ts'
import type { CurveSystem } from './curve.ts'
import { createPlaneForm, linearisePlane, type Plane, statesBlock } from './plane.ts'

/**
 * Turning points of steady states in the space of states and both controls: F = 0, A q = 0, <q, q> = 1 in y = (z, q).
 * Regular at turning points, at cusps and at double zeros; not where two branches of steady states cross for every
 * value of the second control (those are no turning points).
 * Source: Moore & Spence 1980; Govaerts, Numerical Methods for Bifurcations of Dynamical Equilibria, section 4.1.
 */
export function createFoldSystem(plane: Plane): CurveSystem {
  const { n, width } = plane
  const size = 2 * n + 2
  const form = createPlaneForm(plane)
  const direction = new Float64Array(width)
  const unitVector = new Float64Array(width)
  const column = new Float64Array(n)

  function fill(y: Float64Array, _: Float64Array, residual: Float64Array, matrix: Float64Array): boolean {
    if (!linearisePlane(plane, y.subarray(0, width))) return false
    const { derivatives } = plane
    let norm = -1
    for (let i = 0; i < n; i++) {
      const qi = y[width + i] as number
      let sum = 0
      for (let j = 0; j < width; j++) matrix[i * size + j] = derivatives[i * width + j] as number
      for (let j = 0; j < n; j++) {
        const entry = derivatives[i * width + j] as number
        matrix[(n + i) * size + width + j] = entry
        sum += entry * (y[width + j] as number)
      }
      residual[i] = plane.frame.residual[i] as number
      residual[n + i] = sum
      norm += qi * qi
      matrix[2 * n * size + width + i] = 2 * qi
    }
    residual[2 * n] = norm
    direction.fill(0)
    direction.set(y.subarray(width, width + n))
    for (let j = 0; j < width; j++) {
      unitVector.fill(0)
      unitVector[j] = 1
      form(y, direction, unitVector, column)
      for (let i = 0; i < n; i++) matrix[(n + i) * size + j] = column[i] as number
    }
    return true
  }

  return { kind: 'fold', plane, size, floor: null, fill, renew: () => new Float64Array(0), omega: () => null }
}

/** Null vectors of A at a point where it is singular. */
export interface FoldVectors {
  /** A q = 0, <q, q> = 1. */
  readonly right: Float64Array
  /** psiᵀ A = 0, <psi, psi> = 1. */
  readonly left: Float64Array
}

/** Null vectors at z by inverse iteration; null where F is not finite there. */
export function foldVectors(plane: Plane, z: Float64Array): FoldVectors | null {
  if (!linearisePlane(plane, z)) return null
  const { n } = plane
  const lu = createLu(n)
  const a = statesBlock(plane)
  factorLu(lu, a)
  const size = a.reduce((most, value) => Math.max(most, Math.abs(value)), 0)
  if (!Number.isFinite(size)) return null
  liftZeroPivots(lu, 1e-15, size > 0 ? 1e-15 * size : 1)
  const right = Float64Array.from({ length: n }, (_, i) => 1 + 0.5 * Math.sin(1.7 * i + 1))
  const left = right.slice()
  for (let pass = 0; pass < 4; pass++) {
    // powers of (AᵀA)⁻¹ and (AAᵀ)⁻¹: singular vectors, which are well apart at a double zero too
    solveLuTransposed(lu, right)
    solveLu(lu, right)
    solveLu(lu, left)
    solveLuTransposed(lu, left)
    if (!toUnit(right) || !toUnit(left)) return null
  }
  return { right, left }
}

function toUnit(v: Float64Array): boolean {
  const most = v.reduce((size, value) => Math.max(size, Math.abs(value)), 0)
  if (!(most > 0 && Number.isFinite(most))) return false
  for (let i = 0; i < v.length; i++) v[i] = (v[i] as number) / most
  const size = Math.sqrt(v.reduce((sum, value) => sum + value * value, 0))
  for (let i = 0; i < v.length; i++) v[i] = (v[i] as number) / size
  return true
}

/** A system and its unknowns at a turning point z. */
export function foldAt(plane: Plane, z: Float64Array): { system: CurveSystem; y: Float64Array } | null {
  const vectors = foldVectors(plane, z)
  if (!vectors) return null
  const system = createFoldSystem(plane)
  const y = new Float64Array(system.size)
  y.set(z)
  y.set(vectors.right, plane.width)
  return { system, y }
}

/**
 * True where the steady states turn at a singular point: a control pushes along the null vector. Where neither does, two
 * branches cross there and there is no turning point.
 */
export function turnsAt(plane: Plane, z: Float64Array): boolean {
  const vectors = foldVectors(plane, z)
  if (!vectors || !linearisePlane(plane, z)) return false
  const { n, width, derivatives } = plane
  const rounding = 1e-13 * derivatives.reduce((most, value) => Math.max(most, Math.abs(value)), 0)
  return [n, n + 1].some((column) => {
    let push = 0
    let size = 0
    for (let i = 0; i < n; i++) {
      const entry = derivatives[i * width + column] as number
      push += (vectors.left[i] as number) * entry
      size += entry * entry
    }
    return Math.abs(push) > Math.max(rounding, 1e-6 * Math.sqrt(size))
  })
}
