/**
 * Dense linear systems, real: LU factorisation with implicitly row-scaled partial pivoting in preallocated workspaces.
 *
 * Matrices are row-major Float64Array. Row scaling only chooses the pivot (each row is judged relative to its own
 * largest entry), the arithmetic is done on the unscaled rows; so a row in volts and a row in microseconds do not
 * disturb each other. Source: Golub & Van Loan, Matrix Computations (4th ed.), sections 3.4 and 3.5.
 * The complex counterpart is complex-solve.ts.
 */

/** Workspace of a factorisation. Reused without allocation; its content belongs to the last `factorLu`. */
export interface Lu {
  readonly n: number
  /** Unit lower and upper factor in one array, row-major. */
  readonly lu: Float64Array
  /** `pivots[k]` is the row that was exchanged with row k in step k. */
  readonly pivots: Int32Array
  /** Reciprocal of the largest absolute value of each row, in the order of the exchanged rows. */
  readonly scale: Float64Array
  /** Two vectors of length n for the condition estimate. */
  readonly work: Float64Array
  /** Sign of the row permutation, +1 or -1. */
  sign: number
  /** True where a pivot was exactly zero (or the matrix not finite): solves would divide by zero. */
  singular: boolean
  /** Smallest |pivot| relative to its own row's largest entry, a quick measure of nearness to singular. */
  smallestPivot: number
}

/** Makes a workspace for n x n systems. */
export function createLu(n: number): Lu {
  return {
    n,
    lu: new Float64Array(n * n),
    pivots: new Int32Array(n),
    scale: new Float64Array(n),
    work: new Float64Array(2 * n),
    sign: 1,
    singular: false,
    smallestPivot: 0,
  }
}

/**
 * Factors the row-major n x n matrix `a` (left untouched) as P A = L U. Returns false where it is exactly singular or
 * not finite; `determinant` is then 0 and solves are not allowed.
 */
export function factorLu(ws: Lu, a: Float64Array): boolean {
  const { n, lu } = ws
  for (let i = 0; i < n * n; i++) lu[i] = a[i] as number
  return factorInPlace(ws)
}

/** Factors what the caller has written into `ws.lu` itself; else as `factorLu`. */
export function factorInPlace(ws: Lu): boolean {
  const { n, lu, pivots, scale } = ws
  ws.sign = 1
  ws.singular = false
  ws.smallestPivot = Number.POSITIVE_INFINITY
  for (let i = 0; i < n; i++) {
    let largest = 0
    for (let j = 0; j < n; j++) {
      const size = Math.abs(lu[i * n + j] as number)
      if (size > largest) largest = size
      else if (Number.isNaN(size)) largest = Number.POSITIVE_INFINITY
    }
    if (largest === 0 || largest === Number.POSITIVE_INFINITY) ws.singular = true
    scale[i] = largest === 0 ? 0 : 1 / largest
  }
  for (let k = 0; k < n; k++) {
    let best = -1
    let row = k
    for (let i = k; i < n; i++) {
      const size = Math.abs(lu[i * n + k] as number) * (scale[i] as number)
      if (size > best) {
        best = size
        row = i
      }
    }
    pivots[k] = row
    if (row !== k) {
      ws.sign = -ws.sign
      for (let j = 0; j < n; j++) {
        const t = lu[k * n + j] as number
        lu[k * n + j] = lu[row * n + j] as number
        lu[row * n + j] = t
      }
      scale[row] = scale[k] as number
    }
    if (best < ws.smallestPivot) ws.smallestPivot = best
    const pivot = lu[k * n + k] as number
    if (!(Math.abs(pivot) > 0)) {
      ws.singular = true
      continue
    }
    for (let i = k + 1; i < n; i++) {
      const factor = (lu[i * n + k] as number) / pivot
      lu[i * n + k] = factor
      if (factor === 0) continue
      for (let j = k + 1; j < n; j++) lu[i * n + j] = (lu[i * n + j] as number) - factor * (lu[k * n + j] as number)
    }
  }
  if (ws.singular) ws.smallestPivot = 0
  return !ws.singular
}

/**
 * Lifts pivots that vanish to `relative` times the largest entry their row had (or to `absolute` in a row of zeros), so
 * that inverse iteration can go on with an exactly singular matrix. Source: Golub & Van Loan section 7.6.1.
 */
export function liftZeroPivots(ws: Lu, relative: number, absolute: number): void {
  const { n, lu, scale } = ws
  for (let k = 0; k < n; k++) {
    const floor = (scale[k] as number) > 0 ? relative / (scale[k] as number) : absolute
    const pivot = lu[k * n + k] as number
    if (Math.abs(pivot) < floor) lu[k * n + k] = pivot < 0 ? -floor : floor
  }
  ws.singular = false
}

/** Solves A x = b in place of `b` (n entries from `at`). */
export function solveLu(ws: Lu, b: Float64Array, at = 0): void {
  const { n, lu, pivots } = ws
  for (let k = 0; k < n; k++) {
    const row = pivots[k] as number
    if (row !== k) {
      const t = b[at + k] as number
      b[at + k] = b[at + row] as number
      b[at + row] = t
    }
  }
  for (let i = 1; i < n; i++) {
    let sum = b[at + i] as number
    for (let j = 0; j < i; j++) sum -= (lu[i * n + j] as number) * (b[at + j] as number)
    b[at + i] = sum
  }
  for (let i = n - 1; i >= 0; i--) {
    let sum = b[at + i] as number
    for (let j = i + 1; j < n; j++) sum -= (lu[i * n + j] as number) * (b[at + j] as number)
    b[at + i] = sum / (lu[i * n + i] as number)
  }
}

