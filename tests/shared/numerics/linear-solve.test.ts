import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import {
  createComplexLu,
  factorComplexLu,
  factorShifted,
  solveComplexLu,
  solveComplexLuAdjoint,
} from '#shared/numerics/complex-solve.ts'
import {
  createLu,
  determinant,
  determinantSign,
  factorBordered,
  factorLu,
  invertLu,
  norm1,
  reciprocalCondition,
  solveLinear,
  solveLu,
  solveLuTransposed,
} from '#shared/numerics/linear-solve.ts'

const entries = (count: number) =>
  fc.array(fc.double({ min: -1, max: 1, noNaN: true }), { minLength: count, maxLength: count })

const times = (a: Float64Array, x: Float64Array, n: number) =>
  Float64Array.from({ length: n }, (_, i) => x.reduce((sum, v, j) => sum + (a[i * n + j] ?? 0) * v, 0))

const transposed = (a: Float64Array, n: number) =>
  Float64Array.from({ length: n * n }, (_, k) => a[(k % n) * n + Math.floor(k / n)] ?? 0)

/** Diagonally dominant, so that the residual bound below holds without looking at the condition. */
const dominant = (values: number[], n: number) =>
  Float64Array.from(values, (v, k) => (k % (n + 1) === 0 ? v + 2 * n : v))

describe('real LU', () => {
  it('solves A x = b and its transpose to rounding', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 8 }).chain((n) => fc.tuple(fc.constant(n), entries(n * n), entries(n))),
        ([n, a, b]) => {
          const matrix = dominant(a, n)
          const ws = createLu(n)
          expect(factorLu(ws, matrix)).toBe(true)
          const x = Float64Array.from(b)
          solveLu(ws, x)
          times(matrix, x, n).forEach((value, i) => {
            expect(Math.abs(value - (b[i] ?? 0))).toBeLessThan(1e-13)
          })
          const y = Float64Array.from(b)
          solveLuTransposed(ws, y)
          times(transposed(matrix, n), y, n).forEach((value, i) => {
            expect(Math.abs(value - (b[i] ?? 0))).toBeLessThan(1e-13)
          })
        },
      ),
    )
  })

  it('keeps every digit when one row is in units a million million times larger', () => {
    // x = 1, y = 2 exactly; without row scaling the pivot 1e14 would be chosen and y come out with three digits.
    const x = solveLinear(Float64Array.of(1e14, 1e28, 3, 1), Float64Array.of(1e14 + 2e28, 5))
    expect(x?.[0]).toBeCloseTo(1, 12)
    expect(x?.[1]).toBeCloseTo(2, 12)
  })

  it('reports exactly singular and non-finite matrices and takes row exchanges into the determinant', () => {
    const ws = createLu(2)
    expect(factorLu(ws, Float64Array.of(1, 2, 2, 4))).toBe(false)
    expect(determinantSign(ws)).toBe(0)
    expect(factorLu(ws, Float64Array.of(1, Number.NaN, 2, 4))).toBe(false)
    expect(factorLu(ws, Float64Array.of(0, 2, 3, 0))).toBe(true)
    expect(determinant(ws)).toBe(-6)
    expect(determinantSign(ws)).toBe(-1)
    expect(solveLinear(Float64Array.of(0, 0, 0, 0), Float64Array.of(1, 1))).toBeNull()
  })

  it('keeps the sign of a determinant that underflows', () => {
    const n = 8
    const ws = createLu(n)
    factorLu(
      ws,
      Float64Array.from({ length: n * n }, (_, k) => (k % (n + 1) === 0 ? (k === 0 ? -1e-60 : 1e-60) : 0)),
    )
    expect(Math.abs(determinant(ws))).toBe(0)
    expect(determinantSign(ws)).toBe(-1)
  })

  it('inverts, and estimates the condition of the Hilbert matrix of order 5 (943656 in the 1-norm, closed form)', () => {
    // ‖H₅‖₁ = 137/60 and ‖H₅⁻¹‖₁ = 413280: condition 943656 (Higham, table of Hilbert matrices; checked by integers).
    const n = 5
    const h = Float64Array.from({ length: n * n }, (_, k) => 1 / (Math.floor(k / n) + (k % n) + 1))
    const ws = createLu(n)
    factorLu(ws, h)
    expect(norm1(h, n)).toBeCloseTo(137 / 60, 14)
    expect(1 / reciprocalCondition(ws, norm1(h, n)) / 943656).toBeCloseTo(1, 6)
    const inverse = new Float64Array(n * n)
    invertLu(ws, inverse)
    expect((inverse[0] ?? 0) / 25).toBeCloseTo(1, 9) // first entry of the inverse is n²
    expect((inverse[24] ?? 0) / 44100).toBeCloseTo(1, 9) // last entry of the inverse
  })

  it('solves a bordered system whose corner matrix is singular', () => {
    // A = diag(1, 0), b = c = (0, 1): det [A b; cᵀ 0] = -1. [1 0 0; 0 0 1; 0 1 0] (x, y, s) = (3, 4, 5).
    const ws = createLu(3)
    expect(factorBordered(ws, Float64Array.of(1, 0, 0, 0), Float64Array.of(0, 1), Float64Array.of(0, 1), 0)).toBe(true)
    const x = Float64Array.of(3, 4, 5)
    solveLu(ws, x)
    expect([...x]).toEqual([3, 5, 4])
  })
})

