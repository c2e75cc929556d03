/**
 * Backward steps of the contraction: given enclosures of a result and its operands, cuts each operand to the values
 * from which the result can come. Sound, not always sharp: where no inverse is at hand the operand stays as it is.
 */

import { circularLimit } from '#shared/numerics/bounded-functions.ts'
import {
  above,
  addInterval,
  below,
  divInterval,
  mulInterval,
  quotientAbove,
  quotientBelow,
  subInterval,
} from '#shared/numerics/interval.ts'
import {
  asinInterval,
  atanInterval,
  circularInterval,
  expInterval,
  expm1Interval,
  log1pInterval,
  logInterval,
  powInterval,
  sqrtInterval,
  tanInterval,
} from '#shared/numerics/interval-functions.ts'
import { bernoulliInterval, exprelInterval } from '#shared/numerics/interval-quotients.ts'
import { inverseCosh, inverseLogistic, inverseSinh, inverseTanh, oddRoot } from '#shared/numerics/inverse-bounds.ts'

/** Just above pi/2. */
const quarterTurn = (Math.PI / 2) * (1 + 2 ** -51)

/** Scratch registers: 0 holds the candidate, the others what it is made from. */
const slo = new Float64Array(6)
const shi = new Float64Array(6)

function put(i: number, low: number, high: number): void {
  slo[i] = low
  shi[i] = high
}

/** Registers from `constantsFrom` up to `constantsTo` are parameters, constants and what depends on them only. */
let constantsFrom = 0
let constantsTo = 0

/** Says which registers must not be written: those from `from` up to, not including, `to`. */
export function protect(from: number, to: number): void {
  constantsFrom = from
  constantsTo = to
}

function isProtected(x: number): boolean {
  return x >= constantsFrom && x < constantsTo
}

/** Cuts register x with [low, high]; false where nothing is left. */
function cut(lo: Float64Array, hi: Float64Array, x: number, low: number, high: number): boolean {
  if (isProtected(x)) return low <= (hi[x] as number) && high >= (lo[x] as number)
  if (low > (lo[x] as number)) lo[x] = low
  if (high < (hi[x] as number)) hi[x] = high
  return (lo[x] as number) <= (hi[x] as number)
}

/** Cuts register x with scratch register i. */
function cutWith(lo: Float64Array, hi: Float64Array, x: number, i: number): boolean {
  return cut(lo, hi, x, slo[i] as number, shi[i] as number)
}

/** Copies operand and result into scratch 1, 2, 3. */
function load(lo: Float64Array, hi: Float64Array, r: number, x: number, y: number): void {
  put(1, lo[r] as number, hi[r] as number)
  put(2, lo[x] as number, hi[x] as number)
  put(3, lo[y] as number, hi[y] as number)
}

/**
 * Instruction `code` with result r and operands x, y (y is a plain number for powi, exprel and bernoulli). Protected
 * operands are only compared. False: no values of the operands fit the result, the box holds no zero.
 */
