/**
 * exprel(x) = (e^x - 1)/x and bernoulli(z) = z/(e^z - 1) over intervals, with their derivatives. Same conventions as
 * interval.ts.
 *
 * Every derivative of exprel is the integral of t^k e^(xt) over 0 <= t <= 1: positive and increasing. bernoulli is
 * decreasing and convex. Its derivatives k >= 2 are cosine or sine transforms of the positive density
 * pi t^k / sinh²(pi t), so they are bounded by M_k = 2 k! zeta(k)/(2 pi)^k for every real z (at z = 0 this is |B_k|);
 * together with the value at the midpoint and M_(k+1) that gives tight enclosures over short intervals.
 */

import {
  boundedBernoulli,
  boundedExp,
  boundedExpm1,
  boundedExprel,
  errorBound,
  unitRoundoff,
} from './bounded-functions.ts'
import { above, below } from './interval.ts'
import { decayPolynomials, evenCoefficients, factorials } from './smooth-quotients.ts'

const u = unitRoundoff

/** A value and a bound of its absolute error, written by the functions below. */
let value = 0
let error = 0

/** The `k`-th derivative of exprel. */
export function exprelInterval(lo: Float64Array, hi: Float64Array, r: number, x: number, k: number): void {
  const [a, b] = [lo[x] as number, hi[x] as number]
  exprelAt(a, k)
  const low = Number.isFinite(value) && Number.isFinite(error) ? Math.max(0, below(value - error)) : 0
  exprelAt(b, k)
  const high = above(value + error)
  lo[r] = low
  hi[r] = Number.isNaN(high) ? Number.POSITIVE_INFINITY : high
}

/** Within |x| <= 3 by series of positive terms (200u), beyond by recurrence with its error carried along. */
function exprelAt(x: number, k: number): void {
  if (x === Number.NEGATIVE_INFINITY) {
    value = 0
    error = 0
    return
  }
  if (k === 0) {
    value = boundedExprel(x)
    error = Math.abs(value) * errorBound.exprel
    return
  }
  if (Math.abs(x) > 3) {
    const top = boundedExp(x)
    value = boundedExpm1(x) / x
    error = Math.abs(value) * errorBound.exprel
    for (let i = 1; i <= k; i++) {
      const term = top / (factorials[i] as number)
      const difference = term - value
      error = ((errorBound.exp + 2 * u) * term + error + u * Math.abs(difference)) / Math.abs(x)
      value = difference / x
      error = 1.01 * (error + 2 * u * Math.abs(value))
    }
    const factor = factorials[k] as number
    value *= factor
    error = 1.01 * error * factor + 4 * u * Math.abs(value)
    return
  }
  const size = Math.abs(x)
  let term = 1 / (k + 1)
  let sum = term
  for (let j = 1; j < 60; j++) {
    // x >= 0: sum of x^j/(j! (k+j+1)); x < 0: e^x times the sum of |x|^j k!/(k+1+j)!.
    term *= x >= 0 ? (size * (k + j)) / (j * (k + j + 1)) : size / (k + j + 1)
    sum += term
    if (term < 1e-18 * sum) break
  }
  value = x < 0 ? sum * boundedExp(x) : sum
  error = 200 * u * value
}

/** The `k`-th derivative of bernoulli. */
export function bernoulliInterval(lo: Float64Array, hi: Float64Array, r: number, x: number, k: number): void {
  const [a, b] = [lo[x] as number, hi[x] as number]
  if (k === 0) {
    const low = b > 700 ? 0 : boundedBernoulli(b) * (1 - errorBound.bernoulli)
    const v = boundedBernoulli(a)
    hi[r] = above(v * (1 + errorBound.bernoulli) + (v < 1e-300 ? 1e-320 : 0))
    lo[r] = Math.max(0, below(low))
    return
  }
  if (k === 1) {
    slopeAt(a)
    const low = Math.max(-1, below(value - error))
    slopeAt(b)
    hi[r] = Math.min(0, above(value + error))
    lo[r] = low
    return
  }
  const bound = derivativeBound(k)
  if (!(b - a < 1)) {
    lo[r] = k === 2 ? 0 : -bound
    hi[r] = bound
    return
  }
  const middle = a + (b - a) / 2
  const radius = above(Math.max(middle - a, b - middle))
  higherAt(middle, k)
  const slack = above(above(radius * derivativeBound(k + 1)) + error)
  lo[r] = Math.max(k === 2 ? 0 : -bound, below(value - slack))
  hi[r] = Math.min(bound, above(value + slack))
}

/** An upper bound for M_k = 2 k! zeta(k)/(2 pi)^k, k >= 2; zeta(k) <= 1 + 2^-k (k+1)/(k-1). */
function derivativeBound(k: number): number {
  let bound = 2 * (1 + 2 ** -k * ((k + 1) / (k - 1)))
  for (let i = 1; i <= k; i++) bound *= i / 6.283185307179586
  return bound * (1 + 1e-14)
}

/** First derivative: odd about -1/2. Below 2.5 by the series (absolute error 10u), beyond as w (1 - z (1 + w)), w = 1/(e^z - 1). */
function slopeAt(z: number): void {
  const size = Math.abs(z)
  if (size < 2.5) {
    const square = size * size
    let sum = 0
    for (let j = size < 0.3 ? 13 : size < 1 ? 23 : 44; j >= 1; j--) {
      sum = sum * square + 2 * j * (evenCoefficients[j] as number)
    }
    value = -0.5 + z * sum
    error = errorBound.bernoulliSlopeNear
    return
  }
  if (size > 700) {
    value = 0
    error = 1e-290
  } else {
    const w = 1 / boundedExpm1(size)
    value = w * (1 - size * (1 + w))
    error = Math.abs(value) * errorBound.bernoulliSlopeFar
  }
  if (z > 0) return
  value = -1 - value
  error += 2 * u
}

/** Derivatives from the second on at one point, with an error bound from the sum of the terms' sizes. */
function higherAt(z: number, k: number): void {
  const size = Math.abs(z)
  let sizes = 0
  let sum = 0
  if (size < 2.5) {
    const square = size * size
    for (let j = 44; 2 * j >= k; j--) {
      let factor = 1
      for (let i = 0; i < k; i++) factor *= 2 * j - i
      const term = (evenCoefficients[j] as number) * factor
      sum = sum * square + term
      sizes = sizes * square + Math.abs(term)
    }
    if (k % 2 === 1) {
      sum *= size
      sizes *= size
    }
    error = 400 * u * sizes
  } else if (size > 700) {
    error = 1e-280
  } else {
    const w = 1 / boundedExpm1(size)
    const polynomial = (order: number): number => {
      const p = decayPolynomials[order] as number[]
      let total = 0
      for (let i = p.length - 1; i >= 0; i--) total = total * w + (p[i] as number)
      return total
    }
    const [head, tail] = [size * polynomial(k), k * polynomial(k - 1)]
    sum = k % 2 === 0 ? head - tail : tail - head
    error = 250 * u * (head + tail)
  }
  value = z < 0 && k % 2 === 1 ? -sum : sum
}
