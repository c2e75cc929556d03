import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { compileModel } from '#shared/model/compile.ts'
import type { Expression } from '#shared/model/expression.ts'
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

/** Enclosures of F and J of a model of two states over a box. */
function enclose(model: ReturnType<typeof system>, low: number[], high: number[]) {
  const compiled = compileModel(model)
  const { n } = compiled
  const p = parameters(model)
  const [lo, hi] = [Float64Array.from(low), Float64Array.from(high)]
  const [flo, fhi, jlo, jhi] = [n, n, n * n, n * n].map((size) => new Float64Array(size))
  if (!flo || !fhi || !jlo || !jhi) throw new Error('four arrays')
  compiled.rhsInterval(lo, hi, p, p, flo, fhi)
  compiled.jacobianInterval(lo, hi, p, p, jlo, jhi)
  return { f: { lo: flo, hi: fhi }, j: { lo: jlo, hi: jhi }, coverage: compiled.coverage(lo, hi, p, p, false) }
}

describe('the tape on intervals', () => {
  const coordinate = randomCoordinate
  const share = fc.double({ min: 0, max: 1, noNaN: true })

  it('encloses values and slopes at every point of the box, for random expressions', () => {
    fc.assert(
      fc.property(
        randomExpression(true),
        randomExpression(true),
        fc.tuple(coordinate, coordinate, coordinate, coordinate, share, share),
        (a, b, [x1, x2, y1, y2, s, t]) => {
          const model = system({ x: a, y: b })
          const [low, high] = [
            [Math.min(x1, x2), Math.min(y1, y2)],
            [Math.max(x1, x2), Math.max(y1, y2)],
          ]
          const point = [s, t].map((part, k) => Math.min(at(high, k), at(low, k) + part * (at(high, k) - at(low, k))))
          const compiled = compileModel(model)
          const [f, j] = [new Float64Array(2), new Float64Array(4)]
          compiled.jacobian(Float64Array.from(point), parameters(model), f, j)
          const [box, thin] = [enclose(model, low, high), enclose(model, point, point)]
          const check = (value: number, wide: [number, number], narrow: [number, number]) => {
            expect(
              wide[0] <= wide[1] || (wide[0] === Number.POSITIVE_INFINITY && wide[1] === Number.NEGATIVE_INFINITY),
            ).toBe(true)
            if (!Number.isFinite(value) || !Number.isFinite(narrow[0]) || !Number.isFinite(narrow[1])) return
            // Both contain the true value, so they meet; what was computed differs from it by its rounding, which the
            // enclosure of the point itself measures.
            expect(narrow[0] <= wide[1] && wide[0] <= narrow[1]).toBe(true)
            const slack = 4 * (narrow[1] - narrow[0]) + 1e-14 * Math.abs(value) + 1e-300
            expect(narrow[0] - slack <= value && value <= narrow[1] + slack).toBe(true)
          }
          for (const i of [0, 1])
            check(at(f, i), [at(box.f.lo, i), at(box.f.hi, i)], [at(thin.f.lo, i), at(thin.f.hi, i)])
          // A computed slope at a kink is the mean of both sides, inside the hull all the same.
          for (const k of [0, 1, 2, 3])
            check(at(j, k), [at(box.j.lo, k), at(box.j.hi, k)], [at(thin.j.lo, k), at(thin.j.hi, k)])
        },
      ),
      { numRuns: 1000 },
    )
  })

  it('is empty only where the model is defined nowhere, and says where it is defined in part', () => {
    const model = system({ x: call('log', x), y: x })
    const nowhere = enclose(model, [-2, 0], [-1, 1])
    expect([at(nowhere.f.lo, 0), at(nowhere.f.hi, 0), nowhere.coverage]).toEqual([
      Number.POSITIVE_INFINITY,
      Number.NEGATIVE_INFINITY,
      2,
    ])
    expect(enclose(model, [-1, 0], [1, 1]).coverage).toBe(1)
    expect(enclose(model, [1, 0], [2, 1]).coverage).toBe(0)
    const pole = enclose(system({ x: div(num(1), x), y: x }), [-1, 0], [1, 1])
    expect([at(pole.f.lo, 0), at(pole.f.hi, 0), pole.coverage]).toEqual([
      Number.NEGATIVE_INFINITY,
      Number.POSITIVE_INFINITY,
      1,
    ])
    expect(enclose(system({ x: call('sign', x), y: x }), [-1, 0], [1, 1]).coverage).toBe(1)
  })

  it('gives the hull of both slopes at a kink', () => {
    const { j, coverage } = enclose(system({ x: call('abs', x), y: call('max', mul(num(3), y), y) }), [-1, -1], [1, 1])
    expect([at(j.lo, 0), at(j.hi, 0), coverage]).toEqual([-1, 1, 0])
    expect(at(j.lo, 3)).toBeCloseTo(1, 14)
    expect(at(j.hi, 3)).toBeCloseTo(3, 14)
    const jump = enclose(system({ x: call('sign', x), y: x }), [-1, 0], [1, 1])
    expect(at(jump.j.hi, 0)).toBe(Number.POSITIVE_INFINITY)
  })

  it('encloses what folding has rounded: 8/3 and pi are not doubles', () => {
    // fl(8/3) - 8/3 = -1.48e-16, Math.PI - pi = -1.22e-16.
    const third = enclose(system({ x: sub(x, div(num(8), num(3))) }), [8 / 3], [8 / 3])
    expect(at(third.f.lo, 0)).toBeLessThan(-1.48e-16)
    expect(at(third.f.hi, 0)).toBeLessThan(1e-15)
    const circle = enclose(system({ x: sub(x, { kind: 'constant', name: 'pi' }) }), [Math.PI], [Math.PI])
    expect(at(circle.f.lo, 0)).toBeLessThan(-1.22e-16)
    // 1/4 and 3 - 1 are.
    const exact = enclose(system({ x: sub(x, mul(div(num(1), num(4)), sub(num(3), num(1)))) }), [0.5], [0.5])
    expect([at(exact.f.lo, 0), at(exact.f.hi, 0)]).toEqual([0, 0])
  })

  it('follows the parameters from call to call', () => {
    const model = compileModel(system({ x: mul(call('exp', sym('k')), x) }, { parameters: { k: 0 } }))
    const [lo, hi] = [new Float64Array(1), new Float64Array(1)]
    for (const k of [0, 1, 0, 2]) {
      const p = Float64Array.of(0.5, k)
      model.rhsInterval(Float64Array.of(1), Float64Array.of(1), p, p, lo, hi)
      expect(at(lo, 0) <= Math.exp(k) && Math.exp(k) <= at(hi, 0)).toBe(true)
      expect(at(hi, 0) - at(lo, 0)).toBeLessThan(1e-13)
    }
    model.rhsInterval(Float64Array.of(1), Float64Array.of(1), Float64Array.of(0.5, 0), Float64Array.of(0.5, 1), lo, hi)
    expect(at(lo, 0)).toBeCloseTo(1, 13)
    expect(at(hi, 0)).toBeCloseTo(Math.E, 13)
  })
})

