import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import * as interval from '#shared/numerics/interval.ts'
import * as functions from '#shared/numerics/interval-functions.ts'
import { atan, circular, div, exact, exp, log, mul, one, sqrt } from './fixed-point.ts'

const at = (a: ArrayLike<number>, i: number): number => a[i] ?? Number.NaN
type Bounds = [number, number]
type Operation = (lo: Float64Array, hi: Float64Array, r: number, x: number, y: number) => unknown

function apply(operation: Operation, x: Bounds, y: Bounds = [0, 0]): { bounds: Bounds; coverage: unknown } {
  const [lo, hi] = [Float64Array.of(x[0], y[0], 0), Float64Array.of(x[1], y[1], 0)]
  const coverage = operation(lo, hi, 2, 0, 1)
  return { bounds: [at(lo, 2), at(hi, 2)], coverage }
}

/** Ordinary sizes, tiny and huge ones, zeros. */
const number = fc.oneof(
  fc.double({ min: -10, max: 10, noNaN: true }),
  fc.double({ min: -1e150, max: 1e150, noNaN: true }),
  fc.double({ min: -1e-150, max: 1e-150, noNaN: true }),
  fc.constantFrom(0, 1, -1, 2, 0.5),
)
const bounds = fc.tuple(number, number).map(([a, b]): Bounds => [Math.min(a, b), Math.max(a, b)])
/** An interval and a member of it. */
const withMember = fc
  .tuple(bounds, fc.double({ min: 0, max: 1, noNaN: true }))
  .map(([[a, b], share]): [Bounds, number] => [[a, b], Math.min(b, Math.max(a, a + share * (b / 2 - a / 2) * 2))])
const ordinary = (low: number, high: number) =>
  fc
    .tuple(
      fc.double({ min: low, max: high, noNaN: true }),
      fc.double({ min: low, max: high, noNaN: true }),
      fc.double({ min: 0, max: 1, noNaN: true }),
    )
    .map(([a, b, share]): [Bounds, number] => {
      const [from, to] = [Math.min(a, b), Math.max(a, b)]
      return [[from, to], Math.min(to, Math.max(from, from + share * (to - from)))]
    })

const holds = ([low, high]: Bounds, truth: bigint) => {
  const above = low === Number.NEGATIVE_INFINITY || exact(low) <= truth
  const below = high === Number.POSITIVE_INFINITY || exact(high) >= truth
  return above && below
}

