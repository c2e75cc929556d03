/**
 * Eigenvalues of small dense real matrices: balancing, Hessenberg form, double-shift QR; closed form for n = 2.
 *
 * Backward stable: each result is an exact eigenvalue of a matrix that differs from the balanced one by a few roundings
 * of its norm. Small eigenvalues of strongly graded matrices (rates from 1e-6 to 1e6) are then polished one by one, see
 * eigenvectors.ts. Sources: Parlett & Reinsch 1969 (balancing); Golub & Van Loan, Matrix Computations (4th ed.),
 * section 7.5 (Francis step); Ahues & Tisseur 1997 (deflation test).
 */

import { createEigenvectors, type EigenvectorWorkspace, refineEigenvalue } from './eigenvectors.ts'
import { francisStep } from './francis-step.ts'
import { sumOfProducts } from './two-product.ts'

const epsilon = 2 ** -52
const tiny = 2 ** -1022 / epsilon

/** Workspace for n x n matrices, reused without allocation. */
export interface EigenWorkspace {
  readonly n: number
  /** The matrix while it is reduced. */
  readonly h: Float64Array
  readonly order: Int32Array
  readonly weight: Float64Array
  readonly copy: Float64Array
  readonly vectors: EigenvectorWorkspace
}

/** Makes a workspace for n x n matrices. */
export function createEigen(n: number): EigenWorkspace {
  return {
    n,
    h: new Float64Array(n * n),
    order: new Int32Array(n),
    weight: new Float64Array(n),
    copy: new Float64Array(n * n),
    vectors: createEigenvectors(n),
  }
}

/**
 * All eigenvalues of the row-major n x n matrix `a` (left untouched) into `re` and `im`, sorted by falling real part;
 * conjugate pairs stand together, positive imaginary part first, with exactly equal real parts.
 * Returns false where the matrix is not finite or the iteration does not converge (never seen up to n = 60); the
 * entries that were not found are NaN then.
 */
export function eigenvalues(ws: EigenWorkspace, a: Float64Array, re: Float64Array, im: Float64Array): boolean {
  const { n, h } = ws
  for (let i = 0; i < n * n; i++) {
    const value = a[i] as number
    if (!Number.isFinite(value)) {
      re.fill(Number.NaN, 0, n)
      im.fill(Number.NaN, 0, n)
      return false
    }
    h[i] = value
  }
  if (n === 1) {
    re[0] = h[0] as number
    im[0] = 0
    return true
  }
  if (n === 2) {
    eigenvaluesOfTwo(h[0] as number, h[1] as number, h[2] as number, h[3] as number, re, im, 0)
    sortEigenvalues(re, im, 2)
    return true
  }
  balance(h, n)
  sortByGrade(ws)
  reduceToHessenberg(h, n)
  const norm = largestEntry(h)
  const converged = iterate(h, n, re, im)
  if (converged) polishSmall(ws, a, re, im, norm)
  sortEigenvalues(re, im, n)
  return converged
}

/**
 * Eigenvalues of [[a, b], [c, d]] into re/im at `at` and `at + 1`, accurate to a few roundings each also where trace or
 * determinant cancel: the discriminant and the determinant are computed with exact products.
 */
export function eigenvaluesOfTwo(
  a: number,
  b: number,
  c: number,
  d: number,
  re: Float64Array,
  im: Float64Array,
  at: number,
): void {
  const largest = Math.max(Math.abs(a), Math.abs(b), Math.abs(c), Math.abs(d))
  // A power of two as unit keeps the products in range and changes no digit.
  const unit = largest > 1e140 || (largest < 1e-140 && largest > 0) ? 2 ** Math.floor(Math.log2(largest)) : 1
  const [sa, sb, sc, sd] = [a / unit, b / unit, c / unit, d / unit]
  const middle = sa / 2 + sd / 2
  const half = sa / 2 - sd / 2
  const discriminant = sumOfProducts(half, half, sb, sc)
  if (discriminant < 0) {
    const root = Math.sqrt(-discriminant)
    re[at] = middle * unit
    re[at + 1] = middle * unit
    im[at] = root * unit
    im[at + 1] = -root * unit
    return
  }
  const root = Math.sqrt(discriminant)
  const large = middle >= 0 ? middle + root : middle - root
  // The product of both is the determinant: no cancellation in the smaller one.
  const small = large === 0 ? 0 : sumOfProducts(sa, sd, -sb, sc) / large
  re[at] = large * unit
  re[at + 1] = small * unit
  im[at] = 0
  im[at + 1] = 0
}

