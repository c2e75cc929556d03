/**
 * Interval arithmetic with outward rounding on pairs of arrays: register r holds the real numbers x with
 * lo[r] <= x <= hi[r]. Infinite bounds mean unbounded, they are not members; so 0 * [.., Infinity) is 0 (the product of
 * bounds 0 * Infinity is taken as 0, never as NaN and never as empty).
 *
 * Every operation writes an interval that contains the result for every choice of members for which the operation is
 * defined. It returns `full` where it is defined (and continuous) for all members, `partial` where only for some, and
 * `none` where for none; with `none` the bounds written are [-Infinity, Infinity] and of no meaning.
 *
 * Rounding: results of + - * / and sqrt are off by half a unit in the last place at most, so widening by one does it:
 * v ± (phi |v| + eta) with phi = u (1 + 2u), eta the smallest double, contains the neighbours of v (Rump, Zimmermann,
 * Boldo & Melquiond, BIT 49 (2009) 419). Elementary functions: bounded-functions.ts.
 */

/** How far an operation was defined over its operands. */
export type Coverage = 0 | 1 | 2
/** Defined and continuous on all of the operand. */
export const full = 0
/** Not defined, or not continuous, somewhere on the operand. */
export const partial = 1
/** Defined nowhere on the operand. */
export const none = 2

const phi = 2 ** -53 * (1 + 2 ** -52)
const eta = 5e-324
const largest = Number.MAX_VALUE

/** A lower bound for a real number that was rounded to `v`. */
export function below(v: number): number {
  return v === Number.POSITIVE_INFINITY ? largest : v - (Math.abs(v) * phi + eta)
}

/** An upper bound for a real number that was rounded to `v`. */
export function above(v: number): number {
  return v === Number.NEGATIVE_INFINITY ? -largest : v + (Math.abs(v) * phi + eta)
}

/** Lower bound of a sum; sums that vanish are exact. */
export function sumBelow(a: number, b: number): number {
  const v = a + b
  return v === 0 ? 0 : v === Number.POSITIVE_INFINITY ? (a < v && b < v ? largest : v) : v - (Math.abs(v) * phi + eta)
}

/** Upper bound of a sum. */
export function sumAbove(a: number, b: number): number {
  const v = a + b
  return v === 0 ? 0 : v === Number.NEGATIVE_INFINITY ? (a > v && b > v ? -largest : v) : v + (Math.abs(v) * phi + eta)
}

/** Lower bound of a product of two bounds; with a zero factor it is exactly zero. */
export function productBelow(a: number, b: number): number {
  if (a === 0 || b === 0) return 0
  const v = a * b
  return v === Number.POSITIVE_INFINITY ? largest : v - (Math.abs(v) * phi + eta)
}

/** Upper bound of a product of two bounds. */
export function productAbove(a: number, b: number): number {
  if (a === 0 || b === 0) return 0
  const v = a * b
  return v === Number.NEGATIVE_INFINITY ? -largest : v + (Math.abs(v) * phi + eta)
}

/** Lower bound of a quotient; the divisor is not zero. x / Infinity is 0, a bound in the limit. */
export function quotientBelow(a: number, b: number): number {
  if (a === 0) return 0
  const v = a / b
  if (Number.isNaN(v)) return Math.sign(a) * Math.sign(b) < 0 ? Number.NEGATIVE_INFINITY : 0
  return v === Number.POSITIVE_INFINITY ? largest : v - (Math.abs(v) * phi + eta)
}

/** Upper bound of a quotient; the divisor is not zero. */
export function quotientAbove(a: number, b: number): number {
  if (a === 0) return 0
  const v = a / b
  if (Number.isNaN(v)) return Math.sign(a) * Math.sign(b) > 0 ? Number.POSITIVE_INFINITY : 0
  return v === Number.NEGATIVE_INFINITY ? -largest : v + (Math.abs(v) * phi + eta)
}

function write(lo: Float64Array, hi: Float64Array, r: number, low: number, high: number): void {
  lo[r] = low
  hi[r] = high
}

function entire(lo: Float64Array, hi: Float64Array, r: number): void {
  lo[r] = Number.NEGATIVE_INFINITY
  hi[r] = Number.POSITIVE_INFINITY
}

/** r = x + y. */
export function addInterval(lo: Float64Array, hi: Float64Array, r: number, x: number, y: number): void {
  const low = sumBelow(lo[x] as number, lo[y] as number)
  hi[r] = sumAbove(hi[x] as number, hi[y] as number)
  lo[r] = low
}

/** r = x - y. */
export function subInterval(lo: Float64Array, hi: Float64Array, r: number, x: number, y: number): void {
  const low = sumBelow(lo[x] as number, -(hi[y] as number))
  hi[r] = sumAbove(hi[x] as number, -(lo[y] as number))
  lo[r] = low
}

/** r = -x, exact. */
export function negInterval(lo: Float64Array, hi: Float64Array, r: number, x: number): void {
  const low = -(hi[x] as number)
  hi[r] = -(lo[x] as number)
  lo[r] = low
}

