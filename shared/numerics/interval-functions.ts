/**
 * Elementary functions over intervals, from the proved bounds of bounded-functions.ts. Same conventions as interval.ts:
 * register r of (lo, hi) is written, the return value says how far the function was defined over the operand.
 */

import {
  boundedAcos,
  boundedAsin,
  boundedAtan,
  boundedCircular,
  boundedCosh,
  boundedExp,
  boundedExpm1,
  boundedLog,
  boundedLog1p,
  boundedLog10,
  boundedLogistic,
  boundedSinh,
  boundedTanh,
  circularLimit,
  circularSlack,
  errorBound,
} from './bounded-functions.ts'
import {
  above,
  below,
  type Coverage,
  divInterval,
  full,
  mulInterval,
  none,
  partial,
  powerAbove,
  powerBelow,
} from './interval.ts'

const eta = 5e-324

/** Lower bound of the number that was computed as v with relative error `bound`. A computed zero of these is exact. */
function lower(v: number, bound: number): number {
  if (v === 0) return 0
  return v === Number.POSITIVE_INFINITY ? Number.MAX_VALUE : v - (Math.abs(v) * bound + eta)
}

function upper(v: number, bound: number): number {
  if (v === 0) return 0
  return v === Number.NEGATIVE_INFINITY ? -Number.MAX_VALUE : v + (Math.abs(v) * bound + eta)
}

function nowhere(lo: Float64Array, hi: Float64Array, r: number): Coverage {
  lo[r] = Number.NEGATIVE_INFINITY
  hi[r] = Number.POSITIVE_INFINITY
  return none
}

/** r = sqrt(x), rounded outward by one unit. */
export function sqrtInterval(lo: Float64Array, hi: Float64Array, r: number, x: number): Coverage {
  const a = lo[x] as number
  const b = hi[x] as number
  if (b < 0) return nowhere(lo, hi, r)
  lo[r] = a <= 0 ? 0 : below(Math.sqrt(a))
  hi[r] = b === 0 ? 0 : above(Math.sqrt(b))
  return a < 0 ? partial : full
}

/** e^v can underflow to a zero that is not exact. */
function expLower(v: number): number {
  return Math.max(0, lower(boundedExp(v), errorBound.exp))
}

function expUpper(v: number): number {
  if (v === Number.NEGATIVE_INFINITY) return 0
  const e = boundedExp(v)
  return e === 0 ? 1e-323 : upper(e, errorBound.exp) + eta
}

/** r = e^x; never below 0. */
export function expInterval(lo: Float64Array, hi: Float64Array, r: number, x: number): void {
  const low = expLower(lo[x] as number)
  hi[r] = expUpper(hi[x] as number)
  lo[r] = low
}

/** r = e^x - 1; never below -1. */
export function expm1Interval(lo: Float64Array, hi: Float64Array, r: number, x: number): void {
  const low = Math.max(-1, lower(boundedExpm1(lo[x] as number), errorBound.expm1))
  hi[r] = upper(boundedExpm1(hi[x] as number), errorBound.expm1)
  lo[r] = low
}

/** r = natural logarithm of x. */
export function logInterval(lo: Float64Array, hi: Float64Array, r: number, x: number): Coverage {
  return logarithm(lo, hi, r, lo[x] as number, hi[x] as number, boundedLog, errorBound.log)
}

/** r = decimal logarithm of x. */
export function log10Interval(lo: Float64Array, hi: Float64Array, r: number, x: number): Coverage {
  return logarithm(lo, hi, r, lo[x] as number, hi[x] as number, boundedLog10, errorBound.log10)
}

function logarithm(
  lo: Float64Array,
  hi: Float64Array,
  r: number,
  a: number,
  b: number,
  f: (x: number) => number,
  bound: number,
): Coverage {
  if (b <= 0) return nowhere(lo, hi, r)
  lo[r] = a <= 0 ? Number.NEGATIVE_INFINITY : lower(f(a), bound)
  hi[r] = upper(f(b), bound)
  return a <= 0 ? partial : full
}

/** r = log(1 + x). */
export function log1pInterval(lo: Float64Array, hi: Float64Array, r: number, x: number): Coverage {
  const a = lo[x] as number
  const b = hi[x] as number
  if (b <= -1) return nowhere(lo, hi, r)
  lo[r] = a <= -1 ? Number.NEGATIVE_INFINITY : lower(boundedLog1p(a), errorBound.log1p)
  hi[r] = upper(boundedLog1p(b), errorBound.log1p)
  return a <= -1 ? partial : full
}

