import { describe, expect, it } from 'vitest'
import { compileModel } from '#shared/model/compile.ts'
import type { CompiledModel } from '#shared/model/compiled-model.ts'
import { checkModel } from '#shared/model/system.ts'
import { findSteadyStates, type SteadyStateResult } from '#shared/stability/steady-states.ts'

const at = (a: ArrayLike<number>, i: number): number => a[i] ?? Number.NaN
type Box = Record<string, [number, number]>

/** A model from its text; every parameter ranges one up and one down, the first is the control. */
function model(equations: string, box: Box, parameters: Record<string, number> = {}): CompiledModel {
  const checked = checkModel({
    format: 'brinkbook-model',
    version: 1,
    title: 'test',
    equations,
    parameters: Object.entries({ p: 0, ...parameters }).map(([symbol, value]) => ({
      symbol,
      value,
      low: value - 1,
      high: value + 1,
    })),
    states: Object.entries(box).map(([symbol, [low, high]]) => ({ symbol, low, high })),
    control: 'p',
    observed: Object.keys(box)[0] ?? 'x',
  })
  if (!checked.ok) throw new Error(JSON.stringify(checked.errors))
  return compileModel(checked.system)
}

function search(equations: string, box: Box, parameters: Record<string, number> = {}): SteadyStateResult {
  const compiled = model(equations, box, parameters)
  return findSteadyStates(
    compiled,
    Float64Array.from(compiled.system.parameters, ({ value }) => value),
  )
}

/** The states as plain arrays, sorted by their coordinates. */
const points = (result: SteadyStateResult) =>
  result.states.map(({ x }) => [...x]).sort((a, b) => a.reduce((sign, v, j) => sign || Math.sign(v - at(b, j)), 0))

function expectStates(result: SteadyStateResult, expected: number[][], digits = 12) {
  expect(points(result)).toHaveLength(expected.length)
  points(result).forEach((point, k) => {
    point.forEach((value, j) => {
      expect(value).toBeCloseTo(at(expected[k] ?? [], j), digits)
    })
  })
}

const proved = { complete: true, continuum: false, unresolved: 0 }

