import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { createEigen, eigenvalues } from '#shared/numerics/eigenvalues.ts'
import { createEigenvectors, eigenvectors, refineEigenvalue } from '#shared/numerics/eigenvectors.ts'
import { singularValues } from '#shared/numerics/singular-values.ts'

const at = (a: ArrayLike<number>, i: number): number => a[i] ?? Number.NaN

function spectrum(a: number[] | Float64Array, n = Math.sqrt(a.length)) {
  const [re, im] = [new Float64Array(n), new Float64Array(n)]
  const converged = eigenvalues(createEigen(n), Float64Array.from(a), re, im)
  return { converged, re: [...re], im: [...im] }
}

const matrix = (n: number, entry: (i: number, j: number) => number) =>
  Float64Array.from({ length: n * n }, (_, k) => entry(Math.floor(k / n), k % n))

const frank = (n: number) => matrix(n, (i, j) => (j < i - 1 ? 0 : j === i - 1 ? n - i : n - Math.max(i, j)))
const grcar = (n: number) => matrix(n, (i, j) => (j === i - 1 ? -1 : j >= i && j <= i + 3 ? 1 : 0))
const cycle = (n: number) => matrix(n, (i, j) => (j === (i + 1) % n ? 1 : 0))

function closeTo(actual: number[], expected: number[], relative: number) {
  expect(actual.length).toBe(expected.length)
  actual.forEach((value, i) => {
    expect(Math.abs(value - at(expected, i)) / Math.abs(at(expected, i))).toBeLessThan(relative)
  })
}

/** Smallest singular value of the real form of A - λI over its largest: the backward error of λ. */
function backwardError(a: Float64Array, n: number, re: number, im: number): number {
  const size = 2 * n
  const real = new Float64Array(size * size)
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      real[i * size + j] = at(a, i * n + j) - (i === j ? re : 0)
      real[(n + i) * size + n + j] = at(real, i * size + j)
    }
    real[i * size + n + i] = im
    real[(n + i) * size + i] = -im
  }
  const values = singularValues(real, size)?.values ?? new Float64Array(size)
  return at(values, size - 1) / Math.max(...a.map(Math.abs), 1e-300)
}