export function projectBack(
  code: number,
  lo: Float64Array,
  hi: Float64Array,
  r: number,
  x: number,
  y: number,
): boolean {
  const low = lo[r] as number
  const high = hi[r] as number
  switch (code) {
    case 0: // add
      load(lo, hi, r, x, y)
      subInterval(slo, shi, 0, 1, 3)
      if (!cutWith(lo, hi, x, 0)) return false
      subInterval(slo, shi, 0, 1, 2)
      return cutWith(lo, hi, y, 0)
    case 1: // sub
      load(lo, hi, r, x, y)
      addInterval(slo, shi, 0, 1, 3)
      if (!cutWith(lo, hi, x, 0)) return false
      subInterval(slo, shi, 0, 2, 1)
      return cutWith(lo, hi, y, 0)
    case 2: // mul
      if (x === y) {
        if (high < 0) return false
        put(1, Math.max(low, 0), high)
        sqrtInterval(slo, shi, 0, 1)
        return cutMirrored(lo, hi, x)
      }
      load(lo, hi, r, x, y)
      return cutQuotient(lo, hi, x, 1, 3) && cutQuotient(lo, hi, y, 1, 2)
    case 3: // div
      load(lo, hi, r, x, y)
      mulInterval(slo, shi, 0, 1, 3)
      return cutWith(lo, hi, x, 0) && cutQuotient(lo, hi, y, 2, 1)
    case 4: // neg
      return cut(lo, hi, x, -high, -low)
    case 5: // powi
      return cut(lo, hi, x, oddRoot(low, y, -1), oddRoot(high, y, 1))
    case 6: // pow
      return projectPower(lo, hi, r, x, y)
    case 8: // sqrt
      if (high < 0) return false
      put(1, Math.max(low, 0), high)
      mulInterval(slo, shi, 0, 1, 1)
      return cutWith(lo, hi, x, 0)
    case 9: // exp
      return cutLog(lo, hi, x, low, high)
    case 10: // log
      put(1, low, high)
      expInterval(slo, shi, 0, 1)
      return cutWith(lo, hi, x, 0)
    case 11: // log10
      put(1, low, high)
      put(2, Math.LN10 * (1 - 2 ** -52), Math.LN10 * (1 + 2 ** -52))
      mulInterval(slo, shi, 3, 1, 2)
      expInterval(slo, shi, 0, 3)
      return cutWith(lo, hi, x, 0)
    case 12: // log1p
      put(1, low, high)
      expm1Interval(slo, shi, 0, 1)
      return cutWith(lo, hi, x, 0)
    case 13: // expm1
      if (high <= -1) return false
      put(1, low, high)
      log1pInterval(slo, shi, 0, 1)
      return cutWith(lo, hi, x, 0)
    case 14: // sin
      return projectCircular(lo, hi, r, x, 0)
    case 15: // cos
      return projectCircular(lo, hi, r, x, 1)
    case 16: // tan
      return projectTangent(lo, hi, r, x)
    case 17: // asin
      if (!cut(lo, hi, r, -quarterTurn, quarterTurn)) return false
      put(1, lo[r] as number, hi[r] as number)
      circularInterval(slo, shi, 0, 1, 0)
      return cutWith(lo, hi, x, 0)
    case 18: // acos
      if (!cut(lo, hi, r, 0, 2 * quarterTurn)) return false
      put(1, lo[r] as number, hi[r] as number)
      circularInterval(slo, shi, 0, 1, 1)
      return cutWith(lo, hi, x, 0)
    case 19: // atan
      if (!cut(lo, hi, r, -quarterTurn, quarterTurn)) return false
      if ((lo[r] as number) <= -1.57 || (hi[r] as number) >= 1.57) return cutOneSided(lo, hi, r, x)
      put(1, lo[r] as number, hi[r] as number)
      tanInterval(slo, shi, 0, 1)
      return cutWith(lo, hi, x, 0)
    case 20: // sinh
      return cut(lo, hi, x, inverseSinh(low, -1), inverseSinh(high, 1))
    case 21: // cosh: |x| = log(r + sqrt(r² - 1)) <= inverse of the upper end
      if (high < 1) return false
      put(0, low <= 1 ? 0 : inverseCosh(low, -1), inverseCosh(high, 1))
      return cutMirrored(lo, hi, x)
    case 22: // tanh
      if (high < -1 || low > 1) return false
      return cut(lo, hi, x, inverseTanh(low, -1), inverseTanh(high, 1))
    case 23: // exprel
      return projectMonotone(lo, hi, r, x, y, exprelInterval, 1)
    case 24: // bernoulli
      return y > 0 || projectMonotone(lo, hi, r, x, y, bernoulliInterval, -1)
    case 25: // logistic: x = log(r/(1 - r))
      if (high < 0 || low > 1) return false
      return cut(lo, hi, x, inverseLogistic(low, -1), inverseLogistic(high, 1))
    case 26: // abs
      if (high < 0) return false
      put(0, Math.max(low, 0), high)
      return cutMirrored(lo, hi, x)
    case 28: // min
      if (!cut(lo, hi, x, low, Number.POSITIVE_INFINITY) || !cut(lo, hi, y, low, Number.POSITIVE_INFINITY)) return false
      if ((lo[y] as number) > high) return cut(lo, hi, x, low, high)
      return (lo[x] as number) <= high || cut(lo, hi, y, low, high)
    case 29: // max
      if (!cut(lo, hi, x, Number.NEGATIVE_INFINITY, high) || !cut(lo, hi, y, Number.NEGATIVE_INFINITY, high))
        return false
      if ((hi[y] as number) < low) return cut(lo, hi, x, low, high)
      return (hi[x] as number) >= low || cut(lo, hi, y, low, high)
    case 32: {
      // share: a = b r/(1 - r), b = a (1 - r)/r
      load(lo, hi, r, x, y)
      put(4, 1, 1)
      subInterval(slo, shi, 5, 4, 1)
      mulInterval(slo, shi, 2, 3, 1)
      if (!cutQuotient(lo, hi, x, 2, 5)) return false
      put(2, lo[x] as number, hi[x] as number)
      mulInterval(slo, shi, 3, 2, 5)
      return cutQuotient(lo, hi, y, 3, 1)
    }
    default:
      return true
  }
}

