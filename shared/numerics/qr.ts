/**
 * Householder QR with column pivoting for small dense systems: null vectors of n x (n+1) matrices (tangents of solution
 * branches), minimum-norm solutions, rank and null space.
 *
 * All work on the transpose: Bᵀ P = Q R for a `rows` x `cols` matrix B with rows <= cols; the last columns of Q span the
 * null space of B. Source: Golub & Van Loan, Matrix Computations (4th ed.), sections 5.2, 5.4.2 and 5.6.
 */

/** Workspace for a rows x cols matrix, rows <= cols. */
export interface Qr {
  readonly rows: number
  readonly cols: number
  /** Column k holds the Householder vector of step k from entry k down (unit norm scaled so that H = 1 - 2 v vᵀ). */
  readonly v: Float64Array
  /** R (rows x rows, upper triangular, row-major). */
  readonly r: Float64Array
  /** `order[k]` is the row of B that was taken in step k. */
  readonly order: Int32Array
  readonly work: Float64Array
  /** Number of diagonal entries of R above `tolerance` times the first. */
  rank: number
  /** |last diagonal of R| / |first|: a cheap estimate of smallest over largest singular value. */
  ratio: number
  /** Sign of det [B; tᵀ] with t the null vector as `nullVector` returns it, for rows = cols - 1. */
  sign: number
}

/** Makes a workspace for `rows` x `cols` matrices, rows <= cols. */
export function createQr(rows: number, cols: number): Qr {
  return {
    rows,
    cols,
    v: new Float64Array(rows * cols),
    r: new Float64Array(rows * rows),
    order: new Int32Array(rows),
    work: new Float64Array(cols),
    rank: 0,
    ratio: 0,
    sign: 1,
  }
}

/**
 * Factors the row-major `rows` x `cols` matrix `b` (untouched). `tolerance` is relative to the largest pivot.
 * Returns the rank; 0 where a value is not finite.
 */
export function factorQr(ws: Qr, b: Float64Array, tolerance = 1e-12): number {
  const { rows, cols, v, r, order } = ws
  // v row i = row i of B, that is column i of Bᵀ; rows are exchanged instead of columns.
  for (let i = 0; i < rows * cols; i++) {
    const value = b[i] as number
    if (!Number.isFinite(value)) {
      ws.rank = 0
      ws.ratio = 0
      return 0
    }
    v[i] = value
  }
  r.fill(0)
  for (let i = 0; i < rows; i++) order[i] = i
  let parity = 1
  let first = 0
  ws.rank = 0
  ws.ratio = rows === 0 ? 1 : 0
  for (let k = 0; k < rows; k++) {
    let best = -1
    let row = k
    for (let i = k; i < rows; i++) {
      const norm = tailNorm(v, i * cols, k, cols)
      if (norm > best * (1 + 1e-9)) {
        best = norm
        row = i
      }
    }
    if (row !== k) {
      parity = -parity
      for (let j = 0; j < cols; j++) swap(v, k * cols + j, row * cols + j)
      for (let j = 0; j < k; j++) swap(r, j * rows + k, j * rows + row)
      const t = order[k] as number
      order[k] = order[row] as number
      order[row] = t
    }
    if (k === 0) first = best
    ws.ratio = first > 0 ? best / first : 0
    if (best > tolerance * first) ws.rank = k + 1
    const head = v[k * cols + k] as number
    const alpha = head > 0 ? -best : best
    r[k * rows + k] = alpha
    if (alpha !== 0) parity = alpha < 0 ? -parity : parity
    if (best === 0) {
      for (let j = k; j < cols; j++) v[k * cols + j] = 0
      continue
    }
    parity = -parity // each reflection has determinant -1
    // The unit vector plus or minus e_k; dividing first keeps subnormal rows right.
    for (let j = k; j < cols; j++) v[k * cols + j] = (v[k * cols + j] as number) / best
    v[k * cols + k] = (v[k * cols + k] as number) - alpha / best
    const norm = tailNorm(v, k * cols, k, cols)
    for (let j = k; j < cols; j++) v[k * cols + j] = (v[k * cols + j] as number) / norm
    for (let i = k + 1; i < rows; i++) {
      let dot = 0
      for (let j = k; j < cols; j++) dot += (v[k * cols + j] as number) * (v[i * cols + j] as number)
      for (let j = k; j < cols; j++) {
        v[i * cols + j] = (v[i * cols + j] as number) - 2 * dot * (v[k * cols + j] as number)
      }
      r[k * rows + i] = v[i * cols + k] as number
    }
  }
  ws.sign = parity
  return ws.rank
}

function tailNorm(v: Float64Array, at: number, from: number, to: number): number {
  let largest = 0
  for (let j = from; j < to; j++) largest = Math.max(largest, Math.abs(v[at + j] as number))
  if (largest === 0) return 0
  let sum = 0
  for (let j = from; j < to; j++) sum += ((v[at + j] as number) / largest) ** 2
  return largest * Math.sqrt(sum)
}

function swap(a: Float64Array, i: number, j: number): void {
  const t = a[i] as number
  a[i] = a[j] as number
  a[j] = t
}

/** out = Q out, for a vector of `cols` entries. */
function applyQ(ws: Qr, out: Float64Array): void {
  const { rows, cols, v } = ws
  for (let k = rows - 1; k >= 0; k--) {
    let dot = 0
    for (let j = k; j < cols; j++) dot += (v[k * cols + j] as number) * (out[j] as number)
    if (dot === 0) continue
    for (let j = k; j < cols; j++) out[j] = (out[j] as number) - 2 * dot * (v[k * cols + j] as number)
  }
}

/**
 * Unit null vector t of the factored matrix with one row less than columns, oriented so that det [B; tᵀ] > 0; this
 * orientation is continuous along a regular branch and turns at a fold in the parameter's component only.
 */
export function nullVector(ws: Qr, out: Float64Array): void {
  nullSpaceVector(ws, ws.cols - 1, out)
  if (ws.sign < 0) for (let j = 0; j < ws.cols; j++) out[j] = -(out[j] as number)
}

/** Column `k` of Q (k from the rank up to cols - 1: an orthonormal basis of the null space). */
export function nullSpaceVector(ws: Qr, k: number, out: Float64Array): void {
  out.fill(0, 0, ws.cols)
  out[k] = 1
  applyQ(ws, out)
}

/**
 * Minimum-norm solution of B x = b into `out` (cols entries; b has `rows`). Directions beyond the rank are left out:
 * with full rank the system is solved exactly, else in the sense of the rows that were taken first.
 */
export function minimumNormSolve(ws: Qr, b: Float64Array, out: Float64Array): void {
  const { rows, cols, r, order, rank, work } = ws
  // B = Pᵀ Rᵀ Qᵀ: solve Rᵀ y = P b by forward substitution, then x = Q y.
  for (let k = 0; k < rank; k++) {
    let sum = b[order[k] as number] as number
    for (let j = 0; j < k; j++) sum -= (r[j * rows + k] as number) * (work[j] as number)
    work[k] = sum / (r[k * rows + k] as number)
  }
  out.fill(0, 0, cols)
  for (let k = 0; k < rank; k++) out[k] = work[k] as number
  applyQ(ws, out)
}