describe('interval arithmetic', () => {
  it('encloses exact sums, differences, products and quotients', () => {
    fc.assert(
      fc.property(withMember, withMember, ([x, u], [y, v]) => {
        const [a, b] = [exact(u), exact(v)]
        expect(holds(apply(interval.addInterval, x, y).bounds, a + b)).toBe(true)
        expect(holds(apply(interval.subInterval, x, y).bounds, a - b)).toBe(true)
        expect(holds(apply(interval.mulInterval, x, y).bounds, mul(a, b))).toBe(true)
        if (v !== 0 && Math.abs(u / v) < 1e100)
          expect(holds(apply(interval.divInterval, x, y).bounds, div(a, b))).toBe(true)
      }),
      { numRuns: 2000 },
    )
  })

  it('squares sharply, keeps exact zeros, and is never more than two units wide on points', () => {
    expect(apply((lo, hi, r, x) => interval.mulInterval(lo, hi, r, x, x), [-2, 1]).bounds[0]).toBe(0)
    expect(apply(interval.addInterval, [0, 0], [0, 0]).bounds).toEqual([0, 0])
    expect(apply(interval.mulInterval, [0, 0], [-5, Number.POSITIVE_INFINITY]).bounds).toEqual([0, 0])
    const [low, high] = apply(interval.mulInterval, [3.3, 3.3], [1.7, 1.7]).bounds
    expect(high - low).toBeLessThan(5.61 * 2 ** -51)
  })

  it('takes unbounded intervals as sets of real numbers, without NaN', () => {
    const everything: Bounds = [Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY]
    const list: Bounds[] = [
      everything,
      [0, Number.POSITIVE_INFINITY],
      [Number.NEGATIVE_INFINITY, 0],
      [0, 0],
      [-1, 2],
      [1e308, 1.7e308],
    ]
    const operations = [
      interval.addInterval,
      interval.subInterval,
      interval.mulInterval,
      interval.divInterval,
      interval.shareInterval,
      functions.powInterval,
    ]
    for (const operation of operations) {
      for (const x of list) {
        for (const y of list) {
          const [low, high] = apply(operation, x, y).bounds
          expect(low).toBeLessThanOrEqual(high)
        }
      }
    }
    expect(apply(interval.addInterval, [1e308, 1e308], [1e308, 1e308]).bounds).toEqual([
      Number.MAX_VALUE,
      Number.POSITIVE_INFINITY,
    ])
    expect(apply(interval.mulInterval, everything, [1, 2]).bounds).toEqual(everything)
  })

  it('says where a quotient is defined, and leaves the half-line that is possible', () => {
    const half = apply(interval.divInterval, [1, 2], [0, 4])
    expect(half.bounds[0]).toBeCloseTo(0.25, 15)
    expect([half.bounds[0] < 0.25, half.bounds[1], half.coverage]).toEqual([true, Number.POSITIVE_INFINITY, 1])
    expect(apply(interval.divInterval, [1, 2], [-1, 1]).bounds).toEqual([
      Number.NEGATIVE_INFINITY,
      Number.POSITIVE_INFINITY,
    ])
    expect(apply(interval.divInterval, [1, 2], [0, 0]).coverage).toBe(2)
    expect(apply(interval.divInterval, [0, 0], [-1, 1]).bounds).toEqual([0, 0])
    expect(apply(functions.sqrtInterval, [-2, -1]).coverage).toBe(2)
    expect(apply(functions.logInterval, [-1, 1]).coverage).toBe(1)
    expect(apply(functions.asinInterval, [0, 2]).coverage).toBe(1)
    expect(apply(functions.tanInterval, [1, 2])).toEqual({
      bounds: [Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY],
      coverage: 1,
    })
    expect(apply(interval.signInterval, [-1, 1])).toEqual({ bounds: [-1, 1], coverage: 1 })
    expect(apply(interval.signInterval, [1, 2])).toEqual({ bounds: [1, 1], coverage: 0 })
    expect(apply(interval.jumpInterval, [0, 2]).bounds).toEqual([Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY])
    expect(apply(functions.powInterval, [-2, -1], [0.5, 0.5]).coverage).toBe(2)
  })

  it('bounds saturation terms at their corners: x/(x + 2) over 0 to 4 is 0 to 2/3', () => {
    const [low, high] = apply(interval.shareInterval, [0, 4], [2, 2]).bounds
    expect(low).toBe(0)
    expect(high).toBeCloseTo(2 / 3, 14)
    fc.assert(
      fc.property(ordinary(-5, 5), ordinary(-5, 5), ([x, u], [y, v]) => {
        if (Math.abs(u + v) < 1e-6) return
        expect(holds(apply(interval.shareInterval, x, y).bounds, div(exact(u), exact(u) + exact(v)))).toBe(true)
      }),
      { numRuns: 1000 },
    )
  })
})

