import { describe, expect, it } from 'vitest'
import {
  boundedAcos,
  boundedAsin,
  boundedAtan,
  boundedBernoulli,
  boundedCircular,
  boundedCosh,
  boundedExp,
  boundedExpm1,
  boundedExprel,
  boundedLog,
  boundedLog1p,
  boundedLog10,
  boundedLogistic,
  boundedSinh,
  boundedTanh,
  circularSlack,
  errorBound,
} from '#shared/numerics/bounded-functions.ts'
import { abs, atan, circular, div, exact, exp, ln2, log, mul, one, pi, sqrt } from './fixed-point.ts'

/** The same points in every run, no structure of their own. */
function* points(count: number, low: number, high: number): Generator<number> {
  for (let k = 1; k <= count; k++) yield low + (high - low) * ((k * 0.6180339887498949) % 1)
}
/** Both signs, sizes spread over powers of ten. */
function* sizes(count: number, from: number, to: number): Generator<number> {
  for (const exponent of points(count, from, to)) {
    yield 10 ** exponent
    yield -(10 ** exponent)
  }
}

/** Every computed value within its bound (less the two roundings to spare) of the 1150-bit value. */
function check(
  values: Iterable<number>,
  computed: (x: number) => number,
  reference: (x: bigint) => bigint,
  bound: number,
  slack = 0,
) {
  for (const x of values) {
    const truth = reference(exact(x))
    const error = abs(exact(computed(x)) - truth)
    const allowed = mul(exact(bound - 2 ** -52), abs(truth)) + exact(slack) + exact(1e-323)
    if (error > allowed) expect.fail(`x = ${x}: off by ${Number(div(error, abs(truth) + 1n) >> 1100n) / 2 ** 100}`)
  }
}

const expm1 = (x: bigint) => exp(x) - one

describe('functions with proved bounds', () => {
  it('reference values themselves: pi, ln 2, e and identities agree', () => {
    expect(Number(pi >> 1148n) / 2 ** 52).toBe(Math.PI)
    expect(Number(ln2 >> 1148n) / 2 ** 52).toBeCloseTo(Math.LN2, 15)
    expect(abs(log(exp(exact(1.3))) - exact(1.3)) < one >> 1000n).toBe(true)
    expect(abs(4n * atan(one) - pi) < one >> 1000n).toBe(true)
    const [s, c] = circular(exact(12345.678))
    expect(abs(mul(s, s) + mul(c, c) - one) < one >> 1000n).toBe(true)
  })

  it('exp, also near overflow and in the subnormal range', () => {
    check([...points(300, -2, 2), ...points(200, -708, 709.7), 0, 1e-300, -1e-17], boundedExp, exp, errorBound.exp)
    check([...points(60, -745, -708)], boundedExp, exp, errorBound.exp, 1e-323)
    expect([boundedExp(-800), boundedExp(710)]).toEqual([0, Number.POSITIVE_INFINITY])
    expect(boundedExp(709.78)).toBeLessThan(Number.POSITIVE_INFINITY)
  })

  it('expm1', () => {
    check(
      [...points(300, -1.2, 1.2), ...points(100, -45, 709), ...sizes(60, -300, 0)],
      boundedExpm1,
      expm1,
      errorBound.expm1,
    )
  })

  it('log, log10 and log1p', () => {
    const positive = [...points(300, 0.3, 3), ...[...sizes(150, -307, 308)].filter((x) => x > 0), 5e-324, 1e-310]
    check(positive, boundedLog, log, errorBound.log)
    const ten = log(10n * one)
    check(positive, boundedLog10, (x) => div(log(x), ten), errorBound.log10)
    const shifted = [...points(300, -0.99, 3), ...sizes(60, -300, -1), 1e10, 1e300, -1 + 2 ** -53, -0.9999999]
    check(shifted, boundedLog1p, (x) => log(one + x), errorBound.log1p)
    expect([boundedLog(1), boundedLog(0), boundedLog1p(-1)]).toEqual([
      0,
      Number.NEGATIVE_INFINITY,
      Number.NEGATIVE_INFINITY,
    ])
  })

  it('sin and cos, with next to no value near multiples of pi/2 as well', () => {
    const near = Array.from({ length: 60 }, (_, k) => ((k * 9973 + 1) * Math.PI) / 2)
    const values = [...points(300, -7, 7), ...points(150, -1e6, 1e6), ...near.filter((x) => x < 1e6)]
    check(
      values,
      (x) => boundedCircular(x, 0),
      (x) => circular(x)[0],
      errorBound.circular,
      circularSlack,
    )
    check(
      values,
      (x) => boundedCircular(x, 1),
      (x) => circular(x)[1],
      errorBound.circular,
      circularSlack,
    )
    const small = [...points(100, -0.785, 0.785), ...sizes(40, -300, -1)]
    check(
      small,
      (x) => boundedCircular(x, 0),
      (x) => circular(x)[0],
      errorBound.circular,
    )
  })

  it('atan, asin and acos', () => {
    check([...points(120, -3, 3), ...sizes(40, -12, 15)], boundedAtan, atan, errorBound.atan)
    const inside = [...points(100, -1, 1), 1 - 2 ** -53, -1 + 2 ** -53, 1e-9, 0.5, -0.5]
    const complement = (x: bigint) => sqrt(mul(one - x, one + x))
    check(inside, boundedAsin, (x) => atan(div(x, complement(x))), errorBound.asin)
    check(
      inside,
      boundedAcos,
      (x) => (x > 0n ? atan(div(complement(x), x)) : pi / 2n - atan(div(x, complement(x)))),
      errorBound.acos,
    )
    expect([boundedAcos(1), boundedAsin(0)]).toEqual([0, 0])
  })

  it('hyperbolic functions and the logistic', () => {
    const values = [...points(200, -4, 4), ...points(60, -30, 30), ...sizes(40, -300, 0)]
    check([...values, ...points(40, -710, 710)], boundedSinh, (x) => (exp(x) - exp(-x)) / 2n, errorBound.sinh)
    check([...values, ...points(40, -710, 710)], boundedCosh, (x) => (exp(x) + exp(-x)) / 2n, errorBound.cosh)
    check(values, boundedTanh, (x) => div(exp(2n * x) - one, exp(2n * x) + one), errorBound.tanh)
    check([...values, ...points(40, -700, 700)], boundedLogistic, (x) => div(exp(x), one + exp(x)), errorBound.logistic)
  })

  it('exprel and z/(e^z - 1)', () => {
    const values = [...points(200, -3, 3), ...points(80, -600, 600), ...sizes(60, -200, 0)]
    check(values, boundedExprel, (x) => div(expm1(x), x), errorBound.exprel)
    check(values, boundedBernoulli, (x) => div(x, expm1(x)), errorBound.bernoulli)
    expect([boundedExprel(0), boundedBernoulli(0)]).toEqual([1, 1])
  })
})
