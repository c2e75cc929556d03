/** Bounds of inverse functions that have no enclosure of their own: side -1 is a lower, +1 an upper bound. */

import { above, below, quotientAbove, quotientBelow } from './interval.ts'
import { expInterval, log1pInterval, logInterval } from './interval-functions.ts'

const slo = new Float64Array(6)
const shi = new Float64Array(6)

function put(i: number, low: number, high: number): void {
  slo[i] = low
  shi[i] = high
}

/** Bound of the odd k-th root: exp(log|v|/k) with its sign, rounded down (side -1) or up (+1). */
export function oddRoot(v: number, k: number, side: -1 | 1): number {
  if (v === 0 || !Number.isFinite(v)) return v
  put(4, Math.abs(v), Math.abs(v))
  logInterval(slo, shi, 5, 4)
  put(4, quotientBelow(slo[5] as number, k), quotientAbove(shi[5] as number, k))
  expInterval(slo, shi, 5, 4)
  if (v > 0) return side < 0 ? (slo[5] as number) : (shi[5] as number)
  return side < 0 ? -(shi[5] as number) : -(slo[5] as number)
}

/** Bound of log(v + sqrt(v² + 1)), odd in v. */
export function inverseSinh(v: number, side: -1 | 1): number {
  const size = Math.abs(v)
  if (size === 0 || size > 1e150) return v === 0 ? 0 : side * Number.POSITIVE_INFINITY
  // log1p(s + s²/(1 + sqrt(1 + s²))): no cancellation.
  const square = size * size
  const inner = size + square / (1 + Math.sqrt(1 + square))
  put(4, inner * (1 - 1e-15), inner * (1 + 1e-15))
  log1pInterval(slo, shi, 5, 4)
  const outward = v > 0 === side > 0
  return Math.sign(v) * (outward ? (shi[5] as number) : (slo[5] as number))
}

/** Bound of log(v + sqrt(v² - 1)), v >= 1. */
export function inverseCosh(v: number, side: -1 | 1): number {
  if (v > 1e150) return side < 0 ? 300 : Number.POSITIVE_INFINITY
  // log1p(t + sqrt(t (t + 2))) with t = v - 1.
  const t = v - 1
  const inner = t + Math.sqrt(t * (t + 2))
  put(4, Math.max(0, inner * (1 - 2e-15)), inner * (1 + 2e-15))
  log1pInterval(slo, shi, 5, 4)
  return side < 0 ? (slo[5] as number) : (shi[5] as number)
}

/** Bound of log1p(2v/(1 - v))/2, odd in v. */
export function inverseTanh(v: number, side: -1 | 1): number {
  const size = Math.abs(v)
  if (size >= 1) return side > 0 === v > 0 ? side * Number.POSITIVE_INFINITY : Math.sign(v) * 18
  const inner = (2 * size) / (1 - size)
  put(4, inner * (1 - 1e-15), inner * (1 + 1e-15))
  log1pInterval(slo, shi, 5, 4)
  const outward = v > 0 === side > 0
  return (Math.sign(v) * (outward ? above(shi[5] as number) : below(slo[5] as number))) / 2
}

/** Bound of log(v/(1 - v)). */
export function inverseLogistic(v: number, side: -1 | 1): number {
  if (v <= 0) return side < 0 || v < 0 ? Number.NEGATIVE_INFINITY : -700
  if (v >= 1) return side > 0 || v > 1 ? Number.POSITIVE_INFINITY : 36
  const odds = v / (1 - v)
  put(4, odds * (1 - 1e-15), odds * (1 + 1e-15))
  logInterval(slo, shi, 5, 4)
  return side < 0 ? (slo[5] as number) : (shi[5] as number)
}
