/**
 * Eigenvalues of small dense real matrices: balancing, Hessenberg form, double-shift QR; closed form for n = 2.
 *
 * Backward stable: each result is an exact eigenvalue of a matrix that differs from the balanced one by a few roundings
 * of its norm. Small eigenvalues of strongly graded matrices (rates from 1e-6 to 1e6) are then polished one by one, see
 * eigenvectors.ts. Sources: Parlett & Reinsch 1969 (balancing); Golub & Van Loan, Matrix Computations (4th ed.),
 * section 7.5 (Francis step); Ahues & Tisseur 1997 (deflation test).
 */

import { createEigenvectors, type EigenvectorWorkspace, refineEigenvalue } from './eigenvectors.ts'
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

/** One implicit double-shift sweep over rows first..last. Every tenth try uses shifts that break cycles. */
function francisStep(h: Float64Array, n: number, first: number, last: number, tries: number): void {
  let h11 = h[(last - 1) * n + last - 1] as number
  let h12 = h[(last - 1) * n + last] as number
  let h21 = h[last * n + last - 1] as number
  let h22 = h[last * n + last] as number
  if (tries % 10 === 0) {
    const bottom = tries % 20 === 0
    const corner = bottom ? last : first + 2
    const s = Math.abs(h[corner * n + corner - 1] as number) + Math.abs(h[(corner - 1) * n + corner - 2] as number)
    h11 = 0.75 * s + (h[(bottom ? last : first) * n + (bottom ? last : first)] as number)
    h12 = -0.4375 * s
    h21 = s
    h22 = h11
  }
  // The two shifts: eigenvalues of the trailing block; of a real pair the one nearer to the corner, twice.
  let r1 = 0
  let r2 = 0
  let i1 = 0
  let i2 = 0
  const unit = Math.abs(h11) + Math.abs(h12) + Math.abs(h21) + Math.abs(h22)
  if (unit > 0) {
    h11 /= unit
    h12 /= unit
    h21 /= unit
    h22 /= unit
    const middle = (h11 + h22) / 2
    const det = (h11 - middle) * (h22 - middle) - h12 * h21
    const root = Math.sqrt(Math.abs(det))
    if (det >= 0) {
      r1 = middle * unit
      r2 = r1
      i1 = root * unit
      i2 = -i1
    } else {
      r1 = (Math.abs(middle + root - h22) <= Math.abs(middle - root - h22) ? middle + root : middle - root) * unit
      r2 = r1
    }
  }
  // Start where two subdiagonals in a row are small.
  let v1 = 0
  let v2 = 0
  let v3 = 0
  let m = last - 2
  for (; m >= first; m--) {
    const hmm = h[m * n + m] as number
    const below = h[(m + 1) * n + m] as number
    const s = Math.abs(hmm - r2) + Math.abs(i2) + Math.abs(below)
    const q = below / s
    v1 = q * (h[m * n + m + 1] as number) + (hmm - r1) * ((hmm - r2) / s) - i1 * (i2 / s)
    v2 = q * (hmm + (h[(m + 1) * n + m + 1] as number) - r1 - r2)
    v3 = q * (h[(m + 2) * n + m + 1] as number)
    const sum = Math.abs(v1) + Math.abs(v2) + Math.abs(v3)
    if (sum > 0) {
      v1 /= sum
      v2 /= sum
      v3 /= sum
    }
    if (m === first) break
    const before = Math.abs(h[(m - 1) * n + m - 1] as number)
    const after = Math.abs(h[(m + 1) * n + m + 1] as number)
    const left = Math.abs(h[m * n + m - 1] as number) * (Math.abs(v2) + Math.abs(v3))
    if (left <= epsilon * Math.abs(v1) * (before + Math.abs(hmm) + after)) break
  }
  for (let k = m; k < last; k++) {
    const three = k + 2 <= last
    if (k > m) {
      v1 = h[k * n + k - 1] as number
      v2 = h[(k + 1) * n + k - 1] as number
      v3 = three ? (h[(k + 2) * n + k - 1] as number) : 0
    }
    // Householder reflection 1 - t w wᵀ with w = (1, w2, w3) that takes (v1, v2, v3) to (beta, 0, 0).
    const size = Math.max(Math.abs(v1), Math.abs(v2), Math.abs(v3))
    let t = 0
    let w2 = 0
    let w3 = 0
    let beta = v1
    if (Math.abs(v2) > 0 || Math.abs(v3) > 0) {
      const norm = size * Math.sqrt((v1 / size) ** 2 + (v2 / size) ** 2 + (v3 / size) ** 2)
      beta = v1 >= 0 ? -norm : norm
      t = (beta - v1) / beta
      w2 = v2 / (v1 - beta)
      w3 = v3 / (v1 - beta)
    }
    if (k > m) {
      h[k * n + k - 1] = beta
      h[(k + 1) * n + k - 1] = 0
      if (three) h[(k + 2) * n + k - 1] = 0
    } else if (m > first) {
      h[k * n + k - 1] = (h[k * n + k - 1] as number) * (1 - t)
    }
    if (t === 0) continue
    for (let j = k; j <= last; j++) {
      const c = three ? (h[(k + 2) * n + j] as number) : 0
      const sum = ((h[k * n + j] as number) + w2 * (h[(k + 1) * n + j] as number) + w3 * c) * t
      h[k * n + j] = (h[k * n + j] as number) - sum
      h[(k + 1) * n + j] = (h[(k + 1) * n + j] as number) - sum * w2
      if (three) h[(k + 2) * n + j] = c - sum * w3
    }
    const end = Math.min(k + 3, last)
    for (let i = first; i <= end; i++) {
      const c = three ? (h[i * n + k + 2] as number) : 0
      const sum = ((h[i * n + k] as number) + w2 * (h[i * n + k + 1] as number) + w3 * c) * t
      h[i * n + k] = (h[i * n + k] as number) - sum
      h[i * n + k + 1] = (h[i * n + k + 1] as number) - sum * w2
      if (three) h[i * n + k + 2] = c - sum * w3
    }
  }
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
