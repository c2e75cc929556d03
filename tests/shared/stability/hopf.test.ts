import { describe, expect, test } from 'vitest'
import { cardOf, normalForm, type ShortModel, warningCodes } from './documents.ts'

const box = [-2, 2] as const
const plane = { x: box, y: box }
const space = { x: box, y: box, u: box, v: box }

/** r' = growth * r - r³ in Cartesian form, turning at rate 1: a Hopf point wherever the growth passes zero. */
function growing(growth: string, control: ShortModel['control'], parameters: Record<string, number> = {}): ShortModel {
  return {
    equations: `g = ${growth}\ndx/dt = g*x - y - x*(x^2+y^2)\ndy/dt = x + g*y - y*(x^2+y^2)`,
    control,
    parameters,
    states: plane,
    observed: 'x',
  }
}

describe('what is no Hopf point', () => {
  test('a real pair ±a: eigenvalues 0.3 mu and 0.7 mu of a saddle whose trace vanishes', () => {
    // A = [[0.3 mu, 1], [1, 0.7 mu]]: determinant 0.21 mu² - 1 < 0 up to |mu| = 2.18, trace 0 at mu = 0: λ = ±1 there
    const card = cardOf({
      equations: 'dx/dt = y + mu*0.3*x\ndy/dt = x + mu*0.7*y',
      control: { mu: [0.1, -1, 1.3] },
      states: plane,
      observed: 'x',
    })
    expect(card.hopf).toEqual([])
    expect(card.steadyStates?.[0]?.kind).toBe('saddle')
  })

  test('the centre of predator and prey, all along its branch', () => {
    // x' = x(1 - y), y' = -m y(1 - x): eigenvalues ±i sqrt(m) at (1, 1) for every m
    const card = cardOf({
      equations: 'dx/dt = x*(1-y)\ndy/dt = -m*y*(1-x)',
      control: { m: [1, 0.5, 2] },
      states: { x: [-0.1, 3], y: [-0.1, 3] },
      observed: 'x',
    })
    expect(card.hopf).toEqual([])
    expect(card.steadyStates?.map(({ kind, stable }) => [kind, stable])).toEqual([
      ['saddle', false],
      ['centre', false],
    ])
    expect(card.window).toBeNull()
  })

  test('two pairs that leave the axis without crossing it, as in a gyroscopic system', () => {
    // x'' = -x + mu y', y'' = (k - 1) y - mu x': energy is kept, so eigenvalues come as ±λ; no pair ever changes sides
    const card = cardOf({
      equations: 'dx/dt = u\ndu/dt = -x + mu*v\ndy/dt = v\ndv/dt = 2*y - mu*u',
      control: { mu: [1, 0.1, 3] },
      states: space,
      observed: 'x',
    })
    expect(card.hopf).toEqual([])
  })

  test('an eigenvalue that only touches the axis, or falls short of it by 1e-10', () => {
    for (const top of [0, -1e-10]) {
      const card = cardOf(growing(`${top} - (mu-0.3137)^2`, { mu: [-0.1, -1, 1.3] }))
      expect(card.hopf, `top ${top}`).toEqual([])
    }
  })
})