describe('eigenvalues of the hard set', () => {
  it('of cyclic permutations are the roots of unity, each once', () => {
    for (const n of [2, 3, 4, 5, 8, 13, 30]) {
      const { converged, re, im } = spectrum(cycle(n))
      expect(converged).toBe(true)
      const turns = re.map((r, i) => (Math.atan2(at(im, i), r) / (2 * Math.PI)) * n)
      expect(new Set(turns.map((t) => (Math.round(t) + n) % n)).size).toBe(n)
      for (const t of turns) expect(Math.abs(t - Math.round(t))).toBeLessThan(1e-13)
      re.forEach((r, i) => {
        expect(Math.hypot(r, at(im, i))).toBeCloseTo(1, 13)
      })
    }
  })

  it('of a Frank matrix come in reciprocal pairs (Frank 1958), to what their condition allows', () => {
    const { re, im } = spectrum(frank(8))
    // 60-digit values computed apart from this project.
    const expected = [19.12498375190253, 9.751377387388041, 4.453660156267221, 1.7036225668240899]
    closeTo(re.slice(0, 4), expected, 1e-13)
    closeTo(
      re.slice(4).reverse(),
      expected.map((v) => 1 / v),
      1e-10,
    )
    expect(im).toEqual(new Array(8).fill(0))
    const twelve = spectrum(frank(12))
    const product = twelve.re.slice(0, 3).map((v, i) => v * at(twelve.re, 11 - i))
    for (const p of product) expect(Math.abs(p - 1)).toBeLessThan(1e-3)
  })

  it('of the Grcar matrix of order 12 agree with 60-digit values', () => {
    const { re, im } = spectrum(grcar(12))
    const expected = [
      [1.5878216642321803, 0.9618789933171557],
      [1.5396177308496164, 0.3476040091130328],
      [1.4081391688008635, 1.1320104439263998],
      [0.865000338703728, 1.4976082948476999],
      [0.4355709013602751, 1.891251224774178],
      [0.16385019605333667, 2.166125944163371],
    ]
    expected.forEach(([r, m], k) => {
      expect(Math.abs(at(re, 2 * k) - (r ?? 0))).toBeLessThan(1e-13)
      expect(Math.abs(at(im, 2 * k) - (m ?? 0))).toBeLessThan(1e-13)
      expect(at(im, 2 * k + 1)).toBe(-at(im, 2 * k))
      expect(at(re, 2 * k + 1)).toBe(at(re, 2 * k))
    })
  })

  it('of defective blocks stay within the perturbation bound eps^(1/k)', () => {
    expect(spectrum([2, 1, 0, 0, 2, 1, 0, 0, 2])).toEqual({ converged: true, re: [2, 2, 2], im: [0, 0, 0] })
    // T (2 I + N) T⁻¹ with T = [[1,0,0],[1,1,0],[0,1,1]] and N the shift: eps^(1/3) is 6e-6.
    const { re, im } = spectrum([1, 1, 0, 0, 2, 1, 1, -1, 3])
    re.forEach((r, i) => {
      expect(Math.hypot(r - 2, at(im, i))).toBeLessThan(3e-5)
    })
    expect(re.reduce((a, b) => a + b, 0)).toBeCloseTo(6, 12)
    // x³ = 1e-12 in companion form, nearly defective: roots 1e-4 times the cube roots of 1.
    const near = spectrum([0, 1, 0, 0, 0, 1, 1e-12, 0, 0])
    expect(near.re[0]).toBeCloseTo(1e-4, 17)
    near.re.forEach((r, i) => {
      expect(Math.hypot(r, at(near.im, i)) / 1e-4).toBeCloseTo(1, 12)
    })
    expect(spectrum(new Array(16).fill(0))).toEqual({ converged: true, re: [0, 0, 0, 0], im: [0, 0, 0, 0] })
  })

  it('of badly scaled matrices do not see the units: D A D⁻¹ with powers of two gives the same digits', () => {
    const n = 5
    const a = matrix(n, (i, j) => Math.sin(1 + i * 3.1 + j * j * 1.7))
    const d = [2 ** 20, 2 ** -13, 1, 2 ** 7, 2 ** -30]
    const scaled = matrix(n, (i, j) => (at(d, i) * at(a, i * n + j)) / at(d, j))
    const [one, two] = [spectrum(a), spectrum(scaled)]
    one.re.forEach((r, i) => {
      expect(Math.abs(r - at(two.re, i))).toBeLessThan(1e-13)
      expect(Math.abs(at(one.im, i) - at(two.im, i))).toBeLessThan(1e-13)
    })
  })

  it('with rates from 1e-6 to 1e6 keep their own relative accuracy (60-digit values)', () => {
    const graded = spectrum([-1e6, 2e3, 1, 1e-3, 5e2, -1e3, 3e-2, 7e-4, 1, 2e-1, -1e-3, 5e-6, 1e-3, 2e-4, 3e-6, -1e-6])
    const expected = [-9.842654750710217e-7, -0.000992848418585316, -998.9990061694801, -1000001.0010009978]
    closeTo(graded.re, expected, 1e-11)
    // A slow spiral beside two fast decays, written slow first.
    const slow = spectrum([-1e-6, 2e-6, 1e-3, 0, -2e-6, -1e-6, 0, 1e-3, 1e-2, 0, -1e6, 10, 0, 1e-3, 20, -1e4])
    closeTo(slow.re.slice(0, 2), [-9.99944999998895e-7, -9.99944999998895e-7], 1e-12)
    closeTo(slow.im.slice(0, 2), [1.9999999899937397e-6, -1.9999999899937397e-6], 1e-12)
    closeTo(slow.re.slice(2), [-9999.999797979897, -1000000.0002020202], 1e-14)
  })

  it('of two-by-two matrices survive cancellation: a weak damping of a fast oscillation', () => {
    // trace -2e-12, determinant 1e12 + 1e-24: -1e-12 ± 1e6 i to rounding.
    const weak = spectrum([-1e-12, 1e6, -1e6, -1e-12])
    expect(weak.re[0]).toBe(-1e-12)
    expect(weak.im).toEqual([1e6, -1e6])
    // det = 1 exactly with trace 1e8: the small eigenvalue is 1e-8 (1 + 1e-16).
    const stiff = spectrum([1e8, -1, 1, 0])
    expect(stiff.re[1]).toBeCloseTo(1e-8, 23)
    // (1 + 2^-30)(1 - 2^-30) - 1 = -2^-60: eigenvalue product seen in full.
    const thin = spectrum([1 + 2 ** -30, 1, 1, 1 - 2 ** -30])
    expect(at(thin.re, 1) / (-(2 ** -60) / 2)).toBeCloseTo(1, 12)
    expect(spectrum([0, 1, -0.25, -1]).im).toEqual([0, 0]) // double root -1/2
    expect(spectrum([1e200, 1e200, -1e200, 1e200]).im[0]).toBe(1e200)
  })

  it('refuses what is not finite', () => {
    expect(spectrum([1, Number.NaN, 0, 1]).converged).toBe(false)
    expect(spectrum([1, 0, 0, 0, Number.POSITIVE_INFINITY, 0, 0, 0, 1]).converged).toBe(false)
  })
})

describe('eigenvalues in general', () => {
  it('have backward errors of a few roundings, sum to the trace, and pairs stand together', () => {
    const sized = fc.integer({ min: 1, max: 9 })
    const value = fc.oneof(fc.constant(0), fc.double({ min: -1, max: 1, noNaN: true }))
    fc.assert(
      fc.property(
        sized.chain((n) => fc.tuple(fc.constant(n), fc.array(value, { minLength: n * n, maxLength: n * n }))),
        ([n, values]) => {
          const a = Float64Array.from(values)
          const { converged, re, im } = spectrum(a, n)
          expect(converged).toBe(true)
          const trace = a.reduce((sum, v, k) => sum + (k % (n + 1) === 0 ? v : 0), 0)
          expect(Math.abs(re.reduce((x, y) => x + y, 0) - trace)).toBeLessThan(1e-12)
          for (let i = 0; i < n; i++) {
            expect(backwardError(a, n, at(re, i), at(im, i))).toBeLessThan(1e-13)
            if (at(im, i) > 0) expect([at(re, i + 1), at(im, i + 1)]).toEqual([at(re, i), -at(im, i)])
            if (i > 0) expect(at(re, i)).toBeLessThanOrEqual(at(re, i - 1))
          }
        },
      ),
      { numRuns: 200 },
    )
  })
})