/** Cuts x with scratch numerator / scratch divisor, keeping both half-lines' hull where the divisor contains zero. */
function cutQuotient(lo: Float64Array, hi: Float64Array, x: number, numerator: number, divisor: number): boolean {
  const a = slo[numerator] as number
  const b = shi[numerator] as number
  const c = slo[divisor] as number
  const d = shi[divisor] as number
  if (c > 0 || d < 0) {
    divInterval(slo, shi, 0, numerator, divisor)
    return cutWith(lo, hi, x, 0)
  }
  if (a <= 0 && b >= 0) return true
  if (c === 0 && d === 0) return false
  // The quotient is outside an open gap around zero: cut where the operand's end lies in the gap.
  const nearest = a > 0 ? a : b
  const upperStart = d > 0 === nearest > 0 && d !== 0 ? quotientBelow(nearest, d) : Number.POSITIVE_INFINITY
  const otherUpper = c < 0 === nearest < 0 && c !== 0 ? quotientBelow(nearest, c) : Number.POSITIVE_INFINITY
  if (isProtected(x)) return true
  const positiveFrom = Math.min(upperStart, otherUpper)
  const lowerStart = d > 0 === nearest < 0 && d !== 0 ? quotientAbove(nearest, d) : Number.NEGATIVE_INFINITY
  const otherLower = c < 0 === nearest > 0 && c !== 0 ? quotientAbove(nearest, c) : Number.NEGATIVE_INFINITY
  const negativeTo = Math.max(lowerStart, otherLower)
  if ((lo[x] as number) > negativeTo && positiveFrom > (lo[x] as number)) lo[x] = positiveFrom
  if ((hi[x] as number) < positiveFrom && negativeTo < (hi[x] as number)) hi[x] = negativeTo
  return (lo[x] as number) <= (hi[x] as number)
}

/** x is in scratch 0 or in its mirror image; scratch 0 is not negative. */
function cutMirrored(lo: Float64Array, hi: Float64Array, x: number): boolean {
  const near = slo[0] as number
  const far = shi[0] as number
  if (!cut(lo, hi, x, -far, far)) return false
  if (isProtected(x)) return true
  if ((lo[x] as number) > -near && near > (lo[x] as number)) lo[x] = near
  if ((hi[x] as number) < near && -near < (hi[x] as number)) hi[x] = -near
  return (lo[x] as number) <= (hi[x] as number)
}

function cutLog(lo: Float64Array, hi: Float64Array, x: number, low: number, high: number): boolean {
  if (high <= 0) return false
  put(1, low, high)
  logInterval(slo, shi, 0, 1)
  return cutWith(lo, hi, x, 0)
}

/** Base of a power with a fixed exponent; integer exponents only where the base has one sign. */
function projectPower(lo: Float64Array, hi: Float64Array, r: number, x: number, y: number): boolean {
  const exponent = lo[y] as number
  if (exponent !== hi[y] || exponent === 0) return true
  if (!Number.isInteger(exponent)) {
    if (!cut(lo, hi, x, 0, Number.POSITIVE_INFINITY)) return false
  } else if ((lo[x] as number) < 0) return true
  if ((hi[r] as number) < 0) return false
  put(1, Math.max(0, lo[r] as number), hi[r] as number)
  put(3, 1, 1)
  put(4, exponent, exponent)
  divInterval(slo, shi, 2, 3, 4)
  powInterval(slo, shi, 0, 1, 2)
  return cutWith(lo, hi, x, 0)
}

/**
 * sin (quarter 0) or cos (1): the hull of the inverse's branches within the operand. In terms of t = x + quarter pi/2 the
 * function is sin t, with the branch k pi + (-1)^k asin around each k pi.
 */