describe('what is easily missed', () => {
  test.each([1e-3, 1e-6, 1e-10])('two crossings that nearly touch: growth %s at its top', (top) => {
    // growth = top - (mu - 0.3137)²: zeros at 0.3137 ± sqrt(top), rates ∓2 sqrt(top)
    const card = cardOf(growing('top - (mu-0.3137)^2', { mu: [-0.1, -1, 1.3] }, { top }))
    const root = Math.sqrt(top)
    expect(card.hopf).toHaveLength(2)
    const [first, second] = card.hopf ?? []
    expect(first?.p).toBeCloseTo(0.3137 - root, 12)
    expect(second?.p).toBeCloseTo(0.3137 + root, 12)
    expect((first?.crossing ?? 0) / (2 * root)).toBeCloseTo(1, 6)
    expect((second?.crossing ?? 0) / (2 * root)).toBeCloseTo(-1, 6)
  })

  test('two pairs with different frequencies that cross together are two, both degenerate', () => {
    const card = cardOf({
      equations: 'dx/dt = y\ndy/dt = (mu-x^2)*y - x\ndu/dt = v\ndv/dt = (mu-u^2)*v - 4*u',
      control: { mu: [-0.1, -1, 1.3] },
      states: space,
      observed: 'x',
    })
    expect(card.hopf?.map(({ p, omega, verdict, operating }) => [p, omega, verdict, operating])).toEqual([
      [0, 1, 'degenerate', false],
      [0, 2, 'degenerate', false],
    ])
    // the second oscillator does not move x
    expect(warningCodes(card)).toEqual(['degenerate', 'observed-silent'])
  })

  test('two equal uncoupled oscillators are one find: same state, same frequency; no cubic coefficient', () => {
    const card = cardOf({
      equations: 'dx/dt = y\ndy/dt = (mu-x^2)*y - x\ndu/dt = v\ndv/dt = (mu-u^2)*v - u',
      control: { mu: [-0.1, -1, 1.3] },
      states: space,
      observed: 'x',
    })
    const [only, ...more] = card.hopf ?? []
    expect(more).toEqual([])
    expect(only).toMatchObject({ cubic: null, verdict: 'degenerate', cycleSide: null, amplitudeCoefficient: null })
    expect(only?.p).toBeCloseTo(0, 14)
    expect(only?.crossing).toBeCloseTo(0.5, 8)
  })

  test('a slow pair beside a fast eigenvalue: rates 1e-6 and 1e6', () => {
    // z follows fast; on its slow manifold z = 0.3 x the pair is 1e-6 (mu ± i), up to the ratio of the rates
    const card = cardOf({
      equations:
        'dx/dt = 1e-6*(mu*x - y - x*(x^2+y^2) + z - 0.3*x)\ndy/dt = 1e-6*(x + mu*y - y*(x^2+y^2) + z - 0.3*x)\ndz/dt = -1e6*(z - 0.3*x)',
      control: { mu: [-0.5, -1, 1] },
      states: { x: box, y: box, z: box },
      observed: 'x',
    })
    expect(card.hopf).toHaveLength(1)
    expect(card.hopf?.[0]?.p).toBeCloseTo(0, 10)
    expect((card.hopf?.[0]?.omega ?? 0) * 1e6).toBeCloseTo(1, 9)
    expect(card.hopf?.[0]).toMatchObject({ verdict: 'soft', operating: true })
    expect(card.steadyStates?.[0]?.stable).toBe(true)
  })

  test.each([
    ['low', { mu: [0.5, 0.1, 0.7] }],
    ['high', { mu: [-0.5, -1, 0.1] }],
  ] as const)('a point on the %s end of the range itself', (_, control) => {
    const card = cardOf(growing('mu - 0.1', control))
    expect(card.hopf?.map(({ p }) => p)).toHaveLength(1)
    expect(card.hopf?.[0]?.p).toBeCloseTo(0.1, 14)
    expect(card.hopf?.[0]?.crossing).toBeCloseTo(1, 12)
  })

  test('a branch that passes neither the own value nor an end: a closed one with a Hopf point on it', () => {
    // s² + (mu - 0.2)² = 0.09 in the first state; the pair's growth is s - 0.1: zero at mu = 0.2 ± sqrt(0.08)
    const card = cardOf({
      equations:
        'ds/dt = s^2 + (mu-0.2)^2 - 0.09\ndx/dt = (s-0.1)*x - y - x*(x^2+y^2)\ndy/dt = x + (s-0.1)*y - y*(x^2+y^2)',
      control: { mu: [0.9, -1, 1] },
      states: { s: box, ...plane },
      observed: 'x',
    })
    expect(card.branches?.map(({ ends }) => ends.map(({ kind }) => kind))).toEqual([['closed', 'closed']])
    expect(card.folds?.map(({ p }) => p.toFixed(12))).toEqual(['-0.100000000000', '0.500000000000'])
    const wanted = [0.2 - Math.sqrt(0.08), 0.2 + Math.sqrt(0.08)]
    expect(card.hopf).toHaveLength(2)
    wanted.forEach((p, i) => {
      expect(card.hopf?.[i]?.p).toBeCloseTo(p, 12)
    })
    expect(card.warnings.map(({ code }) => code)).toContain('no-steady-state')
  })
})

describe('published values', () => {
  test('the convection model of Lorenz 1963: 470/19, subcritical (Marsden & McCracken 1976, from memory)', () => {
    const card = cardOf({
      equations: 'b = 8/3\ndx/dt = sigma*(y - x)\ndy/dt = r*x - y - x*z\ndz/dt = x*y - b*z',
      control: { r: [20, 0, 35] },
      parameters: { sigma: 10 },
      states: { x: [-20, 20, 5], y: [-20, 20, 5], z: [-5, 45, 15] },
      observed: 'x',
    })
    expect(card.hopf?.map(({ verdict }) => verdict)).toEqual(['hard', 'hard'])
    for (const { p } of card.hopf ?? []) expect(p).toBeCloseTo(470 / 19, 11)
    // r_H = sigma (sigma + b + 3)/(sigma - b - 1), omega² = b (r + sigma)
    expect(card.hopf?.[0]?.omega).toBeCloseTo(Math.sqrt((8 / 3) * (470 / 19 + 10)), 11)
    expect(card.branchPoints?.map(({ p, kind }) => [p, kind])).toEqual([[1, 'pitchfork']])
    expect(card.folds).toEqual([])
    expect(card.window?.low).toEqual({ kind: 'branch-point', index: 0 })
    expect(card.window?.high).toMatchObject({ kind: 'onset', verdict: 'hard' })
  })

  test.each([0.8, 1.5, 2.5])('the Brusselator at A = %s: onset 1 + A², omega A, cubic -(2 + A²)/(8 A²)', (a) => {
    // Prigogine & Lefever 1968 (from memory); the cubic in closed form by the planar formula
    const card = cardOf({
      equations: 'dx/dt = A - (B+1)*x + x^2*y\ndy/dt = B*x - x^2*y',
      control: { B: [1.2, 1, 9] },
      parameters: { A: a },
      states: { x: [0.01, 10, a], y: [0.01, 12, 1] },
      observed: 'x',
    })
    const [only, ...more] = card.hopf ?? []
    expect(more).toEqual([])
    expect(only?.p).toBeCloseTo(1 + a * a, 11)
    expect(only?.omega).toBeCloseTo(a, 11)
    expect(only?.crossing).toBeCloseTo(0.5, 11)
    expect(only?.cubic).toBeCloseTo(-(2 + a * a) / (8 * a * a), 11)
    expect(only?.verdict).toBe('soft')
  })
})

test('an onset on a branch that is unstable already is listed, is not operating and is no limit', () => {
  const card = cardOf({
    ...normalForm,
    equations: `${normalForm.equations}\ndz/dt = z`,
    states: { ...normalForm.states, z: [-1, 1, 0] },
  })
  expect(card.hopf?.map(({ operating, verdict }) => [operating, verdict])).toEqual([[false, 'soft']])
  expect(card.window).toBeNull()
  expect(card.sensitivity).toEqual([])
})
