/**
 * Right and left eigenvector of one eigenvalue by inverse iteration, and polishing of an eigenvalue with them.
 *
 * Conventions: A q = λ q, Aᵀ p = conj(λ) p (that is pᴴ A = λ pᴴ), <q,q> = 1, <p,q> = 1 with <u,v> = Σ conj(u_j) v_j, so
 * that for λ = iω: A q = iω q and Aᵀ p = -iω p. The free phase of q is fixed by making its largest component real and
 * positive. Source: Golub & Van Loan, Matrix Computations (4th ed.), sections 7.2.2 and 7.6.1.
 */

import { type Complex, complexNorm, innerProduct, scaleVector } from './complex.ts'
import {
  type ComplexLu,
  createComplexLu,
  factorShifted,
  liftZeroComplexPivots,
  solveComplexLu,
  solveComplexLuAdjoint,
} from './complex-solve.ts'
import { productError, sumError } from './two-product.ts'

/** Workspace and result: after `eigenvectors` q = (qRe, qIm) and p = (pRe, pIm). */
export interface EigenvectorWorkspace {
  readonly n: number
  readonly lu: ComplexLu
  readonly qRe: Float64Array
  readonly qIm: Float64Array
  readonly pRe: Float64Array
  readonly pIm: Float64Array
}

/** Makes a workspace for n x n matrices. */
export function createEigenvectors(n: number): EigenvectorWorkspace {
  return {
    n,
    lu: createComplexLu(n),
    qRe: new Float64Array(n),
    qIm: new Float64Array(n),
    pRe: new Float64Array(n),
    pIm: new Float64Array(n),
  }
}

/**
 * Right and left eigenvector of the eigenvalue of `a` (row-major n x n, untouched) nearest to re + i im.
 * Returns the condition number ‖p‖‖q‖ >= 1 of that eigenvalue (how much faster than the matrix it moves), or null
 * where the pair cannot be told apart from a defective one (condition above 1e12) or the matrix is not finite.
 * Relative accuracy of the vectors: a few roundings times the reciprocal of the gap to the next eigenvalue.
 */
export function eigenvectors(ws: EigenvectorWorkspace, a: Float64Array, re: number, im: number): number | null {
  const { n, lu, qRe, qIm, pRe, pIm } = ws
  factorShifted(lu, a, re, im)
  let norm = Math.abs(re) + Math.abs(im)
  for (let i = 0; i < n * n; i++) norm = Math.max(norm, Math.abs(a[i] as number))
  if (!Number.isFinite(norm)) return null
  liftZeroComplexPivots(lu, 2 ** -52, norm > 0 ? norm * 2 ** -52 : 1)
  // Start vectors with no structure of their own, real where the eigenvalue is, the same in every run.
  for (let j = 0; j < n; j++) {
    qRe[j] = 1 + 0.5 * Math.sin(1.7 * j + 1)
    qIm[j] = im === 0 ? 0 : 0.5 * Math.cos(2.3 * j + 1)
    pRe[j] = qRe[j] as number
    pIm[j] = -(qIm[j] as number)
  }
  for (let pass = 0; pass < 4; pass++) {
    solveComplexLu(lu, qRe, qIm)
    solveComplexLuAdjoint(lu, pRe, pIm)
    if (!normalise(qRe, qIm, n) || !normalise(pRe, pIm, n)) return null
  }
  fixPhase(qRe, qIm, n)
  const product = innerProduct(pRe, pIm, qRe, qIm, n)
  const size = product.re * product.re + product.im * product.im
  if (!(size > 1e-24)) return null
  scaleVector(pRe, pIm, product.re / size, product.im / size, n)
  return 1 / Math.sqrt(size)
}

/** Scales to unit norm; false where that is impossible. Very large vectors (exactly singular systems) are common. */
function normalise(vr: Float64Array, vi: Float64Array, n: number): boolean {
  const norm = complexNorm(vr, vi, n)
  if (!(norm > 0) || !Number.isFinite(norm)) return false
  for (let j = 0; j < n; j++) {
    vr[j] = (vr[j] as number) / norm
    vi[j] = (vi[j] as number) / norm
  }
  return true
}

function fixPhase(vr: Float64Array, vi: Float64Array, n: number): void {
  let best = 0
  let index = 0
  for (let j = 0; j < n; j++) {
    // A margin, so that rounding does not choose between components of equal size.
    const size = Math.hypot(vr[j] as number, vi[j] as number)
    if (size > 1.0001 * best) {
      best = size
      index = j
    }
  }
  scaleVector(vr, vi, (vr[index] as number) / best, -(vi[index] as number) / best, n)
  vi[index] = 0
  normalise(vr, vi, n)
}

/**
 * Polishes an eigenvalue by the two-sided Rayleigh quotient λ + <p, A q - λ q>, the residual computed in twice the
 * working precision. In a graded matrix (rates from 1e-6 to 1e6) this gives small eigenvalues to their own relative
 * accuracy where QR gives them to the accuracy of the largest. Leaves the vectors in `ws`; returns null where there is
 * no well-conditioned simple eigenvalue within `reach` of the start.
 */
export function refineEigenvalue(
  ws: EigenvectorWorkspace,
  a: Float64Array,
  start: Complex,
  reach: number,
): (Complex & { condition: number }) | null {
  let { re, im } = start
  let condition = 1
  for (let pass = 0; pass < 2; pass++) {
    const found = eigenvectors(ws, a, re, im)
    if (found === null) return null
    condition = found
    const step = rayleighStep(ws, a, re, im)
    re += step.re
    im += start.im === 0 ? 0 : step.im
  }
  if (!(Math.hypot(re - start.re, im - start.im) <= reach)) return null
  return { re, im, condition }
}

/** <p, A q - λ q> with the residual of each row in twice the working precision. */
function rayleighStep(ws: EigenvectorWorkspace, a: Float64Array, re: number, im: number): Complex {
  const { n, qRe, qIm, pRe, pIm } = ws
  let stepRe = 0
  let stepIm = 0
  for (let i = 0; i < n; i++) {
    let sr = 0
    let si = 0
    let er = 0
    let ei = 0
    const addRe = (x: number, y: number): void => {
      const product = x * y
      er += sumError(sr, product) + productError(x, y)
      sr += product
    }
    const addIm = (x: number, y: number): void => {
      const product = x * y
      ei += sumError(si, product) + productError(x, y)
      si += product
    }
    for (let j = 0; j < n; j++) {
      addRe(a[i * n + j] as number, qRe[j] as number)
      addIm(a[i * n + j] as number, qIm[j] as number)
    }
    addRe(-re, qRe[i] as number)
    addRe(im, qIm[i] as number)
    addIm(-re, qIm[i] as number)
    addIm(-im, qRe[i] as number)
    const rr = sr + er
    const ri = si + ei
    stepRe += (pRe[i] as number) * rr + (pIm[i] as number) * ri
    stepIm += (pRe[i] as number) * ri - (pIm[i] as number) * rr
  }
  return { re: stepRe, im: stepIm }
}
