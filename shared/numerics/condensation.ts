/**
 * Linear systems of periodic collocation with two free parameters and two extra rows (phase, arclength).
 *
 * Each interval brings `4 n` collocation equations in its five node values. Its three interior nodes are eliminated on
 * the spot (condensation), the interval ends one after the other; what is left is `n` equations P u(0) + Q u(1) = ...,
 * whose pencil holds the Floquet multipliers: (P + mu Q) v = 0. All eliminations exchange rows, so that neither fast
 * decay nor fast growth within the period spoils the result (no product of transition matrices is ever formed).
 *
 * Sources: Doedel, Keller & Kernevez, Int. J. Bifurcation and Chaos 1 (1991) 745-772, section 4 (condensation);
 * Fairgrieve & Jepson, SIAM J. Numer. Anal. 28 (1991) 1446-1462 (multipliers from the reduced matrices).
 */
import { degree } from './gauss-collocation.ts'
import { createLu, factorInPlace, type Lu, solveLu } from './linear-solve.ts'

/** Columns beside the unknown values: two parameters, two right-hand sides. */
const extra = 4

/** Workspace for up to `most` intervals, reused without allocation. */
export interface CondensedSystem {
  readonly n: number
  readonly most: number
  /** Rows of a block: 4 n collocation equations, then phase and arclength. */
  readonly rows: number
  /** Columns: interior nodes (3 n) | left end (n) | right end (n) | two parameters | two right-hand sides. */
  readonly cols: number
  readonly blocks: Float64Array
  /** P and Q of the last `solveCondensed`, row-major n x n. */
  readonly first: Float64Array
  readonly last: Float64Array
  /** Solutions: node values as in mesh.ts, then the two parameters, for each right-hand side. */
  readonly values: [Float64Array, Float64Array]
  readonly parameters: [Float64Array, Float64Array]
  readonly ends: Float64Array
  readonly chain: Float64Array
  readonly work: Float64Array
  readonly lu: Lu
}

/** Makes a workspace for systems of n states on up to `most` intervals. */
export function createCondensed(n: number, most: number): CondensedSystem {
  const rows = degree * n + 2
  const cols = (degree - 1) * n + 2 * n + extra
  const values = (most * degree + 1) * n
  return {
    n,
    most,
    rows,
    cols,
    blocks: new Float64Array(most * rows * cols),
    first: new Float64Array(n * n),
    last: new Float64Array(n * n),
    values: [new Float64Array(values), new Float64Array(values)],
    parameters: [new Float64Array(2), new Float64Array(2)],
    ends: new Float64Array((2 * n + 2) * (3 * n + extra)),
    chain: new Float64Array(most * n * (3 * n + extra)),
    work: new Float64Array(2 * (n + 2)),
    lu: createLu(n + 2),
  }
}

/**
 * Eliminates columns 0..count-1 of a row-major matrix, pivots from the first `candidates` rows. False where a column has
 * no pivot or an entry is not finite.
 */
function eliminate(
  a: Float64Array,
  at: number,
  rows: number,
  cols: number,
  count: number,
  candidates: number,
): boolean {
  for (let k = 0; k < count; k++) {
    let best = 0
    let row = -1
    for (let i = k; i < candidates; i++) {
      const size = Math.abs(a[at + i * cols + k] as number)
      if (size > best) {
        best = size
        row = i
      }
    }
    if (row < 0 || !(best < Number.POSITIVE_INFINITY)) return false
    const top = at + k * cols
    if (row !== k) {
      const other = at + row * cols
      for (let c = k; c < cols; c++) {
        const t = a[top + c] as number
        a[top + c] = a[other + c] as number
        a[other + c] = t
      }
    }
    const inverse = 1 / (a[top + k] as number)
    for (let i = k + 1; i < rows; i++) {
      const here = at + i * cols
      const factor = (a[here + k] as number) * inverse
      if (factor === 0) continue
      for (let c = k + 1; c < cols; c++) a[here + c] = (a[here + c] as number) - factor * (a[top + c] as number)
    }
  }
  return true
}

/** Eliminates the interior nodes of the block of interval j, which the caller has filled. */
export function condenseBlock(ws: CondensedSystem, j: number): boolean {
  const { n, rows, cols, blocks } = ws
  return eliminate(blocks, j * rows * cols, rows, cols, (degree - 1) * n, degree * n)
}

/**
 * Solves for both right-hand sides after every block of the `count` intervals was condensed. False where the whole
 * system is singular to rounding or not finite.
 */
