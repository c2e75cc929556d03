import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { compileModel } from '#shared/model/compile.ts'
import type { Expression } from '#shared/model/expression.ts'
import {
  add,
  call,
  div,
  mul,
  neg,
  num,
  parameters,
  pow,
  randomCoordinate,
  randomExpression,
  sub,
  sym,
  system,
} from './random-model.ts'

const at = (a: ArrayLike<number>, i: number): number => a[i] ?? Number.NaN
const [x, y] = [sym('x'), sym('y')]

/** Coefficients of s^0..s^5 of the first right-hand side along (u, w) from `point`. */
function jet(
  model: ReturnType<typeof system>,
  point: number[],
  u: number[],
  w: number[] | null = null,
  p = parameters(model),
) {
  const compiled = compileModel(model)
  const out = new Float64Array(6 * compiled.n)
  compiled.jet(Float64Array.from(point), p, Float64Array.from(u), w === null ? null : Float64Array.from(w), 5, out)
  return Array.from({ length: 6 }, (_, k) => at(out, k * compiled.n))
}

const close = (actual: number[], expected: number[], digits = 14) => {
  expected.forEach((value, k) => {
    expect(Math.abs(at(actual, k) - value)).toBeLessThanOrEqual(10 ** -digits * Math.max(1, Math.abs(value)))
  })
}