/** Scales rows and columns by powers of two until their norms agree within a factor two. */
export function balance(h: Float64Array, n: number): void {
  for (let pass = 0, changed = true; changed && pass < 60; pass++) {
    changed = false
    for (let i = 0; i < n; i++) {
      let column = 0
      let row = 0
      for (let j = 0; j < n; j++) {
        if (j === i) continue
        column += Math.abs(h[j * n + i] as number)
        row += Math.abs(h[i * n + j] as number)
      }
      if (column === 0 || row === 0) continue
      // The best factor is sqrt(row / column); rounded to a power of two it changes no digit.
      const factor = 2 ** Math.round(Math.log2(row / column) / 2)
      if (factor === 1 || !(factor > 0) || factor === Number.POSITIVE_INFINITY) continue
      if (column * factor + row / factor >= 0.95 * (column + row)) continue
      changed = true
      for (let j = 0; j < n; j++) h[i * n + j] = (h[i * n + j] as number) / factor
      for (let j = 0; j < n; j++) h[j * n + i] = (h[j * n + i] as number) * factor
    }
  }
}

/**
 * Renumbers the balanced matrix so that its largest rows and columns come first. Householder and QR steps mix large
 * rows into small ones otherwise, and the small eigenvalues of a stiff model drown in the rounding of the large ones.
 */
function sortByGrade(ws: EigenWorkspace): void {
  const { n, h, order, weight, copy } = ws
  for (let i = 0; i < n; i++) {
    let sum = 0
    for (let j = 0; j < n; j++) sum += Math.abs(h[i * n + j] as number) + Math.abs(h[j * n + i] as number)
    weight[i] = sum
    order[i] = i
  }
  let moved = false
  for (let i = 1; i < n; i++) {
    const index = order[i] as number
    const w = weight[index] as number
    let k = i
    while (k > 0 && (weight[order[k - 1] as number] as number) < 0.25 * w) {
      order[k] = order[k - 1] as number
      k--
      moved = true
    }
    order[k] = index
  }
  if (!moved) return
  copy.set(h)
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) h[i * n + j] = copy[(order[i] as number) * n + (order[j] as number)] as number
  }
}

/** Householder reduction to upper Hessenberg form in place; what lies below the first subdiagonal is set to zero. */
export function reduceToHessenberg(h: Float64Array, n: number): void {
  const v = new Float64Array(n)
  for (let k = 0; k < n - 2; k++) {
    let scale = 0
    for (let i = k + 2; i < n; i++) scale = Math.max(scale, Math.abs(h[i * n + k] as number))
    if (scale === 0) continue
    scale = Math.max(scale, Math.abs(h[(k + 1) * n + k] as number))
    let sum = 0
    for (let i = k + 1; i < n; i++) {
      const value = (h[i * n + k] as number) / scale
      v[i] = value
      sum += value * value
    }
    const head = v[k + 1] as number
    const norm = head >= 0 ? -Math.sqrt(sum) : Math.sqrt(sum)
    v[k + 1] = head - norm
    const beta = 1 / (sum - head * norm)
    for (let j = k + 1; j < n; j++) {
      let dot = 0
      for (let i = k + 1; i < n; i++) dot += (v[i] as number) * (h[i * n + j] as number)
      dot *= beta
      for (let i = k + 1; i < n; i++) h[i * n + j] = (h[i * n + j] as number) - dot * (v[i] as number)
    }
    for (let i = 0; i < n; i++) {
      let dot = 0
      for (let j = k + 1; j < n; j++) dot += (v[j] as number) * (h[i * n + j] as number)
      dot *= beta
      for (let j = k + 1; j < n; j++) h[i * n + j] = (h[i * n + j] as number) - dot * (v[j] as number)
    }
    h[(k + 1) * n + k] = norm * scale
    for (let i = k + 2; i < n; i++) h[i * n + k] = 0
  }
}