describe('contraction of a box', () => {
  const contract = (equations: Record<string, Expression>, low: number[], high: number[]) => {
    const model = system(equations)
    const compiled = compileModel(model)
    const [lo, hi] = [Float64Array.from(low), Float64Array.from(high)]
    const possible = compiled.contractBox(lo, hi, parameters(model))
    return { possible, lo: [...lo], hi: [...hi] }
  }

  it('solves single occurrences at once, whatever the function', () => {
    const cases: [Expression, number, number, number][] = [
      [sub(call('exp', x), num(3)), -5, 5, Math.log(3)],
      [sub(call('log', x), num(1)), -5, 5, Math.E],
      [sub(call('log10', x), num(1)), -5, 50, 10],
      [sub(call('log1p', x), num(1)), -5, 5, Math.E - 1],
      [sub(call('expm1', x), num(1)), -5, 5, Math.LN2],
      [sub(call('sqrt', x), num(1.5)), -5, 5, 2.25],
      [sub(call('sin', x), num(0.5)), -1, 1, Math.PI / 6],
      [sub(call('cos', x), num(0.5)), 0, 3, Math.PI / 3],
      [sub(call('tan', x), num(1)), -1.5, 4, Math.PI / 4],
      [sub(call('asin', x), num(0.5)), -1, 1, Math.sin(0.5)],
      [sub(call('acos', x), num(0.5)), -1, 1, Math.cos(0.5)],
      [sub(call('atan', x), num(1)), -9, 9, Math.tan(1)],
      [sub(call('sinh', x), num(2)), -9, 9, Math.asinh(2)],
      [sub(call('cosh', x), num(2)), 0, 9, Math.acosh(2)],
      [sub(call('tanh', x), num(0.5)), -9, 9, Math.atanh(0.5)],
      [sub(div(num(1), add(num(1), call('exp', neg(x)))), num(0.25)), -9, 9, Math.log(1 / 3)],
      [sub(div(pow(x, num(2)), add(num(2), pow(x, num(2)))), num(0.5)), 0, 9, Math.SQRT2],
      [sub(pow(x, num(5)), num(-32)), -9, 9, -2],
      [sub(pow(x, num(1.5)), num(8)), -9, 9, 4],
      [sub(div(num(6), x), num(2)), -9, 9, 3],
      [sub(call('abs', x), num(2)), 0, 9, 2],
      [sub(call('max', x, num(1)), num(3)), -9, 9, 3],
      [sub(call('min', x, num(5)), num(3)), -9, 9, 3],
    ]
    for (const [e, low, high, root] of cases) {
      const result = contract({ x: e }, [low], [high])
      const [lo, hi] = [at(result.lo, 0), at(result.hi, 0)]
      // cut to the root, or (tan, over two periods) to the hull of both roots
      expect(
        result.possible && lo <= root * (1 + Math.sign(root) * 1e-13) && hi >= root * (1 - Math.sign(root) * 1e-13),
      ).toBe(true)
      if (e.kind === 'binary' && e.left.kind === 'call' && e.left.name === 'tan')
        expect(hi).toBeCloseTo(Math.PI * 1.25, 12)
      else expect(hi - lo).toBeLessThan(1e-12 * Math.abs(root))
    }
    // Without a closed inverse, by halving: z/(e^z - 1) = 2 at -1.5936.
    const halved = contract({ x: sub(div(x, call('expm1', x)), num(2)) }, [-9], [9])
    expect(at(halved.lo, 0)).toBeLessThan(-1.5936)
    expect(at(halved.hi, 0)).toBeGreaterThan(-1.5936)
    expect(at(halved.hi, 0) - at(halved.lo, 0)).toBeLessThan(1)
  })

  it('excludes boxes without zeros and cuts away where the model is not defined', () => {
    expect(contract({ x: add(pow(x, num(2)), num(1)) }, [-9], [9]).possible).toBe(false)
    expect(contract({ x: div(num(1), x) }, [-9], [9]).possible).toBe(false)
    expect(contract({ x: num(1) }, [-9], [9]).possible).toBe(false)
    expect(contract({ x: num(0) }, [-9], [9])).toEqual({ possible: true, lo: [-9], hi: [9] })
    expect(at(contract({ x: sub(call('sqrt', x), y), y: sub(y, y) }, [-9, -3], [9, 3]).lo, 0)).toBe(0)
    // The same quantity in two equations: x y/(1 + x) is 0 by the second and -1 by the first.
    const q = div(mul(x, y), add(num(1), x))
    expect(contract({ x: sub(x, q), y: sub(q, mul(y, num(0.1))) }, [-1, 0], [-1, 1e-3]).possible).toBe(false)
  })

  it('never loses a zero, for random expressions', () => {
    const coordinate = randomCoordinate
    const size = fc.double({ min: 1e-3, max: 3, noNaN: true })
    let tried = 0
    fc.assert(
      fc.property(
        randomExpression(true),
        randomExpression(true),
        coordinate,
        coordinate,
        size,
        size,
        (a, b, u, v, s, t) => {
          const plain = system({ x: a, y: b })
          const [f, j] = [new Float64Array(2), new Float64Array(4)]
          compileModel(plain).jacobian(Float64Array.of(u, v), parameters(plain), f, j)
          if (![a, b].every((e) => Number.isFinite(evaluate(e, { x: u, y: v, c: 0.5 })))) return
          const noise = enclose(plain, [u, v], [u, v]).f
          if (![0, 1].every((i) => at(noise.hi, i) - at(noise.lo, i) < 1e-10)) return
          // With the values taken off (up to rounding) a regular Jacobian makes sure of a true zero within 1e-6.
          const sizes = [0, 1].map((i) => Math.abs(at(j, 2 * i)) + Math.abs(at(j, 2 * i + 1)))
          const determinant = at(j, 0) * at(j, 3) - at(j, 1) * at(j, 2)
          if (!(Math.abs(determinant) > 1e-2 * at(sizes, 0) * at(sizes, 1)) || !(Math.min(...sizes) > 1e-3)) return
          const model = system(
            { x: sub(a, sym('k')), y: sub(b, sym('l')) },
            { parameters: { k: at(f, 0), l: at(f, 1) } },
          )
          const compiled = compileModel(model)
          const [lo, hi] = [Float64Array.of(u - s, v - t), Float64Array.of(u + t, v + s)]
          const possible = compiled.contractBox(lo, hi, parameters(model))
          tried++
          const reach = (value: number) => 1e-6 * (1 + Math.abs(value))
          expect(possible).toBe(true)
          expect(at(lo, 0) - reach(u) <= u && u <= at(hi, 0) + reach(u)).toBe(true)
          expect(at(lo, 1) - reach(v) <= v && v <= at(hi, 1) + reach(v)).toBe(true)
        },
      ),
      { numRuns: 3000 },
    )
    expect(tried).toBeGreaterThan(50)
  })
})