/** sin (quarter 0) or cos (quarter 1). */
export function circularInterval(lo: Float64Array, hi: Float64Array, r: number, x: number, quarter: 0 | 1): void {
  const a = lo[x] as number
  const b = hi[x] as number
  if (!(a > -circularLimit && b < circularLimit) || b - a > 6.28) {
    lo[r] = -1
    hi[r] = 1
    return
  }
  const va = boundedCircular(a, quarter)
  const vb = boundedCircular(b, quarter)
  const slack = Math.max(Math.abs(a), Math.abs(b)) > 0.785 ? circularSlack : 0
  // Turning points: maxima of sin at pi/2, of cos at 0, minima half a turn on. A margin of 1e-9 turns covers the
  // rounding of the quotient; a turning point taken in wrongly is within 2e-17 of the value at the end.
  const peak = quarter === 0 ? 0.25 : 0
  const from = a / (2 * Math.PI) - peak
  const to = b / (2 * Math.PI) - peak
  const holdsPeak = Math.ceil(from - 1e-9) <= Math.floor(to + 1e-9)
  const holdsTrough = Math.ceil(from - 0.5 - 1e-9) <= Math.floor(to - 0.5 + 1e-9)
  const low = Math.min(lower(va, errorBound.circular), lower(vb, errorBound.circular))
  const high = Math.max(upper(va, errorBound.circular), upper(vb, errorBound.circular))
  lo[r] = holdsTrough ? -1 : Math.max(-1, slack === 0 ? low : below(low - slack))
  hi[r] = holdsPeak ? 1 : Math.min(1, slack === 0 ? high : above(high + slack))
}

const scratchLo = new Float64Array(4)
const scratchHi = new Float64Array(4)

/** tan: increasing between its poles; everything where a pole may be inside. */
export function tanInterval(lo: Float64Array, hi: Float64Array, r: number, x: number): Coverage {
  const a = lo[x] as number
  const b = hi[x] as number
  const from = a / Math.PI - 0.5
  const to = b / Math.PI - 0.5
  if (!(a > -circularLimit && b < circularLimit) || Math.ceil(from - 1e-9) <= Math.floor(to + 1e-9)) {
    lo[r] = Number.NEGATIVE_INFINITY
    hi[r] = Number.POSITIVE_INFINITY
    return partial
  }
  const low = tanAt(a, scratchLo)
  hi[r] = tanAt(b, scratchHi)
  lo[r] = low
  return full
}

/** Lower (into scratchLo) or upper bound of tan v as the quotient of the enclosures of sin v and cos v. */
function tanAt(v: number, which: Float64Array): number {
  scratchLo[0] = v
  scratchHi[0] = v
  circularInterval(scratchLo, scratchHi, 1, 0, 0)
  circularInterval(scratchLo, scratchHi, 2, 0, 1)
  divInterval(scratchLo, scratchHi, 3, 1, 2)
  return which[3] as number
}

/** r = asin(x). */
export function asinInterval(lo: Float64Array, hi: Float64Array, r: number, x: number): Coverage {
  const a = lo[x] as number
  const b = hi[x] as number
  if (b < -1 || a > 1) return nowhere(lo, hi, r)
  lo[r] = lower(boundedAsin(Math.max(a, -1)), errorBound.asin)
  hi[r] = upper(boundedAsin(Math.min(b, 1)), errorBound.asin)
  return a < -1 || b > 1 ? partial : full
}

/** r = acos(x): decreasing. */
export function acosInterval(lo: Float64Array, hi: Float64Array, r: number, x: number): Coverage {
  const a = lo[x] as number
  const b = hi[x] as number
  if (b < -1 || a > 1) return nowhere(lo, hi, r)
  lo[r] = lower(boundedAcos(Math.min(b, 1)), errorBound.acos)
  hi[r] = upper(boundedAcos(Math.max(a, -1)), errorBound.acos)
  return a < -1 || b > 1 ? partial : full
}

/** r = atan(x). */
export function atanInterval(lo: Float64Array, hi: Float64Array, r: number, x: number): void {
  const low = lower(boundedAtan(lo[x] as number), errorBound.atan)
  hi[r] = upper(boundedAtan(hi[x] as number), errorBound.atan)
  lo[r] = low
}

/** r = sinh(x). */
export function sinhInterval(lo: Float64Array, hi: Float64Array, r: number, x: number): void {
  const low = lower(boundedSinh(lo[x] as number), errorBound.sinh)
  hi[r] = upper(boundedSinh(hi[x] as number), errorBound.sinh)
  lo[r] = low
}

/** r = cosh(x); never below 1, least where |x| is. */
export function coshInterval(lo: Float64Array, hi: Float64Array, r: number, x: number): void {
  const a = lo[x] as number
  const b = hi[x] as number
  const near = Math.max(a, Math.min(b, 0))
  lo[r] = near === 0 ? 1 : Math.max(1, lower(boundedCosh(near), errorBound.cosh))
  hi[r] = upper(boundedCosh(Math.max(-a, b)), errorBound.cosh)
}

/** r = tanh(x); never beyond -1 and 1. */
export function tanhInterval(lo: Float64Array, hi: Float64Array, r: number, x: number): void {
  const low = Math.max(-1, lower(boundedTanh(lo[x] as number), errorBound.tanh))
  hi[r] = Math.min(1, upper(boundedTanh(hi[x] as number), errorBound.tanh))
  lo[r] = low
}

/** r = 1/(1 + e^-x); never beyond 0 and 1. */
export function logisticInterval(lo: Float64Array, hi: Float64Array, r: number, x: number): void {
  const low = Math.max(0, lower(boundedLogistic(lo[x] as number), errorBound.logistic))
  const v = boundedLogistic(hi[x] as number)
  hi[r] = v < 1e-300 ? v * (1 + 1e-14) + 1e-320 : Math.min(1, upper(v, errorBound.logistic))
  lo[r] = low
}

