import {
  determinantSign,
  factorInPlace,
  liftZeroPivots,
  solveLu,
  solveLuTransposed,
} from '#shared/numerics/linear-solve.ts'
import { distance, dot, type Frame, linearise, spectrumHere } from './frame.ts'
import type { Spectrum } from './spectrum.ts'

/** A point on a branch of steady states, with what the walk needs to know there. Scaled coordinates, see frame.ts. */
export interface Sample {
  readonly z: Float64Array
  /** Unit tangent in the direction of the walk. */
  readonly t: Float64Array
  /** Sign of det [F_x F_p; t]: changes at a simple branch point, not at a turning point. */
  readonly sign: number
  readonly spectrum: Spectrum
}

export type Correction = { ok: true; steps: number } | { ok: false; reason: 'not-finite' | 'no-convergence' }

/** Loads [F_x F_p; rowᵀ] at the last linearised point and factors it. */
function factorWith(frame: Frame, row: Float64Array): boolean {
  const { n, bordered, derivatives } = frame
  bordered.lu.set(derivatives)
  bordered.lu.set(row, n * (n + 1))
  return factorInPlace(bordered)
}

/**
 * Newton's method onto the branch, in the plane through `z` with normal `normal`; z is moved there in place.
 *
 * Converges to rounding: the last step is below 1e-9, so the error left is its square. Fails where F is not finite, the
 * matrix singular, or the steps do not shrink.
 * Source: Keller 1977 (pseudo-arclength); Allgower & Georg, Numerical Continuation Methods 1990, chapter 3.
 */
export function correct(frame: Frame, z: Float64Array, normal: Float64Array): Correction {
  const { n, right, residual } = frame
  let before = Number.POSITIVE_INFINITY
  for (let steps = 1; steps <= 10; steps++) {
    if (!linearise(frame, z)) return { ok: false, reason: 'not-finite' }
    if (!factorWith(frame, normal)) return { ok: false, reason: 'no-convergence' }
    right.set(residual)
    right[n] = 0
    solveLu(frame.bordered, right)
    const size = Math.sqrt(dot(right, right))
    if (!(size < 1e3)) return { ok: false, reason: 'no-convergence' }
    for (let i = 0; i <= n; i++) z[i] = (z[i] as number) - (right[i] as number)
    if (size < 1e-9) return { ok: true, steps }
    if (steps > 2 && size > 0.5 * before) {
      // steps that no longer shrink at the level of rounding: an ill-conditioned point, good enough where they are
      return size < 1e-7 ? { ok: true, steps } : { ok: false, reason: 'no-convergence' }
    }
    before = size
  }
  return { ok: false, reason: 'no-convergence' }
}

/**
 * Completes a corrected point to a sample: tangent with positive product with `along`, determinant sign, eigenvalues.
 * Null where the branch has no unique tangent there or something is not finite.
 */
export function sampleAt(frame: Frame, z: Float64Array, along: Float64Array): Sample | null {
  const { n, right, bordered } = frame
  if (!linearise(frame, z)) return null
  const spectrum = spectrumHere(frame)
  if (spectrum === null || !factorWith(frame, along)) return null
  right.fill(0)
  right[n] = 1
  solveLu(bordered, right)
  const size = Math.sqrt(dot(right, right))
  if (!(size > 0 && size < 1e12)) return null
  const t = right.map((value) => value / size)
  return { z, t, sign: determinantSign(bordered), spectrum }
}

/** A tangent at a corrected point where no direction is known yet: of rising control, or any where it turns there. */
export function firstTangent(frame: Frame, z: Float64Array): Float64Array | null {
  const { n } = frame
  const along = new Float64Array(n + 1)
  for (let axis = n; axis >= 0; axis--) {
    along.fill(0)
    along[axis] = 1
    const sample = sampleAt(frame, z, along)
    // an axis almost across the branch gives a poor tangent: take another
    if (sample && Math.abs(sample.t[axis] as number) > 0.05) return sample.t
  }
  return null
}

/** Unit vector along coordinate `index` of z. */
export function axisVector(frame: Frame, index: number): Float64Array {
  const v = new Float64Array(frame.n + 1)
  v[index] = 1
  return v
}

/**
 * Left and right null vectors (unit length) of the matrix [F_x F_p; rowᵀ] at the last linearised point, by inverse
 * iteration. Meaningful at (or near) a branch point, where F_x and F_p together have rank n - 1: the left one is phi
 * with phiᵀ [F_x F_p] = 0 (n entries), the right one the direction across `row` with [F_x F_p] v = 0.
 */
export function nullVectors(frame: Frame, row: Float64Array): { left: Float64Array; right: Float64Array } | null {
  const { n, bordered } = frame
  factorWith(frame, row)
  liftZeroPivots(bordered, 1e-15, 1)
  const right = new Float64Array(n + 1)
  for (let i = 0; i <= n; i++) right[i] = 1 + 0.1 * i
  const left = new Float64Array(n + 1)
  for (let pass = 0; pass < 4; pass++) {
    left.set(right)
    solveLuTransposed(bordered, left)
    if (!normalise(left)) return null
    right.set(left)
    solveLu(bordered, right)
    if (!normalise(right)) return null
  }
  left[n] = 0
  return normalise(left) ? { left: left.slice(0, n), right } : null
}

/** Scales to unit length in place; false where that is impossible. */
export function normalise(v: Float64Array): boolean {
  const size = Math.sqrt(dot(v, v))
  if (!(size > 0 && Number.isFinite(size))) return false
  for (let i = 0; i < v.length; i++) v[i] = (v[i] as number) / size
  return true
}

/** Point at the share s in [0, 1] between two samples on the cubic through both with their tangents. */
export function between(a: Sample, b: Sample, s: number): Float64Array {
  const length = distance(a.z, b.z)
  const h00 = (1 + 2 * s) * (1 - s) * (1 - s)
  const h10 = s * (1 - s) * (1 - s) * length
  const h01 = s * s * (3 - 2 * s)
  const h11 = s * s * (s - 1) * length
  return a.z.map(
    (value, i) => h00 * value + h10 * (a.t[i] as number) + h01 * (b.z[i] as number) + h11 * (b.t[i] as number),
  )
}

/** The sample on the branch at the share s between two neighbours, in the plane across their chord. */
export function sampleBetween(frame: Frame, a: Sample, b: Sample, s: number): Sample | null {
  const z = between(a, b, s)
  const chord = b.z.map((value, i) => value - (a.z[i] as number))
  if (!normalise(chord)) return null
  if (!correct(frame, z, chord).ok) return null
  const sample = sampleAt(frame, z, chord)
  // stay between the neighbours: a point far off belongs to another branch
  if (!sample || distance(z, between(a, b, s)) > 0.5 * distance(a.z, b.z)) return null
  return sample
}

/** True where z lies beside the chord from a to b, ends included. */
export function isBetween(z: Float64Array, a: Sample, b: Sample): boolean {
  let along = 0
  let length = 0
  for (let i = 0; i < z.length; i++) {
    const chord = (b.z[i] as number) - (a.z[i] as number)
    along += ((z[i] as number) - (a.z[i] as number)) * chord
    length += chord * chord
  }
  return along >= -1e-6 * length && along <= (1 + 1e-6) * length
}