describe('eigenvectors', () => {
  it('follow the conventions A q = iω q, Aᵀ p = -iω p, <q,q> = <p,q> = 1', () => {
    // Block with ±3i hidden by a similarity, beside decays -1 and -2.
    const n = 4
    const core = [0, -3, 0, 0, 3, 0, 0, 0, 0, 0, -1, 0, 0, 0, 0, -2]
    const t = [1, 2, 0, 1, 0, 1, 1, 0, 0, 0, 1, 3, 0, 0, 0, 1]
    const inverse = [1, -2, 2, -7, 0, 1, -1, 3, 0, 0, 1, -3, 0, 0, 0, 1]
    const times = (x: number[], y: number[]) =>
      x.map((_, k) => [0, 1, 2, 3].reduce((s, l) => s + at(x, Math.floor(k / n) * n + l) * at(y, l * n + (k % n)), 0))
    expect(times(t, inverse)).toEqual([1, 0, 0, 0, 0, 1, 0, 0, 0, 0, 1, 0, 0, 0, 0, 1])
    const a = Float64Array.from(times(times(t, core), inverse))
    const ws = createEigenvectors(n)
    expect(eigenvectors(ws, a, 0, 3)).toBeGreaterThanOrEqual(1)
    const { qRe, qIm, pRe, pIm } = ws
    let qq = 0
    let pqRe = 0
    let pqIm = 0
    for (let i = 0; i < n; i++) {
      let [aqRe, aqIm, apRe, apIm] = [0, 0, 0, 0]
      for (let j = 0; j < n; j++) {
        aqRe += at(a, i * n + j) * at(qRe, j)
        aqIm += at(a, i * n + j) * at(qIm, j)
        apRe += at(a, j * n + i) * at(pRe, j)
        apIm += at(a, j * n + i) * at(pIm, j)
      }
      expect(Math.abs(aqRe + 3 * at(qIm, i))).toBeLessThan(1e-14)
      expect(Math.abs(aqIm - 3 * at(qRe, i))).toBeLessThan(1e-14)
      expect(Math.abs(apRe - 3 * at(pIm, i))).toBeLessThan(1e-13)
      expect(Math.abs(apIm + 3 * at(pRe, i))).toBeLessThan(1e-13)
      qq += at(qRe, i) ** 2 + at(qIm, i) ** 2
      pqRe += at(pRe, i) * at(qRe, i) + at(pIm, i) * at(qIm, i)
      pqIm += at(pRe, i) * at(qIm, i) - at(pIm, i) * at(qRe, i)
    }
    expect(qq).toBeCloseTo(1, 14)
    expect(pqRe).toBeCloseTo(1, 14)
    expect(pqIm).toBeCloseTo(0, 14)
  })

  it('are found where q is orthogonal to its own conjugate (qᵀq = 0)', () => {
    // A = [[0, -1], [1, 0]], λ = i: q = (1, -i)/√2 has qᵀq = 0; p = q.
    const ws = createEigenvectors(2)
    expect(eigenvectors(ws, Float64Array.of(0, -1, 1, 0), 0, 1)).toBeCloseTo(1, 14)
    expect([...ws.qRe, ...ws.pRe].map((v) => Math.abs(v) > 0.1)).toEqual([true, false, true, false])
    expect(ws.qIm[1]).toBeCloseTo(-Math.SQRT1_2, 14)
    expect(ws.pIm[1]).toBeCloseTo(-Math.SQRT1_2, 14)
  })

  it('are refused at a defective pair', () => {
    // Two equal blocks ±i coupled one way.
    const a = Float64Array.of(0, -1, 1, 0, 1, 0, 0, 1, 0, 0, 0, -1, 0, 0, 1, 0)
    expect(eigenvectors(createEigenvectors(4), a, 0, 1)).toBeNull()
  })

  it('polish an eigenvalue to its own accuracy', () => {
    // [[-1, 1e5], [0, -1e-7]] under a rotation-free similarity: -1e-7 exactly.
    const a = Float64Array.of(-1, 1e5, 0, -1e-7)
    const better = refineEigenvalue(createEigenvectors(2), a, { re: -1.0001e-7, im: 0 }, 1e-6)
    expect(better?.re).toBeCloseTo(-1e-7, 22)
    expect(refineEigenvalue(createEigenvectors(2), a, { re: -0.5, im: 0 }, 1e-6)).toBeNull()
  })
})