describe('simple steady states', () => {
  it('are all found and proved: Lorenz 1963 at r = 28 has 0 and ±√72', () => {
    // x = y = ±√(b(r-1)) with b = 8/3, z = r - 1.
    const result = search(
      'dx/dt = s*(y - x)\ndy/dt = r*x - y - x*z\ndz/dt = x*y - 8/3*z',
      { x: [-20, 20], y: [-20, 20], z: [-5, 45] },
      { s: 10, r: 28 },
    )
    const root = Math.sqrt(72)
    expectStates(result, [
      [-root, -root, 27],
      [0, 0, 0],
      [root, root, 27],
    ])
    expect(result).toMatchObject({ ...proved, notFinite: false })
    expect(result.states.every((state) => state.proved && !state.multiple)).toBe(true)
    // Zero is zero, not 1e-9.
    expect(result.states.some(({ x }) => x.every((v) => v === 0))).toBe(true)
  })

  it('none is a proof too: a pendulum under too large a torque', () => {
    expect(search('da/dt = w\ndw/dt = 1.5 - sin(a) - w', { a: [-3.2, 3.2], w: [-4, 4] })).toMatchObject({
      ...proved,
      states: [],
    })
  })

  it('many are all told: sin 50x has 31 zeros in -1 .. 1, sin 10x with sin 10y 49', () => {
    expectStates(
      search('dx/dt = sin(50*x)', { x: [-1, 1] }),
      Array.from({ length: 31 }, (_, k) => [((k - 15) * Math.PI) / 50]),
    )
    const grid = search('dx/dt = sin(10*x)\ndy/dt = sin(10*y)', { x: [-1, 1], y: [-1, 1] })
    expect(grid.states).toHaveLength(49)
    expect(grid).toMatchObject(proved)
    const coupled = search('dx/dt = x - x^3 + 0.1*(y - x)\ndy/dt = y - y^3 + 0.1*(x - y)', { x: [-2, 2], y: [-2, 2] })
    // Small coupling keeps all 3 x 3 combinations.
    expect(coupled.states).toHaveLength(9)
    expect(coupled).toMatchObject(proved)
  })

  it('on the edge of the box are in, further out than 1e-9 of a width they are not', () => {
    expectStates(search('dx/dt = x*(x - 1)', { x: [0, 1] }), [[0], [1]])
    expectStates(search('dx/dt = x + 1e-10', { x: [0, 1] }), [[-1e-10]])
    expectStates(search('dx/dt = x + 1e-8', { x: [0, 1] }), [])
    expect(search('dx/dt = (x + 1e-8)*(x - 0.5)', { x: [0, 1] })).toMatchObject(proved)
  })

  it('are polished to the last digit the equations allow', () => {
    // x³ - 2x - 5 = 0 (Wallis's example): 2.0945514815423265 (Numerical root, OEIS A007493).
    const result = search('dx/dt = x^3 - 2*x - 5', { x: [-10, 10] })
    expect(Math.abs(at(points(result)[0] ?? [], 0) - 2.0945514815423265)).toBeLessThanOrEqual(2 ** -51)
    expect(
      at(
        result.states.map((state) => state.residual),
        0,
      ),
    ).toBeLessThan(1e-14)
  })

  it('near each other stay apart as long as both are proved', () => {
    const close = search('dx/dt = (x - 0.5)*(x - 0.50001)', { x: [-1, 1] })
    expectStates(close, [[0.5], [0.50001]])
    expect(close).toMatchObject(proved)
  })

  it('in a box a thousand million wide are told apart at their own scale', () => {
    // Logistic growth with a saturating harvest: 0 and the roots of (1 - x/100)(1 + x) = 2, that is x² - 99x + 100 = 0.
    const box: Box = { x: [0, 1e9] }
    const half = Math.sqrt(99 ** 2 - 400) / 2
    const result = search('dx/dt = x*(1 - x/100) - 2*x/(1 + x)', box)
    expectStates(result, [[0], [49.5 - half], [49.5 + half]], 10)
    expect(result).toMatchObject(proved)
    const chain = search(
      'dx/dt = x*(1 - x/100) - 0.8*x*y/(1 + x)\ndy/dt = 0.8*x*y/(1 + x) - y*z - 0.1*y\ndz/dt = y*z - 0.5*z',
      { x: [0, 1e9], y: [0, 1e9], z: [0, 1e9] },
    )
    // Empty, prey alone, prey and predator (0.8x = 0.1(1+x): x = 1/7), all three (y = 1/2), and (0, 1/2, -0.1), which is
    // within 1e-9 of the width of z.
    const found = points(chain).map(([x = 0, y = 0]) => [x, y])
    expect(found).toHaveLength(5)
    expect(found.some(([x = 0]) => Math.abs(x - 1 / 7) < 1e-12)).toBe(true)
    expect(found.some(([x, y]) => x === 100 && y === 0)).toBe(true)
    expect(chain).toMatchObject(proved)
  })
})

describe('rings and networks', () => {
  const ring = (n: number, f: (source: string) => string) =>
    Array.from({ length: n }, (_, i) => `dx${i}/dt = -x${i} + ${f(`x${(i + n - 1) % n}`)}`).join('\n')
  const box = (n: number, low: number, high: number): Box =>
    Object.fromEntries(Array.from({ length: n }, (_, i) => [`x${i}`, [low, high]]))

  it('a ring of twelve activators 5x⁴/(1 + x⁴) has its three uniform states and no other', () => {
    // x (1 + x⁴) = 5 x⁴: x = 0 and the two positive roots of x⁴ - 5x³ + 1; the ring is monotone, so states are uniform.
    const result = search(
      ring(12, (v) => `5*${v}^4/(1 + ${v}^4)`),
      box(12, 0, 10),
    )
    expect(result).toMatchObject(proved)
    expect(result.states).toHaveLength(3)
    for (const [x = 0, ...others] of points(result)) {
      expect(Math.abs(x * (x ** 4 - 5 * x ** 3 + 1))).toBeLessThan(1e-12 * Math.max(1, x ** 5))
      for (const other of others) expect(other).toBeCloseTo(x, 12)
    }
  })

  it('a ring of an odd number of repressors has one state, of an even number three', () => {
    for (const [n, count] of [
      [3, 1],
      [11, 1],
      [2, 3],
      [12, 3],
      [30, 3],
    ] as const) {
      const result = search(
        ring(n, (v) => `5/(1 + ${v}^4)`),
        box(n, 0, 10),
      )
      expect(result).toMatchObject(proved)
      expect(result.states).toHaveLength(count)
    }
  })

  it('too many states for the budget end the search, not the caller: what is listed is right, and not called complete', () => {
    const chain = Array.from(
      { length: 30 },
      (_, i) => `dx${i}/dt = x${i} - x${i}^3 + 0.1*(x${(i + 1) % 30} - x${i})`,
    ).join('\n')
    const compiled = model(chain, box(30, -2, 2))
    const p = Float64Array.of(0)
    const result = findSteadyStates(compiled, p)
    expect(result.complete).toBe(false)
    expect(result.states.length).toBeGreaterThan(10)
    const f = new Float64Array(30)
    for (const { x } of result.states) {
      compiled.rhs(x, p, f)
      expect(Math.max(...f.map(Math.abs))).toBeLessThan(1e-12)
    }
    // The same budget, the same answer.
    expect(findSteadyStates(compiled, p).states.length).toBe(result.states.length)
    expect(findSteadyStates(compiled, p, { shouldStop: () => true })).toMatchObject({ complete: false })
  })
})