/** General power. Negative bases count where the exponent is an integer. */
export function powInterval(lo: Float64Array, hi: Float64Array, r: number, x: number, y: number): Coverage {
  const a = lo[x] as number
  const b = hi[x] as number
  const c = lo[y] as number
  const d = hi[y] as number
  if (c === d && Number.isInteger(c) && Math.abs(c) <= 1e6) return integerPowerInterval(lo, hi, r, a, b, c)
  let low = Number.POSITIVE_INFINITY
  let high = Number.NEGATIVE_INFINITY
  if (b > 0 || (b === 0 && d > 0)) {
    positivePower(Math.max(a, 0), b, c, d)
    low = powerLow
    high = powerHigh
  }
  if (a < 0) {
    const from = Math.ceil(c)
    const to = Math.floor(d)
    if (to - from > 16) {
      lo[r] = Number.NEGATIVE_INFINITY
      hi[r] = Number.POSITIVE_INFINITY
      return partial
    }
    for (let k = from; k <= to; k++) {
      if (integerPowerInterval(lo, hi, r, a, b, k) === none) continue
      low = Math.min(low, lo[r] as number)
      high = Math.max(high, hi[r] as number)
    }
  }
  if (low > high) return nowhere(lo, hi, r)
  lo[r] = low
  hi[r] = high
  return a < 0 || (a === 0 && c <= 0) ? partial : full
}

let powerLow = 0
let powerHigh = 0

/** Bounds of x^y over 0 <= a <= x <= b, c <= y <= d as exp(y log x), into powerLow and powerHigh. */
function positivePower(a: number, b: number, c: number, d: number): void {
  scratchLo[0] = a === 0 ? Number.NEGATIVE_INFINITY : lower(boundedLog(a), errorBound.log)
  scratchHi[0] = b === 0 ? Number.NEGATIVE_INFINITY : upper(boundedLog(b), errorBound.log)
  scratchLo[1] = c
  scratchHi[1] = d
  mulInterval(scratchLo, scratchHi, 2, 0, 1)
  powerLow = expLower(scratchLo[2] as number)
  powerHigh = expUpper(scratchHi[2] as number)
  if (a > 0) return
  // A zero base gives 0 for positive exponents and 1 for exponent 0; exp(-Infinity * y) covers only the open part.
  if (d > 0) powerLow = 0
  if (c <= 0 && d >= 0) powerHigh = Math.max(powerHigh, 1)
}

function integerPowerInterval(
  lo: Float64Array,
  hi: Float64Array,
  r: number,
  a: number,
  b: number,
  k: number,
): Coverage {
  if (k === 0) {
    lo[r] = 1
    hi[r] = 1
    return full
  }
  const size = Math.abs(k)
  let low: number
  let high: number
  if (size % 2 === 1) {
    low = powerBelow(a, size)
    high = powerAbove(b, size)
  } else {
    const near = a > 0 ? a : b < 0 ? -b : 0
    low = near === 0 ? 0 : powerBelow(near, size)
    high = powerAbove(Math.max(-a, b), size)
  }
  if (k > 0) {
    lo[r] = low
    hi[r] = high
    return full
  }
  scratchLo[0] = 1
  scratchHi[0] = 1
  scratchLo[1] = low
  scratchHi[1] = high
  const coverage = divInterval(scratchLo, scratchHi, 2, 0, 1)
  lo[r] = scratchLo[2] as number
  hi[r] = scratchHi[2] as number
  return coverage
}

/** x^y log x; at a zero base its limit 0 for positive exponents. */
export function powlogInterval(lo: Float64Array, hi: Float64Array, r: number, x: number, y: number): Coverage {
  const a = lo[x] as number
  const b = hi[x] as number
  if (b < 0) return nowhere(lo, hi, r)
  const zero = a <= 0
  const low = Math.max(a, 0)
  if (b === 0) {
    if ((hi[y] as number) <= 0) return nowhere(lo, hi, r)
    lo[r] = 0
    hi[r] = 0
    return partial
  }
  const [c, d] = [lo[y] as number, hi[y] as number]
  positivePower(low, b, c, d)
  scratchLo[0] = powerLow
  scratchHi[0] = powerHigh
  scratchLo[1] = low === 0 ? Number.NEGATIVE_INFINITY : lower(boundedLog(low), errorBound.log)
  scratchHi[1] = upper(boundedLog(b), errorBound.log)
  mulInterval(scratchLo, scratchHi, 2, 0, 1)
  if (zero && c > 0) {
    // |x^y log x| <= 1/(e c) on (0, 1), where 1/e < 0.3679.
    scratchLo[2] = Math.max(scratchLo[2] as number, -above(0.3679 / c))
  }
  lo[r] = scratchLo[2] as number
  hi[r] = Math.max(scratchHi[2] as number, zero ? 0 : Number.NEGATIVE_INFINITY)
  return a < 0 || (zero && c <= 0) ? partial : full
}
