/**
 * Rules of truncated Taylor arithmetic, one for each operation of the tapes.
 *
 * Recurrences of Griewank & Walther, Evaluating Derivatives (2nd ed.), tables 13.1 and 13.2; functions with known
 * derivatives (exprel, bernoulli) by Horner's rule on the truncated series.
 */

import { bernoulliTaylor, exprelTaylor } from '#shared/numerics/smooth-quotients.ts'
import { powerTimesLog } from './run-tape.ts'

/** Highest order of an expansion. */
export const maxJetOrder = 5
/** Entries that one register takes. */
export const stride = maxJetOrder + 1

/** Scratch series: companions of functions that come in pairs. */
const companion = new Float64Array(stride)
const argument = new Float64Array(stride)
const derivatives = new Float64Array(stride)

/** Series of one instruction at offset `r` from its operands at `x`, `y`, `z`; `n` is the plain second operand. */
export function stepSeries(
  operation: number,
  t: Float64Array,
  r: number,
  x: number,
  y: number,
  z: number,
  n: number,
  value: number,
  order: number,
): void {
  t[r] = value
  const x0 = t[x] as number
  switch (operation) {
    case 0: // add
      for (let k = 1; k <= order; k++) t[r + k] = (t[x + k] as number) + (t[y + k] as number)
      return
    case 1: // sub
      for (let k = 1; k <= order; k++) t[r + k] = (t[x + k] as number) - (t[y + k] as number)
      return
    case 2: // mul
      product(t, r, t, x, t, y, order)
      return
    case 3: // div
      for (let k = 1; k <= order; k++) {
        let sum = t[x + k] as number
        for (let j = 1; j <= k; j++) sum -= (t[y + j] as number) * (t[r + k - j] as number)
        t[r + k] = sum / (t[y] as number)
      }
      return
    case 4: // neg
      for (let k = 1; k <= order; k++) t[r + k] = -(t[x + k] as number)
      return
    case 5: // powi: odd power by multiplication, right at 0 as well
      product(companion, 0, t, x, t, x, order)
      for (let k = 0; k <= order; k++) argument[k] = t[x + k] as number
      for (let m = n; m > 1; m -= 2) {
        product(derivatives, 0, argument, 0, companion, 0, order)
        for (let k = 0; k <= order; k++) argument[k] = derivatives[k] as number
      }
      for (let k = 1; k <= order; k++) t[r + k] = argument[k] as number
      return
    case 6: // pow
      power(t, r, x, y, value, order)
      return
    case 7: // powlog
      powerLog(t, r, x, y, value, order)
      return
    case 8: // sqrt
      for (let k = 1; k <= order; k++) {
        let sum = t[x + k] as number
        for (let j = 1; j < k; j++) sum -= (t[r + j] as number) * (t[r + k - j] as number)
        t[r + k] = sum / (2 * value)
      }
      return
    case 9: // exp
      exponential(t, r, x, value, order)
      return
    case 13: // expm1
      exponential(t, r, x, Math.exp(x0), order)
      t[r] = value
      return
    case 10: // log
      logarithm(t, r, x, x0, 1, order)
      return
    case 11: // log10
      logarithm(t, r, x, x0, Math.LOG10E, order)
      return
    case 12: // log1p
      logarithm(t, r, x, 1 + x0, 1, order)
      return
    case 14: // sin
      circular(t, r, x, value, Math.cos(x0), -1, order)
      return
    case 15: // cos: derivative of the companion sin is cos, so cos' = -sin
      circular(t, r, x, value, -Math.sin(x0), -1, order)
      return
    case 20: // sinh
      circular(t, r, x, value, Math.cosh(x0), 1, order)
      return
    case 21: // cosh
      circular(t, r, x, value, Math.sinh(x0), 1, order)
      return
    case 16: // tan: t' = (1 + t²) x'
      quadraticSlope(t, r, x, 1, order)
      return
    case 22: // tanh: t' = (1 - t²) x'
      quadraticSlope(t, r, x, -1, order)
      return
    case 17: // asin
      arcSine(t, r, x, 1, order)
      return
    case 18: // acos
      arcSine(t, r, x, -1, order)
      return
    case 19: // atan: y' = x' / (1 + x²)
      product(companion, 0, t, x, t, x, order)
      companion[0] = 1 + x0 * x0
      integrateQuotient(t, r, x, 1, order)
      return
    case 23: // exprel, n-th derivative
      exprelTaylor(x0, order + n, scratch)
      compose(t, r, x, n, order)
      return
    case 24: // bernoulli, n-th derivative
      bernoulliTaylor(x0, order + n, scratch)
      compose(t, r, x, n, order)
      return
    case 25: // logistic: y' = y (1 - y) x', the complement kept as a series of its own
      logistic(t, r, x, value, order)
      return
    case 26: // abs
      scaled(t, r, x, Math.sign(x0), order)
      return
    case 27: // sign
    case 31: // jump
      for (let k = 1; k <= order; k++) t[r + k] = 0
      return
    case 28: // min
      branch(t, r, x, y, (t[y] as number) - x0, order)
      return
    case 29: // max
      branch(t, r, x, y, x0 - (t[y] as number), order)
      return
    case 30: // select
      branch(t, r, y, z, x0, order)
      return
    case 32: // share
      for (let k = 0; k <= order; k++) companion[k] = (t[x + k] as number) + (t[y + k] as number)
      for (let k = 1; k <= order; k++) {
        let sum = t[x + k] as number
        for (let j = 1; j <= k; j++) sum -= (companion[j] as number) * (t[r + k - j] as number)
        t[r + k] = sum / (companion[0] as number)
      }
      return
    default:
      for (let k = 1; k <= order; k++) t[r + k] = Number.NaN
  }
}