describe('multiple steady states', () => {
  const only = (result: SteadyStateResult, expected: number[], digits = 14) => {
    expectStates(result, [expected], digits)
    expect(result).toMatchObject({ complete: false, continuum: false, unresolved: 1 })
    expect(result.states[0]).toMatchObject({ proved: false, multiple: true })
  }

  it('at a fold are listed once, unproved, to all digits', () => {
    only(search('dx/dt = p - x^2', { x: [-2, 2] }), [0])
    only(search('dx/dt = -(x - 0.7)^2\ndy/dt = x - y', { x: [-2, 2], y: [-2, 2] }), [0.7, 0.7])
    only(search('dx/dt = -(x - 0.7)^2 + 0.3*(y - x)\ndy/dt = x - y', { x: [-2, 2], y: [-2, 2] }), [0.7, 0.7])
    // e^x - 1 - x vanishes doubly at 0 and cancels there.
    only(search('dx/dt = exp(x) - 1 - x', { x: [-1, 2] }), [0], 12)
  })

  it('at a pitchfork too, although plain Newton gives a third of the digits only', () => {
    only(search('dx/dt = p*x - x^3', { x: [-2, 2] }), [0])
    only(search('dx/dt = -(x - 0.3)^3\ndy/dt = x^2 - y', { x: [-2, 2], y: [-2, 2] }), [0.3, 0.09])
    only(search('dx/dt = tan(x) - x', { x: [-1, 1] }), [0])
  })

  it('just past a fold are two proved ones, just before it none', () => {
    expectStates(search('dx/dt = 1e-8 - (x - 0.7)^2', { x: [-2, 2] }), [[0.6999], [0.7001]])
    expect(search('dx/dt = -1e-8 - (x - 0.7)^2', { x: [-2, 2] })).toMatchObject({ ...proved, states: [] })
  })
})

describe('a continuum of steady states', () => {
  const cases: [string, string, Box][] = [
    ['a product', 'dx/dt = x*y\ndy/dt = -x*y', { x: [-2, 2], y: [-2, 2] }],
    ['an axis', 'dx/dt = x*y\ndy/dt = x*(y - 1)', { x: [-2, 2], y: [-2, 2] }],
    ['an epidemic without births', 'dS/dt = -2*S*I\ndI/dt = 2*S*I - I\ndR/dt = I', { S: [0, 1], I: [0, 1], R: [0, 1] }],
    ['a conserved sum', 'dA/dt = -2*A + B\ndB/dt = 2*A - B', { A: [0, 5], B: [0, 5] }],
    ['a line of zeros', 'dx/dt = 0*x\ndy/dt = x - y', { x: [0, 5], y: [0, 5] }],
    ['everything', 'dx/dt = 0*x\ndy/dt = 0*y', { x: [0, 5], y: [0, 5] }],
    ['a circle', 'dx/dt = (x^2 + y^2 - 1)*x\ndy/dt = (x^2 + y^2 - 1)*y', { x: [-2, 2], y: [-2, 2] }],
  ]
  for (const [name, equations, box] of cases) {
    it(`is seen and said: ${name}`, () => {
      const compiled = model(equations, box)
      const result = findSteadyStates(compiled, Float64Array.of(0))
      expect(result).toMatchObject({ continuum: true, complete: false })
      // One member stands for it, and it is one.
      expect(result.states.filter((state) => state.multiple)).toHaveLength(1)
      const f = new Float64Array(compiled.n)
      for (const { x } of result.states) {
        compiled.rhs(x, Float64Array.of(0), f)
        expect(Math.max(...f.map(Math.abs))).toBeLessThan(1e-14)
      }
    })
  }

  it('is not seen in ordinary or in merely flat steady states', () => {
    for (const power of [3, 5, 7, 9]) expect(search(`dx/dt = -x^${power}`, { x: [-2, 2] }).continuum).toBe(false)
    expect(search('dx/dt = x*(1 - y)\ndy/dt = y*(x - 1)', { x: [0, 3], y: [0, 3] })).toMatchObject(proved)
  })
})

