/**
 * Elementary functions with proved error bounds, for interval arithmetic. `Math.exp` and the like carry no guarantee
 * (the language leaves their accuracy open), so the functions here use nothing but + - * / and sqrt, which IEEE 754
 * rounds correctly, and each states a bound for |result - true| / |true| in units of u = 2^-53.
 *
 * The bounds are sums of first-order rounding errors, rounded up by half or more; second-order terms (u² = 1e-32) lie
 * far within that. Argument reductions follow Cody & Waite, Software Manual for the Elementary Functions; that
 * k*LN2_HIGH and k*PIO2_HIGH are exact holds because those constants have 32 and 33 significant bits and k at most 11
 * and 20; that the following subtraction is exact, because its result is a multiple of the unit of the larger operand
 * and not larger than it (Sterbenz). Every bound is checked against 300-bit values in
 * tests/shared/numerics/bounded-functions.test.ts.
 */

/** Half the distance from 1 to the next double. */
export const unitRoundoff = 2 ** -53

const u = unitRoundoff

/** Proved relative error bounds, each with two roundings to spare for the widening itself. */
export const errorBound = {
  exp: 8 * u,
  expm1: 12 * u,
  log: 12 * u,
  log10: 16 * u,
  log1p: 16 * u,
  /** Plus `circularSlack` absolute where the argument was reduced (|x| > pi/4). */
  circular: 8 * u,
  atan: 18 * u,
  asin: 26 * u,
  acos: 26 * u,
  sinh: 18 * u,
  cosh: 18 * u,
  tanh: 16 * u,
  logistic: 12 * u,
  exprel: 16 * u,
  bernoulli: 18 * u,
  /** Absolute below 2.5 in size, relative above. */
  bernoulliSlopeNear: 10 * u,
  bernoulliSlopeFar: 26 * u,
} as const

/** Absolute error of sin and cos that comes from the reduction by multiples of pi/2 (see `reduceCircular`). */
export const circularSlack = 2e-20

/** Beyond this |x| sin and cos are not evaluated: their enclosure is [-1, 1]. */
export const circularLimit = 1e6

const LN2_HIGH = 0.6931471803691238
const LN2_LOW = 1.9082149292705877e-10
const PIO2_HIGH = 1.5707963267341256
const PIO2_LOW = 6.077100506506192e-11

/** Powers of two from 2^-1074 to 2^1023, made by doublings, which are exact. */
const powersOfTwo = makePowersOfTwo()

function makePowersOfTwo(): Float64Array {
  const table = new Float64Array(2098)
  let power = 5e-324
  for (let k = 0; k < 2098; k++) {
    table[k] = power
    power *= 2
  }
  return table
}

/** v * 2^k for |k| <= 2000, in two steps where one would overflow or lose digits twice. */
function scale(v: number, k: number): number {
  if (k > 1023) return v * (powersOfTwo[2097] as number) * (powersOfTwo[k - 1023 + 1074] as number)
  if (k < -1022) return v * (powersOfTwo[k + 1000 + 1074] as number) * (powersOfTwo[74] as number)
  return v * (powersOfTwo[k + 1074] as number)
}

/**
 * (e^r - 1 - r)/r² for |r| <= 0.347 by its series to r^13: truncated terms below 5e-18 of e^r. All partial sums lie
 * within a few per cent of 1/2: relative error below 3u.
 */
function expTail(r: number): number {
  return (
    1 / 2 +
    r *
      (1 / 6 +
        r *
          (1 / 24 +
            r *
              (1 / 120 +
                r *
                  (1 / 720 +
                    r *
                      (1 / 5040 +
                        r *
                          (1 / 40320 +
                            r *
                              (1 / 362880 +
                                r * (1 / 3628800 + r * (1 / 39916800 + r * (1 / 479001600 + r / 6227020800))))))))))
  )
}

/**
 * e^x for -745.2 < x < 709.8 (0 and Infinity outside). With r = x - k ln 2, |r| <= 0.347: r itself carries 0.35u, the
 * tail 0.4u, two additions 1.5u in relation to e^r >= 0.707: in all below 6u. Results below 2^-1022 have, besides, an
 * absolute error of 2^-1074.
 */
export function boundedExp(x: number): number {
  if (x > 709.8) return Number.POSITIVE_INFINITY
  if (x < -745.2) return 0
  const k = Math.round(x * Math.LOG2E)
  const r = x - k * LN2_HIGH - k * LN2_LOW
  return scale(1 + (r + r * r * expTail(r)), k)
}

