import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { createLu, determinantSign, factorLu } from '#shared/numerics/linear-solve.ts'
import { createQr, factorQr, minimumNormSolve, nullSpaceVector, nullVector } from '#shared/numerics/qr.ts'
import { singularValues } from '#shared/numerics/singular-values.ts'

const entries = (count: number) =>
  fc.array(fc.double({ min: -1, max: 1, noNaN: true }), { minLength: count, maxLength: count })
const dot = (a: ArrayLike<number>, b: ArrayLike<number>, from = 0) =>
  Array.from(b).reduce((sum, v, j) => sum + (a[from + j] ?? 0) * v, 0)

describe('null vectors', () => {
  it('are unit, orthogonal to every row, and make det [B; tᵀ] positive', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 7 }).chain((n) => fc.tuple(fc.constant(n), entries(n * (n + 1)))),
        ([n, values]) => {
          const b = Float64Array.from(values)
          const ws = createQr(n, n + 1)
          const rank = factorQr(ws, b)
          const t = new Float64Array(n + 1)
          nullVector(ws, t)
          expect(dot(t, t)).toBeCloseTo(1, 13)
          for (let i = 0; i < n; i++) expect(Math.abs(dot(b, t, i * (n + 1)))).toBeLessThan(1e-11)
          if (rank < n || ws.ratio < 1e-6) return
          const lu = createLu(n + 1)
          factorLu(lu, Float64Array.of(...b, ...t))
          expect(determinantSign(lu)).toBe(1)
        },
      ),
    )
  })

  it('of x² + y² = 1 turn smoothly: the tangent at (cos s, sin s) is (-sin s, cos s) all the way round', () => {
    const ws = createQr(1, 2)
    const t = new Float64Array(2)
    for (let s = 0; s < 7; s += 0.1) {
      factorQr(ws, Float64Array.of(2 * Math.cos(s), 2 * Math.sin(s)))
      nullVector(ws, t)
      expect(t[0]).toBeCloseTo(-Math.sin(s), 14)
      expect(t[1]).toBeCloseTo(Math.cos(s), 14)
    }
  })

  it('span a plane where two rows are dependent', () => {
    const b = Float64Array.of(1, 2, 3, 4, 2, 4, 6, 8, 0, 1, 0, 1)
    const ws = createQr(3, 4)
    expect(factorQr(ws, b)).toBe(2)
    for (const k of [2, 3]) {
      const t = new Float64Array(4)
      nullSpaceVector(ws, k, t)
      for (let i = 0; i < 3; i++) expect(Math.abs(dot(b, t, 4 * i))).toBeLessThan(1e-14)
    }
  })

  it('give the shortest solution: x + y = 2 is met at (1, 1)', () => {
    const ws = createQr(1, 2)
    factorQr(ws, Float64Array.of(1, 1))
    const x = new Float64Array(2)
    minimumNormSolve(ws, Float64Array.of(2), x)
    expect(x[0]).toBeCloseTo(1, 14)
    expect(x[1]).toBeCloseTo(1, 14)
  })

  it('solve B x = b with x orthogonal to the null vector', () => {
    fc.assert(
      fc.property(entries(12), entries(3), (values, rhs) => {
        const ws = createQr(3, 4)
        const b = Float64Array.from(values)
        if (factorQr(ws, b) < 3 || ws.ratio < 1e-3) return
        const x = new Float64Array(4)
        minimumNormSolve(ws, Float64Array.from(rhs), x)
        const t = new Float64Array(4)
        nullVector(ws, t)
        expect(Math.abs(dot(t, x))).toBeLessThan(1e-10)
        for (let i = 0; i < 3; i++) expect(Math.abs(dot(b, x, 4 * i) - (rhs[i] ?? 0))).toBeLessThan(1e-10)
      }),
    )
  })
})

describe('singular values', () => {
  it('of [[3, 0], [4, 5]] are sqrt 45 and sqrt 5 (Golub & Van Loan, example after theorem 2.4.1, from memory)', () => {
    // AᵀA = [[25, 20], [20, 25]] has eigenvalues 45 and 5.
    const s = singularValues(Float64Array.of(3, 0, 4, 5), 2)
    expect(s?.values[0]).toBeCloseTo(Math.sqrt(45), 14)
    expect(s?.values[1]).toBeCloseTo(Math.sqrt(5), 14)
  })

  it('survive entries whose squares leave the range of doubles', () => {
    for (const unit of [1e-263, 1e200, 5e-324]) {
      const s = singularValues(Float64Array.of(3 * unit, 0, 4 * unit, 5 * unit), 2)
      expect((s?.values[0] ?? 0) / unit).toBeCloseTo(Math.sqrt(45), unit === 5e-324 ? 0 : 13)
    }
    expect(singularValues(Float64Array.of(1, Number.NaN, 0, 1), 2)).toBeNull()
    expect(singularValues(Float64Array.of(0, 0, 0, 0), 2)?.values).toEqual(Float64Array.of(0, 0))
  })

  it('rebuild the matrix with orthogonal factors, also where it is singular', () => {
    const n = 4
    fc.assert(
      fc.property(entries(n * n), fc.boolean(), (values, singular) => {
        const a = Float64Array.from(values)
        if (singular) for (let j = 0; j < n; j++) a[3 * n + j] = (a[j] ?? 0) - 2 * (a[n + j] ?? 0)
        const s = singularValues(a, n)
        if (s === null) throw new Error('finite matrices decompose')
        for (let i = 0; i < n; i++) {
          for (let j = 0; j < n; j++) {
            let product = 0
            let uu = 0
            for (let k = 0; k < n; k++) {
              product += (s.u[i * n + k] ?? 0) * (s.values[k] ?? 0) * (s.v[j * n + k] ?? 0)
              uu += (s.u[k * n + i] ?? 0) * (s.u[k * n + j] ?? 0)
            }
            expect(Math.abs(product - (a[i * n + j] ?? 0))).toBeLessThan(1e-14)
            expect(Math.abs(uu - (i === j ? 1 : 0))).toBeLessThan(1e-10)
          }
        }
      }),
    )
  })
})
