import { describe, expect, it } from 'vitest'
import { bernoulliInterval, exprelInterval } from '#shared/numerics/interval-quotients.ts'
import {
  bernoulli,
  bernoulliDerivative,
  bernoulliTaylor,
  exprel,
  exprelDerivative,
  exprelTaylor,
} from '#shared/numerics/smooth-quotients.ts'
import { abs, div, exact, exp, mul, one, toNumber } from './fixed-point.ts'

const maxOrder = 8
const at = (a: ArrayLike<number>, i: number): number => a[i] ?? Number.NaN

/** Taylor coefficients of numerator/denominator by long division of power series, to some 1000 bits. */
function seriesQuotient(numerator: bigint[], denominator: bigint[]): bigint[] {
  const out: bigint[] = []
  for (let k = 0; k <= maxOrder; k++) {
    let sum = numerator[k] ?? 0n
    for (let j = 1; j <= k; j++) sum -= mul(denominator[j] ?? 0n, out[k - j] ?? 0n)
    out.push(div(sum, denominator[0] ?? one))
  }
  return out
}

/** Coefficients of e^(x+s) - 1 in s. */
function shiftedExponential(x: bigint): bigint[] {
  const top = exp(x)
  let factorial = 1n
  return Array.from({ length: maxOrder + 1 }, (_, k) => {
    if (k > 0) factorial *= BigInt(k)
    return top / factorial - (k === 0 ? one : 0n)
  })
}

const bernoulliSeries = (x: bigint) => seriesQuotient([x, one], shiftedExponential(x))
const exprelSeries = (x: bigint) => seriesQuotient(shiftedExponential(x), [x, one])

const places = [1e-30, 1e-9, 1e-3, 0.1, 0.29, 0.31, 0.7, 0.99, 1.01, 2, 2.49, 2.51, 2.99, 3.01, 5, 9, 30, 200].flatMap(
  (x) => [x, -x],
)

describe('exprel and z/(e^z - 1)', () => {
  it('have their limits at zero, with Bernoulli numbers as derivatives (B1 = -1/2, B2 = 1/6, B4 = -1/30, B6 = 1/42)', () => {
    expect([exprel(0), bernoulli(0)]).toEqual([1, 1])
    ;[1, -1 / 2, 1 / 6, 0, -1 / 30, 0, 1 / 42].forEach((b, k) => {
      expect(bernoulliDerivative(0, k)).toBeCloseTo(b, 15)
    })
    ;[1, 1 / 2, 1 / 3, 1 / 4, 1 / 5, 1 / 6].forEach((e, k) => {
      expect(exprelDerivative(0, k)).toBeCloseTo(e, 15)
    })
  })

  it('agree with long division of exact series to the eighth order', () => {
    const [b, e] = [new Float64Array(9), new Float64Array(9)]
    for (const x of places) {
      bernoulliTaylor(x, maxOrder, b)
      exprelTaylor(x, maxOrder, e)
      const [bTruth, eTruth] = [bernoulliSeries(exact(x)), exprelSeries(exact(x))]
      for (let k = 0; k <= maxOrder; k++) {
        // Largest values of the coefficients over all z >= 0: |B_k|/k! and less; a value may pass through zero.
        const scale = [1, 0.5, 1 / 12, 7e-3, 1.4e-3, 1.8e-4, 3.3e-5, 4.6e-6, 8.3e-7][k] ?? 0
        const bound = k <= 1 ? 4e-15 : 2e-13
        const truth = toNumber(bTruth[k] ?? 0n)
        expect(Math.abs(at(b, k) - truth)).toBeLessThan(bound * Math.max(scale, Math.abs(truth)))
        const other = toNumber(eTruth[k] ?? 0n)
        expect(Math.abs(at(e, k) - other)).toBeLessThan(1e-13 * Math.abs(other))
      }
    }
  })

  it('keep relative accuracy far out, where the value is next to nothing', () => {
    for (const z of [20, 100, 600]) {
      const truth = bernoulliSeries(exact(z))
      expect(bernoulliDerivative(z, 1) / toNumber(truth[1] ?? 0n)).toBeCloseTo(1, 13)
    }
    expect(bernoulli(800)).toBe(0)
    expect(bernoulli(-800)).toBe(800)
    expect(bernoulliDerivative(-800, 1)).toBe(-1)
  })

  it('are enclosed over intervals with all their derivatives', () => {
    const [lo, hi] = [new Float64Array(2), new Float64Array(2)]
    const factorials = [1, 1, 2, 6, 24, 120, 720, 5040]
    for (const x of places) {
      for (const width of [0, 1e-6, 0.3, 2]) {
        for (let k = 0; k <= 6; k++) {
          for (const [enclose, series] of [
            [bernoulliInterval, bernoulliSeries],
            [exprelInterval, exprelSeries],
          ] as const) {
            lo[0] = x - 0.4 * width
            hi[0] = x + 0.6 * width
            enclose(lo, hi, 1, 0, k)
            const truth = (series(exact(x))[k] ?? 0n) * BigInt(at(factorials, k))
            expect(exact(at(lo, 1)) <= truth && truth <= exact(at(hi, 1))).toBe(true)
            // Tight where the interval is a point.
            if (width === 0 && k <= 3) {
              const allowed = mul(exact(1e-11), abs(truth)) + exact(k < 2 ? 1e-14 : 1e-11)
              expect(exact(at(hi, 1)) - exact(at(lo, 1)) <= allowed).toBe(true)
            }
          }
        }
      }
    }
  })
})