describe('elementary functions over intervals', () => {
  const complement = (x: bigint) => sqrt(mul(one - x, one + x))
  const cases: [string, Operation, (x: bigint) => bigint, number, number][] = [
    ['exp', functions.expInterval, exp, -30, 30],
    ['expm1', functions.expm1Interval, (x) => exp(x) - one, -5, 5],
    ['log', functions.logInterval, log, 1e-6, 20],
    ['log10', functions.log10Interval, (x) => div(log(x), log(10n * one)), 1e-6, 20],
    ['log1p', functions.log1pInterval, (x) => log(one + x), -0.999, 9],
    ['sqrt', functions.sqrtInterval, sqrt, 0, 9],
    [
      'sin',
      (lo, hi, r, x) => {
        functions.circularInterval(lo, hi, r, x, 0)
      },
      (x) => circular(x)[0],
      -8,
      8,
    ],
    [
      'cos',
      (lo, hi, r, x) => {
        functions.circularInterval(lo, hi, r, x, 1)
      },
      (x) => circular(x)[1],
      -8,
      8,
    ],
    [
      'tan',
      functions.tanInterval,
      (x) => {
        const [s, c] = circular(x)
        return div(s, c)
      },
      -4,
      4,
    ],
    ['asin', functions.asinInterval, (x) => atan(div(x, complement(x))), -0.99, 0.99],
    ['acos', functions.acosInterval, (x) => 2n * atan(div(complement(x), one + x)), -0.99, 0.99],
    ['atan', functions.atanInterval, atan, -9, 9],
    ['sinh', functions.sinhInterval, (x) => (exp(x) - exp(-x)) / 2n, -5, 5],
    ['cosh', functions.coshInterval, (x) => (exp(x) + exp(-x)) / 2n, -5, 5],
    ['tanh', functions.tanhInterval, (x) => div(exp(2n * x) - one, exp(2n * x) + one), -5, 5],
    ['logistic', functions.logisticInterval, (x) => div(exp(x), one + exp(x)), -40, 40],
    [
      'cube',
      (lo, hi, r, x) => {
        interval.oddPowerInterval(lo, hi, r, x, 3)
      },
      (x) => mul(x, mul(x, x)),
      -5,
      5,
    ],
    ['abs', interval.absInterval, (x) => (x < 0n ? -x : x), -5, 5],
  ]
  for (const [name, operation, reference, low, high] of cases) {
    it(`encloses ${name} of every member, to a few units on points`, () => {
      fc.assert(
        fc.property(ordinary(low, high), ([x, u]) => {
          const truth = reference(exact(u))
          expect(holds(apply(operation, x).bounds, truth)).toBe(true)
          const [a, b] = apply(operation, [u, u]).bounds
          expect(holds([a, b], truth)).toBe(true)
          expect(b - a).toBeLessThan(1e-13 * Math.max(Math.abs(a), Math.abs(b)) + (name === 'tan' ? 1e-13 : 1e-19))
        }),
        { numRuns: 120 },
      )
    })
  }

  it('finds the turning points of sin and cos', () => {
    const sin: Operation = (lo, hi, r, x) => {
      functions.circularInterval(lo, hi, r, x, 0)
    }
    expect(apply(sin, [1, 2]).bounds[1]).toBe(1)
    expect(apply(sin, [4, 5]).bounds[0]).toBe(-1)
    expect(apply(sin, [1, 8]).bounds).toEqual([-1, 1])
    expect(apply(sin, [7, 7.5]).bounds[1]).toBeLessThan(1)
    expect(apply(sin, [0, 0]).bounds).toEqual([0, 0])
    expect(apply(sin, [1e300, 1e300]).bounds).toEqual([-1, 1])
  })

  it('takes powers of negative bases where the exponent is an integer only', () => {
    const [low, high] = apply(functions.powInterval, [-2, 1], [2, 2]).bounds
    expect(low).toBe(0)
    expect(high).toBeCloseTo(4, 12)
    expect(apply(functions.powInterval, [-2, 1], [-1, -1]).bounds).toEqual([
      Number.NEGATIVE_INFINITY,
      Number.POSITIVE_INFINITY,
    ])
    expect(apply(functions.powInterval, [0, 4], [1.5, 1.5]).bounds[0]).toBe(0)
    expect(apply(functions.powInterval, [0, 4], [1.5, 1.5]).bounds[1]).toBeCloseTo(8, 12)
    // An exponent that may be 3 keeps (-2)^3.
    expect(apply(functions.powInterval, [-2, -2], [2.5, 3.5]).bounds[0]).toBeCloseTo(-8, 12)
    fc.assert(
      fc.property(ordinary(0.01, 20), ordinary(-3, 3), ([x, u], [y, v]) => {
        const truth = exp(mul(exact(v), log(exact(u))))
        expect(holds(apply(functions.powInterval, x, y).bounds, truth)).toBe(true)
        expect(holds(apply(functions.powlogInterval, x, y).bounds, mul(truth, log(exact(u))))).toBe(true)
      }),
      { numRuns: 150 },
    )
  })
})