/** Product; of a register with itself the square, whose lower bound is never negative. */
export function mulInterval(lo: Float64Array, hi: Float64Array, r: number, x: number, y: number): void {
  const a = lo[x] as number
  const b = hi[x] as number
  if (x === y) {
    if (a >= 0) write(lo, hi, r, Math.max(0, productBelow(a, a)), productAbove(b, b))
    else if (b <= 0) write(lo, hi, r, Math.max(0, productBelow(b, b)), productAbove(a, a))
    else write(lo, hi, r, 0, -a > b ? productAbove(a, a) : productAbove(b, b))
    return
  }
  const c = lo[y] as number
  const d = hi[y] as number
  if (a >= 0) {
    if (c >= 0) write(lo, hi, r, productBelow(a, c), productAbove(b, d))
    else if (d <= 0) write(lo, hi, r, productBelow(b, c), productAbove(a, d))
    else write(lo, hi, r, productBelow(b, c), productAbove(b, d))
  } else if (b <= 0) {
    if (c >= 0) write(lo, hi, r, productBelow(a, d), productAbove(b, c))
    else if (d <= 0) write(lo, hi, r, productBelow(b, d), productAbove(a, c))
    else write(lo, hi, r, productBelow(a, d), productAbove(a, c))
  } else if (c >= 0) write(lo, hi, r, productBelow(a, d), productAbove(b, d))
  else if (d <= 0) write(lo, hi, r, productBelow(b, c), productAbove(a, c))
  else {
    const low = Math.min(productBelow(a, d), productBelow(b, c))
    write(lo, hi, r, low, Math.max(productAbove(a, c), productAbove(b, d)))
  }
}

/** Quotient. A divisor that contains zero leaves a half-line where the numerator has one sign, else everything. */
export function divInterval(lo: Float64Array, hi: Float64Array, r: number, x: number, y: number): Coverage {
  const a = lo[x] as number
  const b = hi[x] as number
  const c = lo[y] as number
  const d = hi[y] as number
  if (c > 0) {
    if (a >= 0) write(lo, hi, r, quotientBelow(a, d), quotientAbove(b, c))
    else if (b <= 0) write(lo, hi, r, quotientBelow(a, c), quotientAbove(b, d))
    else write(lo, hi, r, quotientBelow(a, c), quotientAbove(b, c))
    return full
  }
  if (d < 0) {
    if (a >= 0) write(lo, hi, r, quotientBelow(b, d), quotientAbove(a, c))
    else if (b <= 0) write(lo, hi, r, quotientBelow(b, c), quotientAbove(a, d))
    else write(lo, hi, r, quotientBelow(b, d), quotientAbove(a, d))
    return full
  }
  if (c === 0 && d === 0) {
    entire(lo, hi, r)
    return none
  }
  if (a === 0 && b === 0) write(lo, hi, r, 0, 0)
  else if (c === 0 && a >= 0) write(lo, hi, r, quotientBelow(a, d), Number.POSITIVE_INFINITY)
  else if (c === 0 && b <= 0) write(lo, hi, r, Number.NEGATIVE_INFINITY, quotientAbove(b, d))
  else if (d === 0 && a >= 0) write(lo, hi, r, Number.NEGATIVE_INFINITY, quotientAbove(a, c))
  else if (d === 0 && b <= 0) write(lo, hi, r, quotientBelow(b, c), Number.POSITIVE_INFINITY)
  else entire(lo, hi, r)
  return partial
}

/** x^k for an odd k >= 3: increasing, so the bounds are those of the ends. */
export function oddPowerInterval(lo: Float64Array, hi: Float64Array, r: number, x: number, k: number): void {
  const low = powerBelow(lo[x] as number, k)
  hi[r] = powerAbove(hi[x] as number, k)
  lo[r] = low
}

/** Lower bound of v^k, k >= 1. */
export function powerBelow(v: number, k: number): number {
  if (v < 0) return k % 2 === 1 ? -magnitudePower(-v, k, above) : magnitudePower(-v, k, below)
  return magnitudePower(v, k, below)
}

/** Upper bound of v^k, k >= 1. */
export function powerAbove(v: number, k: number): number {
  if (v < 0) return k % 2 === 1 ? -magnitudePower(-v, k, below) : magnitudePower(-v, k, above)
  return magnitudePower(v, k, above)
}

/** v^k for v >= 0 by squarings, each step rounded in the same direction. */
function magnitudePower(v: number, k: number, round: (v: number) => number): number {
  if (v === 0) return 0
  let result = 1
  let first = true
  let base = v
  for (let rest = k; rest > 0; rest = Math.floor(rest / 2)) {
    if (rest % 2 === 1) {
      result = first ? base : Math.max(0, round(result * base))
      first = false
    }
    if (rest > 1) base = Math.max(0, round(base * base))
  }
  return result
}