/**
 * e^x - 1. Without reduction r + r² tail has below 3u; else 2^k (e^r - 1) + (2^k - 1), where at worst (k = 1, r = -0.347)
 * errors of 2.9u stand against a result of 0.41: below 10u.
 */
export function boundedExpm1(x: number): number {
  if (x > 709.8) return Number.POSITIVE_INFINITY
  if (x < -40) return -1
  const k = Math.round(x * Math.LOG2E)
  if (k === 0) return x + x * x * expTail(x)
  const r = x - k * LN2_HIGH - k * LN2_LOW
  const small = r + r * r * expTail(r)
  if (k > 1000) return scale(1 + small, k)
  return scale(small, k) + (scale(1, k) - 1)
}

const words = new Uint32Array(2)
const double = new Float64Array(words.buffer)
double[0] = 1
/** Index of the half that holds sign and exponent. */
const upperHalf = words[1] === 0x3ff00000 ? 1 : 0

/** log(1 + f)/(2 s) - 1 with s = f/(2 + f), |s| <= 0.1731: series in z = s² to z^11, truncated below 1e-18. */
function logTail(z: number): number {
  return (
    z *
    (1 / 3 +
      z *
        (1 / 5 +
          z *
            (1 / 7 +
              z *
                (1 / 9 +
                  z * (1 / 11 + z * (1 / 13 + z * (1 / 15 + z * (1 / 17 + z * (1 / 19 + z * (1 / 21 + z / 23))))))))))
  )
}

/**
 * log x, x > 0. x = 2^k m with m in [0.705, 1.41): m - 1 is exact, log m has below 5u; with k other than 0 the
 * result is at least 0.343 and the parts add 7.1u: below 10u. 0 exactly at 1.
 */
export function boundedLog(x: number): number {
  if (x === Number.POSITIVE_INFINITY) return x
  if (x === 0) return Number.NEGATIVE_INFINITY
  let shift = 0
  double[0] = x
  if ((words[upperHalf] as number) < 0x00100000) {
    double[0] = x * 18014398509481984 // 2^54
    shift = -54
  }
  const high = words[upperHalf] as number
  let k = (high >>> 20) - 1023 + shift
  words[upperHalf] = (high & 0x000fffff) | 0x3ff00000
  let m = double[0] as number
  if (m >= 1.41) {
    m /= 2
    k++
  }
  const f = m - 1
  const s = f / (2 + f)
  const inner = 2 * s + 2 * s * logTail(s * s)
  return k === 0 ? inner : k * LN2_HIGH + (k * LN2_LOW + inner)
}

/** log10 x = log x times a constant that carries one rounding: below 13u. */
export function boundedLog10(x: number): number {
  return boundedLog(x) * Math.LOG10E
}

/** log(1 + x), x > -1: directly by the series for small x (5u), else log w + e/w with w + e = 1 + x exactly: below 13u. */
export function boundedLog1p(x: number): number {
  if (x > -1e-20 && x < 1e-20) return x
  if (x > -0.29 && x < 0.29) {
    const s = x / (2 + x)
    return 2 * s + 2 * s * logTail(s * s)
  }
  if (x === Number.POSITIVE_INFINITY) return x
  const w = 1 + x
  if (w === 0) return Number.NEGATIVE_INFINITY
  const e = Math.abs(x) <= 1 ? 1 - w + x : x - w + 1
  return boundedLog(w) + e / w
}

/** sin r for |r| <= 0.786: r + r z Q with |z Q| < 0.104, below 3u. */
function sinKernel(r: number): number {
  const z = r * r
  return (
    r -
    r *
      z *
      (1 / 6 -
        z *
          (1 / 120 -
            z *
              (1 / 5040 -
                z *
                  (1 / 362880 -
                    z * (1 / 39916800 - z * (1 / 6227020800 - z * (1 / 1307674368000 - z / 355687428096000)))))))
  )
}

/** cos r for |r| <= 0.786: 1 - (z/2 - z² P), result above 0.707, below 4u. */
function cosKernel(r: number): number {
  const z = r * r
  return (
    1 -
    z *
      (1 / 2 -
        z *
          (1 / 24 -
            z *
              (1 / 720 -
                z *
                  (1 / 40320 -
                    z *
                      (1 / 3628800 -
                        z *
                          (1 / 479001600 - z * (1 / 87178291200 - z * (1 / 20922789888000 - z / 6402373705728000))))))))
  )
}

