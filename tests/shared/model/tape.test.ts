import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { compileModel } from '#shared/model/compile.ts'
import type { Expression } from '#shared/model/expression.ts'
import { buildGraph, functionTape, jacobianTape } from '#shared/model/model-graph.ts'
import { op } from '#shared/model/op-codes.ts'
import {
  add,
  call,
  div,
  evaluate,
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

function values(model: ReturnType<typeof system>, state: number[]) {
  const compiled = compileModel(model)
  const { n } = compiled
  const [f, j] = [new Float64Array(n), new Float64Array(n * n)]
  compiled.jacobian(Float64Array.from(state), parameters(model), f, j)
  const alone = new Float64Array(n)
  compiled.rhs(Float64Array.from(state), parameters(model), alone)
  expect([...alone]).toEqual([...f])
  return { f: [...f], j: [...j] }
}

const codesOf = (model: ReturnType<typeof system>) => [...functionTape(buildGraph(model)).code]
const one = (e: Expression, options = {}) => system({ x: e }, options)

describe('the tape of F', () => {
  it('gives what the text says, for random expressions', () => {
    const point = randomCoordinate
    let compared = 0
    fc.assert(
      fc.property(randomExpression(true), randomExpression(true), point, point, (a, b, u, v) => {
        const model = system({ x: a, y: b })
        const { f } = values(model, [u, v])
        const [lo, hi, state, p] = [new Float64Array(2), new Float64Array(2), Float64Array.of(u, v), parameters(model)]
        const compiled = compileModel(model)
        compiled.rhsInterval(state, state, p, p, lo, hi)
        // Where rounding decides whether there is a value at all, nothing can be compared.
        if (compiled.coverage(state, state, p, p, false) !== 0) return
        for (const [i, e] of [a, b].entries()) {
          const truth = evaluate(e, { x: u, y: v, c: 0.5 })
          // Removable quotients and folded zeros may give a value where the text has none.
          if (!Number.isFinite(truth)) continue
          // How much rounding may matter is measured by the enclosure of the point itself.
          const slack = 4 * (at(hi, i) - at(lo, i)) + 1e-14 * Math.abs(truth)
          if (!(slack >= 0 && slack < 1e-3)) continue
          compared++
          expect(Math.abs(at(f, i) - truth)).toBeLessThanOrEqual(slack)
        }
      }),
      { numRuns: 1000 },
    )
    expect(compared).toBeGreaterThan(300)
  })

  it('shares common subexpressions, also between equations and helpers', () => {
    const q = add(pow(x, num(2)), pow(y, num(2)))
    const model = system({ x: mul(x, sym('q')), y: mul(y, q) }, { helpers: { q } })
    // x², y², their sum, two products.
    expect(codesOf(model)).toHaveLength(5)
  })

  it('folds constants, leaves out trivial operations, expands integer powers', () => {
    expect(codesOf(one(add(mul(num(1), x), mul(num(0), call('sin', x)))))).toEqual([])
    expect(codesOf(one(sub(num(0), neg(x))))).toEqual([])
    expect(codesOf(one(add(x, add(num(2), num(3)))))).toEqual([op.add])
    expect(codesOf(one(pow(x, num(4))))).toEqual([op.mul, op.mul])
    expect(codesOf(one(pow(x, num(5))))).toEqual([op.powi])
    expect(codesOf(one(pow(x, num(-2))))).toEqual([op.mul, op.div])
    expect(codesOf(one(pow(x, num(0.5))))).toEqual([op.sqrt])
    expect(codesOf(one(pow({ kind: 'constant', name: 'e' }, x)))).toEqual([op.exp])
    expect(codesOf(one(pow(x, num(2.5))))).toEqual([op.pow])
    expect(values(one(pow(neg(num(2)), num(3))), [0]).f).toEqual([-8])
    expect(values(one(pow(x, sym('k')), { parameters: { k: 3 } }), [-2]).f).toEqual([-8])
    expect(values(one(pow(x, num(1.5))), [0])).toEqual({ f: [0], j: [0] })
    expect(values(one(pow(x, num(100))), [-1]).f).toEqual([1])
  })

  it('computes parameter-only parts before the rest, and again when a parameter changes', () => {
    const model = one(mul(x, call('exp', mul(sym('k'), num(2)))), { parameters: { k: 1 } })
    const tape = functionTape(buildGraph(model))
    expect(tape.fixed).toBe(2)
    const compiled = compileModel(model)
    const out = new Float64Array(1)
    for (const k of [1, 2, 2, 1]) {
      compiled.rhs(Float64Array.of(3), Float64Array.of(0.5, k), out)
      expect(at(out, 0)).toBeCloseTo(3 * Math.exp(2 * k), 10)
    }
  })

  it('walks sums of thirty thousand terms without recursion', () => {
    let sum: Expression = x
    for (let i = 0; i < 30_000; i++) sum = add(sum, i % 2 === 0 ? y : x)
    expect(values(system({ x: sum, y: x }), [1, 1]).f).toEqual([30_001, 1])
  })
})

describe('removable quotients', () => {
  const shifted = add(sym('x'), num(40))
  const rate = div(mul(num(0.1), shifted), sub(num(1), call('exp', neg(div(shifted, num(10))))))
  const has = (e: Expression, code: number) => codesOf(system({ x: e, y: x }, { parameters: { k: 10 } })).includes(code)

  it('are recognised in every spelling', () => {
    const spellings: Expression[] = [
      rate,
      div(mul(num(0.1), add(num(40), x)), neg(sub(call('exp', div(neg(add(x, num(40))), num(10))), num(1)))),
      div(add(mul(num(0.1), x), num(4)), sub(num(1), call('exp', div(sub(neg(x), num(40)), num(10))))),
      mul(div(num(0.1), sub(num(1), call('exp', mul(num(-0.1), shifted)))), shifted),
      div(x, call('expm1', x)),
      div(x, sub(num(1), call('exp', neg(x)))),
      div(mul(num(2), x), sub(mul(num(3), call('exp', x)), num(3))),
      div(pow(x, num(2)), sub(call('exp', x), num(1))),
      div(mul(x, call('exp', x)), sub(call('exp', x), num(1))),
      div(sub(x, sym('k')), sub(num(1), call('exp', div(neg(sub(x, sym('k'))), sym('k'))))),
      div(x, sub(pow({ kind: 'constant', name: 'e' }, x), num(1))),
    ]
    for (const e of spellings) expect(has(e, op.bernoulli)).toBe(true)
    expect(has(div(sub(num(1), call('exp', neg(x))), x), op.exprel)).toBe(true)
    expect(has(div(call('expm1', mul(num(3), x)), mul(num(2), x)), op.exprel)).toBe(true)
    expect(has(div(num(1), add(num(1), call('exp', neg(x)))), op.logistic)).toBe(true)
    expect(has(div(call('exp', x), add(num(1), call('exp', x))), op.logistic)).toBe(true)
  })

  it('keep true poles: 1/(1 - exp(-x)) and (x + 1)/(1 - exp(-x)) are left alone', () => {
    expect(has(div(num(1), sub(num(1), call('exp', neg(x)))), op.bernoulli)).toBe(false)
    expect(has(div(add(x, num(1)), sub(num(1), call('exp', neg(x)))), op.bernoulli)).toBe(false)
    expect(values(one(div(num(1), sub(num(1), call('exp', neg(x))))), [0]).f).toEqual([Number.POSITIVE_INFINITY])
  })

  it('have value and slope at the point itself: Hodgkin and Huxley rates at -40 and -55 are 1 and 0.1', () => {
    // z/(1 - e^-z) has slope 1/2 at 0; z = (V + 40)/10 gives 1/20, 0.01 (V + 55)/(1 - e^-(V + 55)/10) gives 1/200.
    const slow = div(mul(num(0.01), add(x, num(55))), sub(num(1), call('exp', neg(div(add(x, num(55)), num(10))))))
    expect(values(one(rate), [-40])).toEqual({ f: [1], j: [0.05] })
    const at55 = values(one(slow), [-55])
    expect(at55.f[0]).toBeCloseTo(0.1, 16)
    expect(at55.j[0]).toBeCloseTo(0.005, 17)
    // Near the point the plain quotient loses digits; away from it both agree.
    for (const v of [-90, -41, -20, 50]) {
      expect(at(values(one(rate), [v]).f, 0)).toBeCloseTo((0.1 * (v + 40)) / (1 - Math.exp(-(v + 40) / 10)), 12)
    }
    expect(at(values(one(rate), [-40 + 1e-7]).f, 0)).toBeCloseTo(1 + 5e-9, 15)
  })

  it('do not overflow: sigmoids are 0 or 1 with slope 0 far out', () => {
    const sigmoid = div(num(1), add(num(1), call('exp', neg(x))))
    expect(values(one(sigmoid), [-1e4])).toEqual({ f: [0], j: [0] })
    expect(values(one(sigmoid), [1e4])).toEqual({ f: [1], j: [0] })
    expect(at(values(one(sigmoid), [0]).j, 0)).toBe(0.25)
  })

  it('take saturation terms as one operation, in every spelling', () => {
    const hill = div(pow(x, num(4)), add(num(1), pow(x, num(4))))
    expect(has(hill, op.share)).toBe(true)
    expect(has(div(mul(num(3), mul(x, y)), add(sym('k'), x)), op.share)).toBe(true)
    expect(has(div(x, add(add(sym('k'), x), div(pow(x, num(2)), num(5)))), op.share)).toBe(true)
    expect(has(div(num(1), add(num(1), pow(x, num(4)))), op.share)).toBe(false)
    // x/(k x + 1) at k = 0 is x: no division by k.
    expect(values(one(div(x, add(mul(sym('k'), x), num(1))), { parameters: { k: 0 } }), [3])).toEqual({
      f: [3],
      j: [1],
    })
    // d/dx x⁴/(1 + x⁴) = 4x³/(1 + x⁴)²: at 2, 32/289.
    expect(at(values(one(hill), [2]).f, 0)).toBeCloseTo(16 / 17, 15)
    expect(at(values(one(hill), [2]).j, 0)).toBeCloseTo(32 / 289, 15)
  })
})

describe('the Jacobian', () => {
  it('is exact for closed forms of every operation', () => {
    const k = 0.7
    const cases: [Expression, number, number][] = [
      [call('exp', x), k, Math.exp(k)],
      [call('log', x), k, 1 / k],
      [call('log10', x), k, 1 / (k * Math.LN10)],
      [call('log1p', x), k, 1 / (1 + k)],
      [call('expm1', x), k, Math.exp(k)],
      [call('sqrt', x), k, 0.5 / Math.sqrt(k)],
      [call('sin', x), k, Math.cos(k)],
      [call('cos', x), k, -Math.sin(k)],
      [call('tan', x), k, 1 / Math.cos(k) ** 2],
      [call('asin', x), k, 1 / Math.sqrt(1 - k * k)],
      [call('acos', x), k, -1 / Math.sqrt(1 - k * k)],
      [call('atan', x), k, 1 / (1 + k * k)],
      [call('sinh', x), k, Math.cosh(k)],
      [call('cosh', x), k, Math.sinh(k)],
      [call('tanh', x), k, 1 / Math.cosh(k) ** 2],
      [call('exprel', x), k, (k * Math.exp(k) - Math.expm1(k)) / (k * k)],
      [call('abs', x), -k, -1],
      [call('sign', x), k, 0],
      [call('min', x, mul(num(3), x)), k, 1],
      [call('max', x, mul(num(3), x)), k, 3],
      [call('min', x, num(5), neg(x)), k, -1],
      [pow(x, num(7)), k, 7 * k ** 6],
      [pow(x, num(-3)), k, -3 * k ** -4],
      [pow(x, num(2.5)), k, 2.5 * k ** 1.5],
      [pow(num(2), x), k, Math.LN2 * 2 ** k],
      [pow(x, x), k, k ** k * (1 + Math.log(k))],
      [div(num(1), x), k, -1 / k ** 2],
      [div(x, sub(num(2), x)), k, 2 / (2 - k) ** 2],
    ]
    for (const [e, point, slope] of cases) {
      expect(at(values(one(e), [point]).j, 0) / (slope || 1)).toBeCloseTo(slope === 0 ? 0 : 1, 14)
    }
  })

  it('takes over the branch of min and max that holds, even beside an infinite slope', () => {
    expect(values(one(call('max', num(-1), call('sqrt', x))), [0.25]).j).toEqual([1])
    expect(values(one(call('min', num(-1), call('sqrt', x))), [0]).j).toEqual([0])
  })

  it('costs less than three times F, also for a neuron', () => {
    const shifted = (v: number) => add(sym('V'), num(v))
    const rate = (a: number, v: number, s: number) =>
      div(mul(num(a), shifted(v)), sub(num(1), call('exp', neg(div(shifted(v), num(s))))))
    const decay = (a: number, v: number, s: number) => mul(num(a), call('exp', neg(div(shifted(v), num(s)))))
    const gate = (key: string, up: Expression, down: Expression) =>
      sub(mul(up, sub(num(1), sym(key))), mul(down, sym(key)))
    const current = (g: string, open: Expression, v: number) => mul(mul(sym(g), open), sub(sym('V'), num(v)))
    const sodium = current('gNa', mul(pow(sym('m'), num(3)), sym('h')), 50)
    const potassium = current('gK', pow(sym('n'), num(4)), -77)
    const model = system(
      {
        V: sub(sub(sub(sym('I'), sodium), potassium), current('gL', num(1), -54.387)),
        m: gate('m', rate(0.1, 40, 10), decay(4, 65, 18)),
        h: gate('h', decay(0.07, 65, 20), div(num(1), add(num(1), call('exp', neg(div(shifted(35), num(10))))))),
        n: gate('n', rate(0.01, 55, 10), decay(0.125, 65, 80)),
      },
      { parameters: { I: 10, gNa: 120, gK: 36, gL: 0.3 } },
    )
    const graph = buildGraph(model)
    const [alone, both] = [functionTape(graph).code.length, jacobianTape(graph).tape.code.length]
    expect(both).toBeLessThan(3 * alone)
  })
})

describe('what else a compiled model tells', () => {
  it('derivatives in parameters, helpers, the observed quantity with its gradient', () => {
    const q = mul(sym('a'), mul(x, y))
    const model = system(
      { x: add(sym('q'), sym('a')), y: pow(sym('a'), num(2)) },
      { helpers: { q }, parameters: { a: 3 } },
    )
    const compiled = compileModel(model)
    const [state, p] = [Float64Array.of(2, 5), parameters(model)]
    const out = new Float64Array(2)
    compiled.parameterDerivative(state, p, 1, out)
    expect([...out]).toEqual([11, 6])
    compiled.parameterDerivative(state, p, 0, out)
    expect([...out]).toEqual([0, 0])
    const helpers = new Float64Array(1)
    compiled.helpers(state, p, helpers)
    expect([...helpers]).toEqual([30])
    expect(compiled.observed(state, p, out)).toBe(30)
    expect([...out]).toEqual([15, 6])
    const jet = new Float64Array(4)
    compiled.observedJet(state, p, Float64Array.of(1, 2), 3, jet)
    // 3 (2 + s)(5 + 2 s) = 30 + 27 s + 6 s².
    expect([...jet]).toEqual([30, 27, 6, 0])
  })

  it('kinks near the point only, by their own size', () => {
    const model = compileModel(system({ x: sub(call('abs', sub(x, num(1))), y), y: call('max', y, mul(num(2), x)) }))
    const p = Float64Array.of(0.5)
    expect(model.smooth).toBe(false)
    expect(model.kinkAt(Float64Array.of(1, 0), p, 1e-9)).toBe(true)
    expect(model.kinkAt(Float64Array.of(1 + 1e-12, 0), p, 1e-9)).toBe(true)
    expect(model.kinkAt(Float64Array.of(1.01, 0), p, 1e-9)).toBe(false)
    expect(model.kinkAt(Float64Array.of(0.25, 0.5), p, 1e-9)).toBe(true)
    const smooth = compileModel(system({ x: neg(x) }))
    expect([smooth.smooth, smooth.kinkAt(Float64Array.of(0), p, 1)]).toEqual([true, false])
    // A kink of parameters alone is none in the states.
    const parametric = compileModel(system({ x: mul(call('abs', sym('k')), x) }, { parameters: { k: 0 } }))
    expect(parametric.kinkAt(Float64Array.of(1), Float64Array.of(0.5, 0), 1e-9)).toBe(false)
  })

  it('lines where a value or a slope is not finite, each where it arises', () => {
    const model = compileModel(
      system({ x: mul(sym('h'), x), y: div(num(1), y), z: call('sqrt', sym('z')) }, { helpers: { h: call('log', x) } }),
    )
    const p = Float64Array.of(0.5)
    expect(model.notFiniteLines(Float64Array.of(1, 1, 1), p)).toEqual([])
    expect(model.notFiniteLines(Float64Array.of(-1, 1, 1), p)).toEqual([1])
    expect(model.notFiniteLines(Float64Array.of(1, 0, 1), p)).toEqual([3])
    // sqrt has a value at 0, but no slope.
    expect(model.notFiniteLines(Float64Array.of(-1, 0, 0), p)).toEqual([1, 3, 4])
    const overflow = compileModel(system({ x: call('exp', mul(num(100), x)) }))
    expect(overflow.notFiniteLines(Float64Array.of(8), p)).toEqual([1])
  })
})