describe('complex LU', () => {
  it('solves A x = b and its adjoint to rounding', () => {
    fc.assert(
      fc.property(
        fc
          .integer({ min: 1, max: 6 })
          .chain((n) => fc.tuple(fc.constant(n), entries(n * n), entries(n * n), entries(n), entries(n))),
        ([n, r, i, br, bi]) => {
          const [re, im] = [dominant(r, n), Float64Array.from(i)]
          const ws = createComplexLu(n)
          expect(factorComplexLu(ws, re, im)).toBe(true)
          const check = (a: Float64Array, b: Float64Array, xr: Float64Array, xi: Float64Array) => {
            const [arxr, aixi, arxi, aixr] = [times(a, xr, n), times(b, xi, n), times(a, xi, n), times(b, xr, n)]
            for (let k = 0; k < n; k++) {
              expect(Math.abs((arxr[k] ?? 0) - (aixi[k] ?? 0) - (br[k] ?? 0))).toBeLessThan(1e-13)
              expect(Math.abs((arxi[k] ?? 0) + (aixr[k] ?? 0) - (bi[k] ?? 0))).toBeLessThan(1e-13)
            }
          }
          const [xr, xi] = [Float64Array.from(br), Float64Array.from(bi)]
          solveComplexLu(ws, xr, xi)
          check(re, im, xr, xi)
          const [yr, yi] = [Float64Array.from(br), Float64Array.from(bi)]
          solveComplexLuAdjoint(ws, yr, yi)
          check(
            transposed(re, n),
            transposed(im, n).map((v) => -v),
            yr,
            yi,
          )
        },
      ),
    )
  })

  it('loads 2iω I - A', () => {
    // A = [[0, -1], [1, 0]], (2i I - A) x = (1, 0): x = (2i, 1)/(-4 + 1) = (-2i/3, -1/3).
    const ws = createComplexLu(2)
    expect(factorShifted(ws, Float64Array.of(0, -1, 1, 0), 0, 2, -1)).toBe(true)
    const [xr, xi] = [Float64Array.of(1, 0), Float64Array.of(0, 0)]
    solveComplexLu(ws, xr, xi)
    expect(xr[0]).toBeCloseTo(0, 15)
    expect(xi[0]).toBeCloseTo(-2 / 3, 15)
    expect(xr[1]).toBeCloseTo(-1 / 3, 15)
    expect(xi[1]).toBeCloseTo(0, 15)
  })
})