/** Row from which the active block ending at `last` can be treated alone. */
function deflate(h: Float64Array, n: number, last: number): number {
  let k = last
  for (; k > 0; k--) {
    const sub = Math.abs(h[k * n + k - 1] as number)
    if (sub <= tiny) break
    const above = h[(k - 1) * n + k - 1] as number
    const here = h[k * n + k] as number
    let size = Math.abs(above) + Math.abs(here)
    if (size === 0) {
      if (k >= 2) size += Math.abs(h[(k - 1) * n + k - 2] as number)
      if (k + 1 <= last) size += Math.abs(h[(k + 1) * n + k] as number)
    }
    if (sub > epsilon * size) continue
    const sup = Math.abs(h[(k - 1) * n + k] as number)
    const difference = Math.abs(above - here)
    const ab = Math.max(sub, sup)
    const ba = Math.min(sub, sup)
    const aa = Math.max(Math.abs(here), difference)
    const bb = Math.min(Math.abs(here), difference)
    const s = aa + ab
    if (ba * (ab / s) <= Math.max(tiny, epsilon * (bb * (aa / s)))) break
  }
  return k
}

/** Double-shift QR on the Hessenberg matrix `h` (destroyed), active block only. */
function iterate(h: Float64Array, n: number, re: Float64Array, im: Float64Array): boolean {
  let last = n - 1
  let tries = 0
  while (last >= 0) {
    const first = deflate(h, n, last)
    if (first > 0) h[first * n + first - 1] = 0
    if (first === last) {
      re[last] = h[last * n + last] as number
      im[last] = 0
      last--
      tries = 0
      continue
    }
    if (first === last - 1) {
      const [a, b] = [h[first * n + first] as number, h[first * n + last] as number]
      eigenvaluesOfTwo(a, b, h[last * n + first] as number, h[last * n + last] as number, re, im, first)
      last -= 2
      tries = 0
      continue
    }
    tries++
    if (tries > 300) {
      for (let i = 0; i <= last; i++) {
        re[i] = Number.NaN
        im[i] = Number.NaN
      }
      return false
    }
    francisStep(h, n, first, last, tries)
  }
  return true
}

function largestEntry(h: Float64Array): number {
  let largest = 0
  for (const value of h) largest = Math.max(largest, Math.abs(value))
  return largest
}

/**
 * QR leaves an error of a few roundings of the norm on every eigenvalue. Those four orders of magnitude smaller than
 * the largest are polished to their own accuracy; a stiff model's verdict hangs on them.
 */
function polishSmall(ws: EigenWorkspace, a: Float64Array, re: Float64Array, im: Float64Array, norm: number): void {
  const { n, vectors } = ws
  let largest = 0
  for (let i = 0; i < n; i++) largest = Math.max(largest, Math.hypot(re[i] as number, im[i] as number))
  for (let i = 0; i < n; i++) {
    const start = { re: re[i] as number, im: im[i] as number }
    if (Math.hypot(start.re, start.im) >= 1e-4 * largest) continue
    const better = refineEigenvalue(vectors, a, start, 1e3 * epsilon * norm)
    const pair = start.im !== 0
    if (better !== null && better.im > 0 === start.im > 0) {
      re[i] = better.re
      im[i] = better.im
      if (pair) {
        re[i + 1] = better.re
        im[i + 1] = -better.im
      }
    }
    if (pair) i++
  }
}

/** Falling real part, then falling |imaginary part|, then positive before negative: pairs stay together. */
function sortEigenvalues(re: Float64Array, im: Float64Array, n: number): void {
  for (let i = 1; i < n; i++) {
    const r = re[i] as number
    const m = im[i] as number
    let k = i
    while (k > 0 && comesBefore(r, m, re[k - 1] as number, im[k - 1] as number)) {
      re[k] = re[k - 1] as number
      im[k] = im[k - 1] as number
      k--
    }
    re[k] = r
    im[k] = m
  }
}

function comesBefore(r: number, m: number, r2: number, m2: number): boolean {
  if (r !== r2) return r > r2
  if (Math.abs(m) !== Math.abs(m2)) return Math.abs(m) > Math.abs(m2)
  return m > m2
}
