/**
 * Exact products and sums of two doubles as a pair (value, error), without fused multiply-add.
 * Source: Dekker 1971; Shewchuk 1997. Exact where nothing overflows or underflows in between.
 */

const splitter = 134217729 // 2^27 + 1

/** Error of the rounded product: a*b = fl(a*b) + productError(a, b) exactly, barring over- and underflow. */
export function productError(a: number, b: number): number {
  const product = a * b
  const ta = splitter * a
  const ah = ta - (ta - a)
  const al = a - ah
  const tb = splitter * b
  const bh = tb - (tb - b)
  const bl = b - bh
  return al * bl - (product - ah * bh - al * bh - ah * bl)
}

/** Error of the rounded sum: a+b = fl(a+b) + sumError(a, b) exactly. */
export function sumError(a: number, b: number): number {
  const sum = a + b
  const t = sum - a
  return a - (sum - t) + (b - t)
}

/** a*b + c*d with an error of about one rounding of the result, however much cancels (Kahan's device). */
export function sumOfProducts(a: number, b: number, c: number, d: number): number {
  const first = a * b
  const second = c * d
  const sum = first + second
  if (!Number.isFinite(sum)) return sum
  const corrected = sum + (productError(a, b) + productError(c, d) + sumError(first, second))
  return Number.isNaN(corrected) ? sum : corrected
}

/** Dot product of n entries as if computed in twice the working precision. Source: Ogita, Rump & Oishi 2005 (Dot2). */
export function accurateDot(a: Float64Array, aAt: number, b: Float64Array, bAt: number, n: number): number {
  let sum = 0
  let error = 0
  for (let i = 0; i < n; i++) {
    const x = a[aAt + i] as number
    const y = b[bAt + i] as number
    const product = x * y
    const next = sum + product
    error += sumError(sum, product) + productError(x, y)
    sum = next
  }
  return sum + error
}