/** r = |x|, exact. */
export function absInterval(lo: Float64Array, hi: Float64Array, r: number, x: number): void {
  const a = lo[x] as number
  const b = hi[x] as number
  if (a >= 0) write(lo, hi, r, a, b)
  else if (b <= 0) write(lo, hi, r, -b, -a)
  else write(lo, hi, r, 0, Math.max(-a, b))
}

/** Sign of the members. Jumps where zero is inside, so it is only partially continuous there. */
export function signInterval(lo: Float64Array, hi: Float64Array, r: number, x: number): Coverage {
  const a = lo[x] as number
  const b = hi[x] as number
  write(lo, hi, r, a > 0 ? 1 : a === 0 ? 0 : -1, b < 0 ? -1 : b === 0 ? 0 : 1)
  return a <= 0 && b >= 0 && !(a === 0 && b === 0) ? partial : full
}

/** r = min(x, y), exact. */
export function minInterval(lo: Float64Array, hi: Float64Array, r: number, x: number, y: number): void {
  const low = Math.min(lo[x] as number, lo[y] as number)
  hi[r] = Math.min(hi[x] as number, hi[y] as number)
  lo[r] = low
}

/** r = max(x, y), exact. */
export function maxInterval(lo: Float64Array, hi: Float64Array, r: number, x: number, y: number): void {
  const low = Math.max(lo[x] as number, lo[y] as number)
  hi[r] = Math.max(hi[x] as number, hi[y] as number)
  lo[r] = low
}

/** y where x is positive, z where it is negative, the convex hull of both where zero is inside. */
export function selectInterval(lo: Float64Array, hi: Float64Array, r: number, x: number, y: number, z: number): void {
  if ((lo[x] as number) > 0) write(lo, hi, r, lo[y] as number, hi[y] as number)
  else if ((hi[x] as number) < 0) write(lo, hi, r, lo[z] as number, hi[z] as number)
  else {
    const low = Math.min(lo[y] as number, lo[z] as number)
    write(lo, hi, r, low, Math.max(hi[y] as number, hi[z] as number))
  }
}

/** Slope of the sign function: 0 away from zero, anything where zero is inside. */
export function jumpInterval(lo: Float64Array, hi: Float64Array, r: number, x: number): Coverage {
  if ((lo[x] as number) > 0 || (hi[x] as number) < 0) {
    write(lo, hi, r, 0, 0)
    return full
  }
  entire(lo, hi, r)
  return partial
}

/**
 * a/(a + b). Where a + b keeps one sign the quotient is monotone in a with the sign of b, and in b with that of -a: the
 * bounds are taken at corners. Else as the plain quotient.
 */
export function shareInterval(lo: Float64Array, hi: Float64Array, r: number, x: number, y: number): Coverage {
  const a = lo[x] as number
  const b = hi[x] as number
  const c = lo[y] as number
  const d = hi[y] as number
  const low = sumBelow(a, c)
  const high = sumAbove(b, d)
  const oneSign = low > 0 || high < 0
  if (oneSign && (c >= 0 || d <= 0)) {
    const rising = c >= 0
    const bottom = rising ? a : b
    const top = rising ? b : a
    // At a fixed a the quotient falls with b where a > 0.
    const least = shareBelow(bottom, bottom > 0 ? d : c)
    hi[r] = shareAbove(top, top > 0 ? c : d)
    lo[r] = least
    return full
  }
  if (oneSign && (a >= 0 || b <= 0)) {
    // Sign of b open, sign of a known: monotone in b, and the share of b is one minus it.
    const falls = a >= 0
    const bottom = falls ? d : c
    const top = falls ? c : d
    const least = shareBelow(bottom > 0 ? a : b, bottom)
    hi[r] = shareAbove(top > 0 ? b : a, top)
    lo[r] = least
    return full
  }
  quotient.lo[0] = a
  quotient.hi[0] = b
  quotient.lo[1] = low
  quotient.hi[1] = high
  const coverage = divInterval(quotient.lo, quotient.hi, 2, 0, 1)
  lo[r] = quotient.lo[2] as number
  hi[r] = quotient.hi[2] as number
  return coverage
}

const quotient = { lo: new Float64Array(3), hi: new Float64Array(3) }

/** Lower bound of a/(a + b) for numbers; infinite ones stand for their limits. */
function shareBelow(a: number, b: number): number {
  if (a === 0) return 0
  if (!Number.isFinite(a))
    return Number.isFinite(b) ? below(1) : Math.sign(a) === Math.sign(b) ? 0 : Number.NEGATIVE_INFINITY
  if (!Number.isFinite(b)) return -1e-300
  const v = a / (a + b)
  return v - (Math.abs(v) * 2 ** -51 + eta)
}

function shareAbove(a: number, b: number): number {
  if (a === 0) return 0
  if (!Number.isFinite(a))
    return Number.isFinite(b) ? above(1) : Math.sign(a) === Math.sign(b) ? 1 : Number.POSITIVE_INFINITY
  if (!Number.isFinite(b)) return 1e-300
  const v = a / (a + b)
  return v + (Math.abs(v) * 2 ** -51 + eta)
}