describe('places where the model is not finite', () => {
  it('are reported and do no harm', () => {
    const log = search('dx/dt = log(x)', { x: [-2, 2] })
    expectStates(log, [[1]])
    expect(log).toMatchObject({ ...proved, notFinite: true })
    const pole = search('dx/dt = 1/x + 1', { x: [-2, 2] })
    expectStates(pole, [[-1]])
    expect(pole).toMatchObject({ ...proved, notFinite: true })
    expect(search('dx/dt = 1/x', { x: [-2, 2] })).toMatchObject({ ...proved, states: [], notFinite: true })
    expect(search('dx/dt = log(-1 - x^2)', { x: [-2, 2] })).toMatchObject({ ...proved, states: [], notFinite: true })
    expect(
      search('dx/dt = sqrt(x) - 0.5*x', { x: [0, 9] }).states.some(({ x }) => Math.abs(at(x, 0) - 4) < 1e-12),
    ).toBe(true)
  })

  it('do not hide a second state beyond a gap: x + (x² - 1)^1.5 - 2 has one on each side', () => {
    // Undefined between -1 and 1. F(-1) = -3 and F(-3) = 17.6; F(1) = -1 and F(3) = 23.6: a change of sign on each side.
    const result = search('dx/dt = x + (x^2 - 1)^1.5 - 2', { x: [-3, 3] })
    expect(result).toMatchObject(proved)
    expect(result.states).toHaveLength(2)
    for (const [x = 0] of points(result)) expect(x + (x * x - 1) ** 1.5).toBeCloseTo(2, 12)
    expect(points(result).map(([x = 0]) => Math.sign(x))).toEqual([-1, 1])
  })

  it('include no steady state that is none: tan x - x beside its poles', () => {
    const result = search('dx/dt = tan(x) - x', { x: [2, 10] })
    // First two positive solutions of tan x = x: 4.4934094579, 7.7252518369 (zeros of the spherical Bessel function j1).
    expectStates(result, [[4.493409457909064], [7.725251836937707]], 11)
    expect(result).toMatchObject(proved)
  })
})

describe('closed forms that are no tapes', () => {
  it('are searched as well', () => {
    const tape = model('dx/dt = x*(1 - x)*(x - 0.25) - y\ndy/dt = 0.1*(x - 2*y)', { x: [-1, 2], y: [-1, 2] })
    const {
      system,
      n,
      m,
      smooth,
      rhs,
      jacobian,
      parameterDerivative,
      jet,
      observed,
      observedJet,
      helpers,
      kinkAt,
      notFiniteLines,
      rhsInterval,
      jacobianInterval,
    } = tape
    const plain: CompiledModel = {
      system,
      n,
      m,
      smooth,
      rhs,
      jacobian,
      parameterDerivative,
      jet,
      observed,
      observedJet,
      helpers,
      kinkAt,
      notFiniteLines,
      rhsInterval,
      jacobianInterval,
    }
    const result = findSteadyStates(plain, Float64Array.of(0))
    expect(result).toMatchObject(proved)
    expect(points(result)).toEqual(points(findSteadyStates(tape, Float64Array.of(0))))
  })
})