function projectCircular(lo: Float64Array, hi: Float64Array, r: number, x: number, quarter: 0 | 1): boolean {
  if ((lo[r] as number) > 1 || (hi[r] as number) < -1) return false
  put(1, Math.max(lo[r] as number, -1), Math.min(hi[r] as number, 1))
  asinInterval(slo, shi, 0, 1)
  const [from, to] = [slo[0] as number, shi[0] as number]
  return cutBranches(lo, hi, x, (quarter * Math.PI) / 2, from, to, true)
}

/** tan: branches k pi + atan, which leave out the neighbourhood of every pole. */
function projectTangent(lo: Float64Array, hi: Float64Array, r: number, x: number): boolean {
  put(1, lo[r] as number, hi[r] as number)
  atanInterval(slo, shi, 0, 1)
  return cutBranches(lo, hi, x, 0, slo[0] as number, shi[0] as number, false)
}

/** Hull of the branches k pi - shift + [from, to] (mirrored for odd k where `turns`) inside register x. */
function cutBranches(
  lo: Float64Array,
  hi: Float64Array,
  x: number,
  shift: number,
  from: number,
  to: number,
  turns: boolean,
): boolean {
  const a = lo[x] as number
  const b = hi[x] as number
  if (!(b - a < 20) || Math.abs(a) > circularLimit || Math.abs(b) > circularLimit) return true
  // k pi - shift carries a few roundings of its own size.
  const slack = (Math.max(Math.abs(a), Math.abs(b)) + 8) * 2 ** -49
  let low = Number.POSITIVE_INFINITY
  let high = Number.NEGATIVE_INFINITY
  const last = Math.ceil((b + shift) / Math.PI) + 1
  for (let k = Math.floor((a + shift) / Math.PI) - 1; k <= last; k++) {
    const centre = k * Math.PI - shift
    const falling = turns && k % 2 !== 0
    const branchLow = centre + (falling ? -to : from) - slack
    const branchHigh = centre + (falling ? -from : to) + slack
    if (branchHigh < a || branchLow > b) continue
    low = Math.min(low, branchLow)
    high = Math.max(high, branchHigh)
  }
  return cut(lo, hi, x, below(low), above(high))
}

/** atan near its ends: only the end that is away from a pole of tan says something. */
function cutOneSided(lo: Float64Array, hi: Float64Array, r: number, x: number): boolean {
  for (const side of [0, 1]) {
    const v = (side === 0 ? lo[r] : hi[r]) as number
    if (Math.abs(v) >= 1.57) continue
    put(1, v, v)
    tanInterval(slo, shi, 0, 1)
    const fits =
      side === 0
        ? cut(lo, hi, x, slo[0] as number, Number.POSITIVE_INFINITY)
        : cut(lo, hi, x, Number.NEGATIVE_INFINITY, shi[0] as number)
    if (!fits) return false
  }
  return true
}

/**
 * Functions without a closed inverse: the part of the operand whose values lie beyond the result is cut off by
 * halving. `direction` +1 for increasing, -1 for decreasing functions.
 */
function projectMonotone(
  lo: Float64Array,
  hi: Float64Array,
  r: number,
  x: number,
  k: number,
  f: (lo: Float64Array, hi: Float64Array, r: number, x: number, k: number) => void,
  direction: -1 | 1,
): boolean {
  const low = lo[r] as number
  const high = hi[r] as number
  const beyond = (v: number, side: -1 | 1): boolean => {
    put(4, v, v)
    f(slo, shi, 5, 4, k)
    return side * direction < 0 ? (shi[5] as number) < low : (slo[5] as number) > high
  }
  let a = lo[x] as number
  let b = hi[x] as number
  if (!Number.isFinite(a) || !Number.isFinite(b)) return true
  for (const side of [-1, 1] as const) {
    const end = side < 0 ? a : b
    if (!beyond(end, side)) continue
    let cutTo = end
    let keep = side < 0 ? b : a
    if (beyond(keep, side)) return false
    for (let step = 0; step < 6; step++) {
      const middle = cutTo + (keep - cutTo) / 2
      if (beyond(middle, side)) cutTo = middle
      else keep = middle
    }
    if (side < 0) a = cutTo
    else b = cutTo
  }
  return cut(lo, hi, x, a, b)
}