/** Orders of derivative and expansion add up to at most 8. */
const scratch = new Float64Array(9)

function product(
  out: Float64Array,
  r: number,
  a: Float64Array,
  x: number,
  b: Float64Array,
  y: number,
  order: number,
): void {
  for (let k = 0; k <= order; k++) {
    let sum = 0
    for (let j = 0; j <= k; j++) sum += (a[x + j] as number) * (b[y + k - j] as number)
    out[r + k] = sum
  }
}

function exponential(t: Float64Array, r: number, x: number, value: number, order: number): void {
  t[r] = value
  for (let k = 1; k <= order; k++) {
    let sum = 0
    for (let j = 1; j <= k; j++) sum += j * (t[x + j] as number) * (t[r + k - j] as number)
    t[r + k] = sum / k
  }
}

/** factor * log of the series whose value is `base` and whose other coefficients are those at x. */
function logarithm(t: Float64Array, r: number, x: number, base: number, factor: number, order: number): void {
  for (let k = 1; k <= order; k++) {
    let sum = k * (t[x + k] as number)
    for (let j = 1; j < k; j++) sum -= (k - j) * (t[x + j] as number) * (companion[k - j] as number)
    companion[k] = sum / (k * base)
    t[r + k] = factor * (companion[k] as number)
  }
}

/** y' = z x', z' = sign y x' (sin, cos, sinh, cosh with their companions). */
function circular(
  t: Float64Array,
  r: number,
  x: number,
  value: number,
  other: number,
  sign: number,
  order: number,
): void {
  t[r] = value
  companion[0] = other
  for (let k = 1; k <= order; k++) {
    let y = 0
    let z = 0
    for (let j = 1; j <= k; j++) {
      const slope = j * (t[x + j] as number)
      y += slope * (companion[k - j] as number)
      z += slope * (t[r + k - j] as number)
    }
    t[r + k] = y / k
    companion[k] = (sign * z) / k
  }
}

/** y' = (1 + sign y²) x'. */
function quadraticSlope(t: Float64Array, r: number, x: number, sign: number, order: number): void {
  const y0 = t[r] as number
  companion[0] = 1 + sign * y0 * y0
  for (let k = 1; k <= order; k++) {
    let sum = 0
    for (let j = 1; j <= k; j++) sum += j * (t[x + j] as number) * (companion[k - j] as number)
    t[r + k] = sum / k
    let square = 0
    for (let j = 0; j <= k; j++) square += (t[r + j] as number) * (t[r + k - j] as number)
    companion[k] = sign * square
  }
}

/** y' = sign x' / sqrt(1 - x²). */
function arcSine(t: Float64Array, r: number, x: number, sign: number, order: number): void {
  const x0 = t[x] as number
  product(argument, 0, t, x, t, x, order)
  const root = Math.sqrt((1 - x0) * (1 + x0))
  companion[0] = root
  for (let k = 1; k <= order; k++) {
    let sum = -(argument[k] as number)
    for (let j = 1; j < k; j++) sum -= (companion[j] as number) * (companion[k - j] as number)
    companion[k] = sum / (2 * root)
  }
  integrateQuotient(t, r, x, sign, order)
}

/** y' = sign x' / companion. */
function integrateQuotient(t: Float64Array, r: number, x: number, sign: number, order: number): void {
  for (let k = 1; k <= order; k++) {
    let sum = sign * k * (t[x + k] as number)
    for (let j = 1; j < k; j++) sum -= j * (t[r + j] as number) * (companion[k - j] as number)
    t[r + k] = sum / (k * (companion[0] as number))
  }
}

function logistic(t: Float64Array, r: number, x: number, value: number, order: number): void {
  companion[0] = 1 / (1 + Math.exp(t[x] as number))
  t[r] = value
  for (let k = 1; k <= order; k++) {
    let sum = 0
    for (let j = 1; j <= k; j++) {
      // Coefficient k - j of y (1 - y).
      let slope = 0
      for (let i = 0; i <= k - j; i++) slope += (t[r + i] as number) * (companion[k - j - i] as number)
      sum += j * (t[x + j] as number) * slope
    }
    t[r + k] = sum / k
    companion[k] = -sum / k
  }
}