describe('jets', () => {
  it('of functions at a point are their Taylor series', () => {
    const k = 0.3
    const [s, c, e, r] = [Math.sin(k), Math.cos(k), Math.exp(k), 1 / (1 + k)]
    const [sh, ch] = [Math.sinh(k), Math.cosh(k)]
    const t = Math.tan(k)
    const q = 1 + t * t
    const h = Math.tanh(k)
    const g = 1 - h * h
    const l = 1 / (1 + Math.exp(-k))
    const m = l * (1 - l)
    const d = 1 - k * k
    const f = 1 + k * k
    const cases: [Expression, number[]][] = [
      [call('exp', x), [e, e, e / 2, e / 6, e / 24, e / 120]],
      [call('expm1', x), [Math.expm1(k), e, e / 2, e / 6, e / 24, e / 120]],
      [call('sin', x), [s, c, -s / 2, -c / 6, s / 24, c / 120]],
      [call('cos', x), [c, -s, -c / 2, s / 6, c / 24, -s / 120]],
      [call('sinh', x), [sh, ch, sh / 2, ch / 6, sh / 24, ch / 120]],
      [call('cosh', x), [ch, sh, ch / 2, sh / 6, ch / 24, sh / 120]],
      [call('log1p', x), [Math.log1p(k), r, -(r ** 2) / 2, r ** 3 / 3, -(r ** 4) / 4, r ** 5 / 5]],
      [call('log', x), [Math.log(k), 1 / k, -1 / (2 * k ** 2), 1 / (3 * k ** 3), -1 / (4 * k ** 4), 1 / (5 * k ** 5)]],
      [call('log10', x), [Math.log10(k), Math.LOG10E / k, -Math.LOG10E / (2 * k ** 2), Math.LOG10E / (3 * k ** 3)]],
      [div(num(1), x), [1 / k, -1 / k ** 2, 1 / k ** 3, -1 / k ** 4, 1 / k ** 5, -1 / k ** 6]],
      // tan: derivatives q, 2tq, 2q(1+3t²), 8tq(2+3t²)...
      [call('tan', x), [t, q, t * q, (q * (1 + 3 * t * t)) / 3, (t * q * (2 + 3 * t * t)) / 3]],
      [call('tanh', x), [h, g, -h * g, (-g * (1 - 3 * h * h)) / 3, (h * g * (2 - 3 * h * h)) / 3]],
      [call('asin', x), [Math.asin(k), d ** -0.5, (k * d ** -1.5) / 2, ((1 + 2 * k * k) * d ** -2.5) / 6]],
      [call('acos', x), [Math.acos(k), -(d ** -0.5), (-k * d ** -1.5) / 2, (-(1 + 2 * k * k) * d ** -2.5) / 6]],
      [call('atan', x), [Math.atan(k), 1 / f, -k / f ** 2, (3 * k * k - 1) / (3 * f ** 3), (k - k ** 3) / f ** 4]],
      [call('sqrt', x), [k ** 0.5, k ** -0.5 / 2, -(k ** -1.5) / 8, k ** -2.5 / 16, (-5 * k ** -3.5) / 128]],
      [pow(x, num(2.5)), [k ** 2.5, 2.5 * k ** 1.5, 1.875 * k ** 0.5, 0.3125 * k ** -0.5, -0.0390625 * k ** -1.5]],
      // logistic: m, m(1-2l)/2, m(1-6m)/6
      [div(num(1), add(num(1), call('exp', neg(x)))), [l, m, (m * (1 - 2 * l)) / 2, (m * (1 - 6 * m)) / 6]],
      [pow(x, num(3)), [k ** 3, 3 * k ** 2, 3 * k, 1, 0, 0]],
      [call('abs', neg(x)), [k, 1, 0, 0, 0, 0]],
      [call('max', x, num(0)), [k, 1, 0, 0, 0, 0]],
    ]
    for (const [expression, expected] of cases) close(jet(system({ x: expression }), [k], [1]), expected, 12)
  })

  it('of polynomials along a line are exact', () => {
    // (1 + 2s)³ (2 - s)² = 4 + 20 s + 25 s² - 10 s³ - 20 s⁴ + 8 s⁵
    expect(jet(system({ x: mul(pow(x, num(3)), pow(y, num(2))), y: x }), [1, 2], [2, -1])).toEqual([
      4, 20, 25, -10, -20, 8,
    ])
    // From zero: odd powers divide by nothing.
    expect(jet(system({ x: pow(x, num(5)) }), [0], [2])).toEqual([0, 0, 0, 0, 0, 32])
    expect(jet(system({ x: pow(x, sym('k')) }, { parameters: { k: 3 } }), [0], [2])).toEqual([0, 0, 0, 8, 0, 0])
  })

  it('go along parameters too: k^x at x = 2, k = 3 + s is 9 + 6 s + s²', () => {
    const model = system({ x: mul(pow(sym('k'), num(2)), x) }, { parameters: { k: 3 } })
    expect(jet(model, [1], [0], [0, 1])).toEqual([9, 6, 1, 0, 0, 0])
    // Exponent moving: 2^(2+s) = 4 (1 + s ln 2 + ...).
    const moving = jet(system({ x: pow(x, sym('k')) }, { parameters: { k: 2 } }), [2], [0], [0, 1])
    close(moving, [4, 4 * Math.LN2, 2 * Math.LN2 ** 2, (2 / 3) * Math.LN2 ** 3])
  })

  it('of smooth quotients at their removable point have Bernoulli numbers: z/(e^z - 1) = 1 - z/2 + z²/12 - z⁴/720', () => {
    const z = add(x, num(40))
    const rate = div(z, sub(call('exp', z), num(1)))
    close(jet(system({ x: rate }, { box: [-90, 50] }), [-40], [1]), [1, -1 / 2, 1 / 12, 0, -1 / 720, 0], 16)
    close(jet(system({ x: call('exprel', x) }), [0], [1]), [1, 1 / 2, 1 / 6, 1 / 24, 1 / 120, 1 / 720], 16)
  })

  it('give bilinear and trilinear forms by polarisation', () => {
    // F = x² y: B(u,v) = F'' = 2(y u1 v1 + x (u1 v2 + u2 v1)); C = 2 (u1 v1 w2 + u1 v2 w1 + u2 v1 w1).
    const model = system({ x: mul(pow(x, num(2)), y), y: x })
    const form = (order: number, u: number[]) => at(jet(model, [3, 5], u), order)
    const [u, v, w] = [
      [1, 2],
      [-1, 0.5],
      [2, 1],
    ] as const
    const sum = (...list: (readonly number[])[]) => [0, 1].map((j) => list.reduce((s, item) => s + at(item, j), 0))
    const minus = (item: readonly number[]) => item.map((q) => -q)
    // q(u) = B(u,u)/2, so B(u,v) = (q(u+v) - q(u-v))/2.
    const b = (form(2, sum(u, v)) - form(2, sum(u, minus(v)))) / 2
    expect(b).toBeCloseTo(2 * (5 * 1 * -1 + 3 * (1 * 0.5 + 2 * -1)), 12)
    // C(u,v,w) = [t(u+v+w) - t(u+v-w) - t(u-v+w) + t(u-v-w)]/4 with t = C(u,u,u)/6.
    const c =
      (form(3, sum(u, v, w)) -
        form(3, sum(u, v, minus(w))) -
        form(3, sum(u, minus(v), w)) +
        form(3, sum(u, minus(v), minus(w)))) /
      4
    expect(c).toBeCloseTo(2 * (1 * -1 * 1 + 1 * 0.5 * 2 + 2 * -1 * 2), 12)
  })

  it('agree with the Jacobian in first order, for random expressions', () => {
    const point = randomCoordinate
    fc.assert(
      fc.property(randomExpression(true), randomExpression(true), point, point, (a, b, u, v) => {
        const compiled = compileModel(system({ x: a, y: b }))
        const [state, p] = [Float64Array.of(u, v), Float64Array.of(0.5)]
        const [f, j] = [new Float64Array(2), new Float64Array(4)]
        compiled.jacobian(state, p, f, j)
        const out = new Float64Array(4)
        for (const direction of [Float64Array.of(1, 0), Float64Array.of(0, 1)]) {
          compiled.jet(state, p, direction, null, 1, out)
          const column = at(direction, 0) === 1 ? 0 : 1
          for (const i of [0, 1]) {
            const slope = at(j, 2 * i + column)
            if (!Number.isFinite(at(f, i)) || !Number.isFinite(slope) || Math.abs(slope) > 1e12) continue
            const along = at(out, 2 + i)
            if (!Number.isFinite(along)) continue
            expect(Math.abs(along - slope)).toBeLessThanOrEqual(1e-9 * Math.max(1, Math.abs(slope)))
          }
        }
      }),
      { numRuns: 500 },
    )
  })

  it('add up to the function itself a little further on', () => {
    const smooth = div(mul(call('sin', x), call('exp', y)), add(num(2), call('cos', mul(x, y))))
    const model = system({ x: smooth, y: x })
    const series = jet(model, [0.4, -0.3], [1, 0.5])
    const compiled = compileModel(model)
    const out = new Float64Array(2)
    const s = 0.01
    compiled.rhs(Float64Array.of(0.4 + s, -0.3 + 0.5 * s), parameters(model), out)
    // Sixth-order term below 1e-12.
    expect(series.reduceRight((sum, coefficient) => sum * s + coefficient, 0)).toBeCloseTo(at(out, 0), 11)
  })
})