/** Solves Aᵀ x = b in place of `b` (n entries from `at`). */
export function solveLuTransposed(ws: Lu, b: Float64Array, at = 0): void {
  const { n, lu, pivots } = ws
  for (let i = 0; i < n; i++) {
    let sum = b[at + i] as number
    for (let j = 0; j < i; j++) sum -= (lu[j * n + i] as number) * (b[at + j] as number)
    b[at + i] = sum / (lu[i * n + i] as number)
  }
  for (let i = n - 2; i >= 0; i--) {
    let sum = b[at + i] as number
    for (let j = i + 1; j < n; j++) sum -= (lu[j * n + i] as number) * (b[at + j] as number)
    b[at + i] = sum
  }
  for (let k = n - 1; k >= 0; k--) {
    const row = pivots[k] as number
    if (row !== k) {
      const t = b[at + k] as number
      b[at + k] = b[at + row] as number
      b[at + row] = t
    }
  }
}

/** Determinant of the factored matrix (may overflow to Infinity for large entries; its sign is always right). */
export function determinant(ws: Lu): number {
  const { n, lu } = ws
  let product = ws.sign
  for (let k = 0; k < n; k++) product *= lu[k * n + k] as number
  return product
}

/** Sign of the determinant: -1, 0 (exactly singular) or +1; immune to overflow and underflow. */
export function determinantSign(ws: Lu): number {
  const { n, lu } = ws
  let sign = ws.sign
  for (let k = 0; k < n; k++) sign *= Math.sign(lu[k * n + k] as number)
  return sign
}

/** Inverse of the factored matrix into `out`, row-major. */
export function invertLu(ws: Lu, out: Float64Array): void {
  const { n, work } = ws
  for (let j = 0; j < n; j++) {
    work.fill(0, 0, n)
    work[j] = 1
    solveLu(ws, work)
    for (let i = 0; i < n; i++) out[i * n + j] = work[i] as number
  }
}

/**
 * Estimate of the reciprocal condition number in the 1-norm, 1/(‖A‖₁ ‖A⁻¹‖₁); between the true value and, rarely more
 * than three times, above it. `norm` is ‖A‖₁ of the matrix that was factored. 0 where singular.
 * Source: Hager 1984 and Higham, Accuracy and Stability of Numerical Algorithms (2nd ed.), algorithm 15.1.
 */
export function reciprocalCondition(ws: Lu, norm: number): number {
  const { n, work } = ws
  if (ws.singular || norm === 0) return 0
  for (let i = 0; i < n; i++) work[i] = 1 / n
  let estimate = 0
  let last = -1
  for (let pass = 0; pass < 5; pass++) {
    solveLu(ws, work)
    let size = 0
    for (let i = 0; i < n; i++) size += Math.abs(work[i] as number)
    if (size <= estimate) break
    estimate = size
    for (let i = 0; i < n; i++) work[i] = (work[i] as number) < 0 ? -1 : 1
    solveLuTransposed(ws, work)
    let index = 0
    for (let i = 1; i < n; i++) if (Math.abs(work[i] as number) > Math.abs(work[index] as number)) index = i
    if (index === last) break
    last = index
    work.fill(0, 0, n)
    work[index] = 1
  }
  // Higham's second start vector catches matrices made to fool the first.
  for (let i = 0; i < n; i++) work[i] = (i % 2 === 0 ? 1 : -1) * (1 + (n > 1 ? i / (n - 1) : 0))
  solveLu(ws, work)
  let size = 0
  for (let i = 0; i < n; i++) size += Math.abs(work[i] as number)
  estimate = Math.max(estimate, (2 * size) / (3 * n))
  const result = 1 / (norm * estimate)
  return Number.isFinite(result) ? Math.min(result, 1) : 0
}

/** Largest absolute column sum of a row-major n x n matrix. */
export function norm1(a: Float64Array, n: number): number {
  let largest = 0
  for (let j = 0; j < n; j++) {
    let sum = 0
    for (let i = 0; i < n; i++) sum += Math.abs(a[i * n + j] as number)
    if (sum > largest) largest = sum
  }
  return largest
}

/**
 * Loads the bordered matrix [A b; cᵀ d] of size n+1 into `ws` (made with `createLu(n + 1)`) and factors it. Such a
 * system stays well conditioned where A itself is singular with a one-dimensional null space and b, c are not
 * orthogonal to the null vectors. Source: Govaerts, Numerical Methods for Bifurcations of Dynamical Equilibria, ch. 3.
 */
export function factorBordered(ws: Lu, a: Float64Array, b: Float64Array, c: Float64Array, d: number): boolean {
  const size = ws.n
  const n = size - 1
  const { lu } = ws
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) lu[i * size + j] = a[i * n + j] as number
    lu[i * size + n] = b[i] as number
    lu[n * size + i] = c[i] as number
  }
  lu[n * size + n] = d
  return factorInPlace(ws)
}

/** Solves one system and allocates its answer; null where A is exactly singular or not finite. */
export function solveLinear(a: Float64Array, b: Float64Array): Float64Array | null {
  const ws = createLu(b.length)
  if (!factorLu(ws, a)) return null
  const x = b.slice()
  solveLu(ws, x)
  return x
}
