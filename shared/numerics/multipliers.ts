/**
 * Floquet multipliers of a cycle from the reduced matrices of collocation: (P + mu Q) v = 0 with the known trivial one,
 * mu = 1 with v = the velocity at the start, taken out first. So the others are simple also at a turning point, where
 * a second multiplier passes 1 (kept in, the double one would split by the square root of the error).
 *
 * Source: Fairgrieve & Jepson 1991 (no explicit monodromy matrix); deflation by orthogonal reflections: Golub & Van Loan,
 * Matrix Computations (4th ed.), section 7.7.
 */
import { createEigen, type EigenWorkspace, eigenvalues } from './eigenvalues.ts'
import { createLu, factorInPlace, type Lu, solveLu } from './linear-solve.ts'

/** Workspace and result for n states. */
export interface Multipliers {
  readonly n: number
  /** The n - 1 nontrivial multipliers, by falling real part of 1/(s - mu); conjugate pairs stand together. */
  readonly re: Float64Array
  readonly im: Float64Array
  /** How far the trivial multiplier is from 1: the error gauge. */
  trivialError: number
  readonly p: Float64Array
  readonly q: Float64Array
  readonly v: Float64Array
  readonly lu: Lu
  readonly eigen: EigenWorkspace
  readonly reduced: Float64Array
}

export function createMultipliers(n: number): Multipliers {
  return {
    n,
    re: new Float64Array(n - 1),
    im: new Float64Array(n - 1),
    trivialError: 0,
    p: new Float64Array(n * n),
    q: new Float64Array(n * n),
    v: new Float64Array(n),
    lu: createLu(Math.max(1, n - 1)),
    eigen: createEigen(Math.max(1, n - 1)),
    reduced: new Float64Array((n - 1) * (n - 1)),
  }
}

/** Shifts tried: multipliers at -1, 0 and 1 are the ones that matter, none of them is near one of these. */
const shifts = [-0.45, 0.4, 1.7, -2.3, 0.15, 3.9]
/** Beyond this a multiplier is only known to be very large. */
const largest = 1e15

/**
 * Fills `re` and `im` from P, Q (row-major n x n) and the velocity at the start. False where they cannot be computed.
 * Absolute error about 1e-15 times the condition for multipliers up to order one; larger ones lose digits in proportion.
 */
export function computeMultipliers(
  ws: Multipliers,
  first: Float64Array,
  last: Float64Array,
  velocity: Float64Array,
): boolean {
  const { n, p, q, v, lu, reduced } = ws
  p.set(first)
  q.set(last)
  // columns: a reflection that takes the velocity to the first axis
  if (!reflector(velocity, v, n)) return false
  for (let i = 0; i < n; i++) {
    reflectRow(p, i * n, v, n)
    reflectRow(q, i * n, v, n)
  }
  // rows: a reflection that takes Q's first column to the first axis
  const column = Float64Array.from({ length: n }, (_, i) => q[i * n] as number)
  if (!reflector(column, v, n)) return false
  reflectColumns(p, v, n)
  reflectColumns(q, v, n)
  const size = n - 1
  ws.trivialError = Math.abs(trivialMultiplier(ws) - 1)
  for (const shift of shifts) {
    for (let i = 0; i < size; i++) {
      for (let j = 0; j < size; j++) {
        const at = (i + 1) * n + j + 1
        lu.lu[i * size + j] = (p[at] as number) + shift * (q[at] as number)
      }
    }
    if (!factorInPlace(lu) || lu.smallestPivot < 1e-11) continue
    const one = new Float64Array(size)
    for (let j = 0; j < size; j++) {
      for (let i = 0; i < size; i++) one[i] = q[(i + 1) * n + j + 1] as number
      solveLu(lu, one)
      for (let i = 0; i < size; i++) reduced[i * size + j] = one[i] as number
    }
    if (!eigenvalues(ws.eigen, reduced, ws.re, ws.im)) continue
    for (let i = 0; i < size; i++) invertShifted(ws, i, shift)
    return true
  }
  return false
}

/**
 * The multiplier whose vector is the velocity, to first order in what the discrete equations miss of it: with
 * P = [a b; c P2] and Q = [d e; 0 Q2] it is (-a + (b + e)(P2 + Q2)^-1 c) / d.
 */
function trivialMultiplier({ n, p, q, lu }: Multipliers): number {
  const size = n - 1
  const c = new Float64Array(size)
  for (let i = 0; i < size; i++) {
    c[i] = p[(i + 1) * n] as number
    for (let j = 0; j < size; j++) {
      const at = (i + 1) * n + j + 1
      lu.lu[i * size + j] = (p[at] as number) + (q[at] as number)
    }
  }
  let sum = -(p[0] as number)
  if (factorInPlace(lu)) {
    solveLu(lu, c)
    for (let j = 0; j < size; j++) sum += ((p[j + 1] as number) + (q[j + 1] as number)) * (c[j] as number)
  }
  return sum / (q[0] as number)
}

/** mu = s - 1/nu */
function invertShifted(ws: Multipliers, i: number, shift: number): void {
  const re = ws.re[i] as number
  const im = ws.im[i] as number
  const square = re * re + im * im
  if (square < 1 / (largest * largest)) {
    ws.re[i] = re > 0 ? -largest : largest
    ws.im[i] = 0
    return
  }
  ws.re[i] = shift - re / square
  ws.im[i] = im / square + 0
}

/** Householder vector (norm sqrt 2) that reflects x to a multiple of the first axis; false for zero or not finite. */
function reflector(x: Float64Array, v: Float64Array, n: number): boolean {
  let norm = 0
  for (let i = 0; i < n; i++) norm += (x[i] as number) ** 2
  norm = Math.sqrt(norm)
  if (!(norm > 0) || !Number.isFinite(norm)) return false
  for (let i = 0; i < n; i++) v[i] = (x[i] as number) / norm
  v[0] = (v[0] as number) + ((v[0] as number) >= 0 ? 1 : -1)
  let square = 0
  for (let i = 0; i < n; i++) square += (v[i] as number) ** 2
  const scale = Math.sqrt(2 / square)
  for (let i = 0; i < n; i++) v[i] = (v[i] as number) * scale
  return true
}

function reflectRow(a: Float64Array, at: number, v: Float64Array, n: number): void {
  let sum = 0
  for (let i = 0; i < n; i++) sum += (a[at + i] as number) * (v[i] as number)
  for (let i = 0; i < n; i++) a[at + i] = (a[at + i] as number) - sum * (v[i] as number)
}

function reflectColumns(a: Float64Array, v: Float64Array, n: number): void {
  for (let j = 0; j < n; j++) {
    let sum = 0
    for (let i = 0; i < n; i++) sum += (a[i * n + j] as number) * (v[i] as number)
    for (let i = 0; i < n; i++) a[i * n + j] = (a[i * n + j] as number) - sum * (v[i] as number)
  }
}