/**
 * sin (quarter = 0) or cos (quarter = 1) of x, |x| <= 1e6. With r = x - k pi/2: the rounding of r weighs less than 1u,
 * that of k*PIO2_LOW and of the constants less than 2e-20 absolute: below 6u relative plus `circularSlack`.
 */
export function boundedCircular(x: number, quarter: 0 | 1): number {
  const k = Math.abs(x) <= 0.785 ? 0 : Math.round(x / (Math.PI / 2))
  const r = k === 0 ? x : x - k * PIO2_HIGH - k * PIO2_LOW
  switch ((k + quarter) & 3) {
    case 0:
      return sinKernel(r)
    case 1:
      return cosKernel(r)
    case 2:
      return -sinKernel(r)
    default:
      return -cosKernel(r)
  }
}

/**
 * atan x: reciprocal above 1, two half-angle steps t -> t/(1 + sqrt(1 + t²)) (4u each, arguments never more
 * ill-conditioned than 1), then the series for t <= 0.199: below 16u.
 */
export function boundedAtan(x: number): number {
  const size = Math.abs(x)
  if (size < 1e-10) return x
  const inverted = size > 1
  let t = inverted ? 1 / size : size
  t /= 1 + Math.sqrt(1 + t * t)
  t /= 1 + Math.sqrt(1 + t * t)
  const z = t * t
  const tail =
    z *
    (1 / 3 -
      z *
        (1 / 5 -
          z *
            (1 / 7 -
              z *
                (1 / 9 -
                  z * (1 / 11 - z * (1 / 13 - z * (1 / 15 - z * (1 / 17 - z * (1 / 19 - z * (1 / 21 - z / 23))))))))))
  const angle = 4 * (t - t * tail)
  const result = inverted ? Math.PI / 2 - angle : angle
  return x < 0 ? -result : result
}

/** asin x, |x| < 1: atan of x/sqrt((1-x)(1+x)), whose argument carries 3.5u: below 24u. */
export function boundedAsin(x: number): number {
  if (x === 1) return Math.PI / 2
  if (x === -1) return -Math.PI / 2
  return boundedAtan(x / Math.sqrt((1 - x) * (1 + x)))
}

/** acos x: 2 atan sqrt((1-x)/(1+x)): below 24u; 0 exactly at 1. */
export function boundedAcos(x: number): number {
  if (x === -1) return Math.PI
  return 2 * boundedAtan(Math.sqrt((1 - x) / (1 + x)))
}

/** sinh x from E = e^|x| - 1 as (E + E/(1+E))/2, or e^|x|/2 above 22: below 16u. */
export function boundedSinh(x: number): number {
  const size = Math.abs(x)
  let result: number
  if (size > 22) result = halfExp(size)
  else {
    const e = boundedExpm1(size)
    result = (e + e / (1 + e)) / 2
  }
  return x < 0 ? -result : result
}

/** cosh x: below 16u. */
export function boundedCosh(x: number): number {
  const size = Math.abs(x)
  if (size > 22) return halfExp(size)
  const e = boundedExp(size)
  return (e + 1 / e) / 2
}

/** e^x/2 without overflow before its time: two factors e^(x/2), 6u each. */
function halfExp(x: number): number {
  const half = boundedExp(x / 2)
  return (half / 2) * half
}

/** tanh x from E = e^(2|x|) - 1 as E/(E + 2): below 13u; 1 above 20, where 1 - tanh < 1e-17. */
export function boundedTanh(x: number): number {
  const size = Math.abs(x)
  if (size > 20) return x < 0 ? -1 : 1
  const e = boundedExpm1(2 * size)
  const result = e / (e + 2)
  return x < 0 ? -result : result
}

/** 1/(1 + e^-x), for negative x as e^x/(1 + e^x): below 10u. */
export function boundedLogistic(x: number): number {
  if (x >= 0) return 1 / (1 + boundedExp(-x))
  const e = boundedExp(x)
  return e / (1 + e)
}

/** (e^x - 1)/x: below 12u. */
export function boundedExprel(x: number): number {
  return x === 0 ? 1 : boundedExpm1(x) / x
}

/** z/(e^z - 1), above 1 as z e^-z/(1 - e^-z): below 14u. */
export function boundedBernoulli(z: number): number {
  if (z === 0) return 1
  if (z === Number.NEGATIVE_INFINITY) return Number.POSITIVE_INFINITY
  if (z > 745) return 0
  if (z <= 1) return z / boundedExpm1(z)
  const e = boundedExp(-z)
  return (z * e) / (1 - e)
}