/** Series of the n-th derivative of a function whose Taylor coefficients at x0 are in `scratch`, by Horner's rule. */
function compose(t: Float64Array, r: number, x: number, n: number, order: number): void {
  // Coefficient k of the n-th derivative's own expansion is f_(n+k) (n+k)!/k!.
  for (let k = 0; k <= order; k++) {
    let factor = 1
    for (let j = 1; j <= n; j++) factor *= k + j
    derivatives[k] = factor * (scratch[n + k] as number)
  }
  companion.fill(0)
  for (let m = order; m >= 1; m--) {
    companion[0] = (companion[0] as number) + (derivatives[m] as number)
    // companion = companion * (x - x0)
    for (let k = order; k >= 0; k--) {
      let sum = 0
      for (let j = 1; j <= k; j++) sum += (t[x + j] as number) * (companion[k - j] as number)
      companion[k] = sum
    }
  }
  for (let k = 1; k <= order; k++) t[r + k] = companion[k] as number
}

function scaled(t: Float64Array, r: number, x: number, factor: number, order: number): void {
  for (let k = 1; k <= order; k++) t[r + k] = factor * (t[x + k] as number)
}

/** The series at x where `test` > 0, at y where it is < 0, their mean at a tie (as the Jacobian has it). */
function branch(t: Float64Array, r: number, x: number, y: number, test: number, order: number): void {
  for (let k = 1; k <= order; k++) {
    const [p, q] = [t[x + k] as number, t[y + k] as number]
    t[r + k] = test > 0 ? p : test < 0 ? q : test === 0 ? 0.5 * (p + q) : Number.NaN
  }
}

/** Is the exponent a series that does not move? */
function rests(t: Float64Array, at: number, order: number): boolean {
  for (let k = 1; k <= order; k++) if (t[at + k] !== 0) return false
  return true
}

function power(t: Float64Array, r: number, x: number, y: number, value: number, order: number): void {
  const x0 = t[x] as number
  const exponent = t[y] as number
  if (!rests(t, y, order)) {
    // exp(y log x); the base is positive or the value is NaN anyway.
    logarithm(t, r, x, x0, 1, order)
    argument[0] = Math.log(x0)
    for (let k = 1; k <= order; k++) argument[k] = t[r + k] as number
    product(derivatives, 0, argument, 0, t, y, order)
    for (let k = 1; k <= order; k++) {
      let sum = 0
      for (let j = 1; j <= k; j++) sum += j * (derivatives[j] as number) * (t[r + k - j] as number)
      t[r + k] = sum / k
    }
    return
  }
  if (x0 === 0) {
    powerAtZero(t, r, x, exponent, order)
    return
  }
  for (let k = 1; k <= order; k++) {
    let sum = 0
    for (let j = 1; j <= k; j++) sum += (exponent * j - (k - j)) * (t[x + j] as number) * (t[r + k - j] as number)
    t[r + k] = sum / (k * x0)
  }
  t[r] = value
}

/** (x1 s + ...)^c: an ordinary power for integers c >= 0; else 0 below s^c and without bound from there on. */
function powerAtZero(t: Float64Array, r: number, x: number, exponent: number, order: number): void {
  if (Number.isInteger(exponent) && exponent >= 0) {
    argument.fill(0)
    argument[0] = 1
    for (let m = 0; m < Math.min(exponent, order + 1); m++) {
      product(derivatives, 0, argument, 0, t, x, order)
      for (let k = 0; k <= order; k++) argument[k] = derivatives[k] as number
    }
    for (let k = 1; k <= order; k++) t[r + k] = argument[k] as number
    return
  }
  for (let k = 1; k <= order; k++) t[r + k] = k < exponent ? 0 : Number.POSITIVE_INFINITY
}

/** x^y log x as the product of its two factors; 0 at x = 0 as far as x^y vanishes there. */
function powerLog(t: Float64Array, r: number, x: number, y: number, value: number, order: number): void {
  const x0 = t[x] as number
  if (x0 === 0) {
    const exponent = t[y] as number
    for (let k = 1; k <= order; k++) t[r + k] = k < exponent ? 0 : Number.NEGATIVE_INFINITY
    return
  }
  power(t, r, x, y, x0 ** (t[y] as number), order)
  for (let k = 1; k <= order; k++) derivatives[k] = t[r + k] as number
  derivatives[0] = x0 ** (t[y] as number)
  logarithm(t, r, x, x0, 1, order)
  companion[0] = Math.log(x0)
  for (let k = 1; k <= order; k++) {
    let sum = 0
    for (let j = 0; j <= k; j++) sum += (derivatives[j] as number) * (companion[k - j] as number)
    t[r + k] = sum
  }
  t[r] = Number.isNaN(value) ? powerTimesLog(x0, t[y] as number) : value
}