export function solveCondensed(ws: CondensedSystem, count: number): boolean {
  const { n, rows, cols, blocks, chain, lu, work } = ws
  const inner = (degree - 1) * n
  const width = 3 * n + extra
  const a = ws.ends
  // rows 0..n-1: the chain so far; n..2n-1: the next interval; then phase and arclength
  // columns: shared end (eliminated) | u(0) | next end | parameters and right-hand sides
  a.fill(0)
  const blockRow = (j: number, i: number): number => (j * rows + inner + i) * cols + inner
  for (let i = 0; i < n + 2; i++) {
    const from = blockRow(0, i)
    const to = (i < n ? i : n + i) * width
    for (let c = 0; c < n; c++) {
      a[to + n + c] = blocks[from + c] as number
      a[to + c] = blocks[from + n + c] as number
    }
    for (let c = 0; c < extra; c++) a[to + 3 * n + c] = blocks[from + 2 * n + c] as number
  }
  for (let j = 1; j < count; j++) {
    for (let i = 0; i < n + 2; i++) {
      const from = blockRow(j, i)
      const to = (n + i) * width
      if (i < n) {
        for (let c = 0; c < n; c++) {
          a[to + c] = blocks[from + c] as number
          a[to + n + c] = 0
          a[to + 2 * n + c] = blocks[from + n + c] as number
        }
        for (let c = 0; c < extra; c++) a[to + 3 * n + c] = blocks[from + 2 * n + c] as number
      } else {
        for (let c = 0; c < n; c++) {
          a[to + c] = (a[to + c] as number) + (blocks[from + c] as number)
          a[to + 2 * n + c] = blocks[from + n + c] as number
        }
        for (let c = 0; c < extra; c++) {
          a[to + 3 * n + c] = (a[to + 3 * n + c] as number) + (blocks[from + 2 * n + c] as number)
        }
      }
    }
    if (!eliminate(a, 0, 2 * n + 2, width, n, 2 * n)) return false
    chain.set(a.subarray(0, n * width), j * n * width)
    // what is left becomes the chain: its next end moves to the shared columns
    for (let i = 0; i < n + 2; i++) {
      const from = (n + i) * width
      const to = (i < n ? i : n + i) * width
      for (let c = 0; c < n; c++) {
        a[to + c] = a[from + 2 * n + c] as number
        a[to + n + c] = a[from + n + c] as number
        a[to + 2 * n + c] = 0
      }
      for (let c = 0; c < extra; c++) a[to + 3 * n + c] = a[from + 3 * n + c] as number
    }
  }
  const size = n + 2
  for (let i = 0; i < size; i++) {
    const from = (i < n ? i : n + i) * width
    for (let c = 0; c < n; c++) {
      const atEnd = a[from + c] as number
      const atStart = a[from + n + c] as number
      if (i < n) {
        ws.first[i * n + c] = atStart
        ws.last[i * n + c] = atEnd
      }
      lu.lu[i * size + c] = atStart + atEnd
    }
    lu.lu[i * size + n] = a[from + 3 * n] as number
    lu.lu[i * size + n + 1] = a[from + 3 * n + 1] as number
    work[i] = a[from + 3 * n + 2] as number
    work[size + i] = a[from + 3 * n + 3] as number
  }
  if (!factorInPlace(lu) || !(lu.smallestPivot > 1e-17)) return false
  for (let side = 0; side < 2; side++) {
    solveLu(lu, work, side * size)
    if (!substitute(ws, count, side as 0 | 1)) return false
  }
  return true
}

/** Back substitution: interval ends from last to first, then interior nodes. */
function substitute(ws: CondensedSystem, count: number, side: 0 | 1): boolean {
  const { n, rows, cols, blocks, chain, work } = ws
  const inner = (degree - 1) * n
  const width = 3 * n + extra
  const u = ws.values[side]
  const at = side * (n + 2)
  const first = work[at + n] as number
  const second = work[at + n + 1] as number
  ws.parameters[side][0] = first
  ws.parameters[side][1] = second
  const end = count * degree * n
  for (let i = 0; i < n; i++) {
    u[i] = work[at + i] as number
    u[end + i] = work[at + i] as number
  }
  for (let j = count - 1; j >= 1; j--) {
    const here = j * degree * n
    const next = (j + 1) * degree * n
    for (let i = n - 1; i >= 0; i--) {
      const row = (j * n + i) * width
      let sum = chain[row + 3 * n + 2 + side] as number
      sum -= (chain[row + 3 * n] as number) * first + (chain[row + 3 * n + 1] as number) * second
      for (let c = 0; c < n; c++) {
        sum -= (chain[row + n + c] as number) * (u[c] as number)
        sum -= (chain[row + 2 * n + c] as number) * (u[next + c] as number)
      }
      for (let c = i + 1; c < n; c++) sum -= (chain[row + c] as number) * (u[here + c] as number)
      u[here + i] = sum / (chain[row + i] as number)
    }
  }
  let total = 0
  for (let j = 0; j < count; j++) {
    const left = j * degree * n
    const right = left + degree * n
    for (let i = inner - 1; i >= 0; i--) {
      const row = (j * rows + i) * cols
      let sum = blocks[row + inner + 2 * n + 2 + side] as number
      sum -= (blocks[row + inner + 2 * n] as number) * first + (blocks[row + inner + 2 * n + 1] as number) * second
      for (let c = 0; c < n; c++) {
        sum -= (blocks[row + inner + c] as number) * (u[left + c] as number)
        sum -= (blocks[row + inner + n + c] as number) * (u[right + c] as number)
      }
      for (let c = i + 1; c < inner; c++) sum -= (blocks[row + c] as number) * (u[left + n + c] as number)
      const value = sum / (blocks[row + i] as number)
      u[left + n + i] = value
      total += value
    }
  }
  return Number.isFinite(total + first + second)
}
