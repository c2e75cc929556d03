import { describe, expect, test } from 'vitest'
import { cardOf, normalForm, type ShortModel } from './documents.ts'

function entries(model: ShortModel) {
  const { sensitivity = [], hopf = [] } = cardOf(model)
  return Object.fromEntries(sensitivity.map((entry) => [`${entry.hopf}:${entry.symbol}`, entry])) as Record<
    string,
    (typeof sensitivity)[number] & { of?: (typeof hopf)[number] }
  >
}

describe('closed forms', () => {
  test('the Brusselator: dB/dA = 2A, omega = A, cubic = -(2 + A²)/(8 A²)', () => {
    const a = 1.5
    const { '0:A': entry } = entries({
      equations: 'dx/dt = A - (B+1)*x + x^2*y\ndy/dt = B*x - x^2*y',
      control: { B: [2.5, 1, 5] },
      parameters: { A: a },
      states: { x: [0.01, 10], y: [0.01, 10] },
      observed: 'x',
    })
    expect(entry?.onset).toBeCloseTo(2 * a, 12)
    expect(entry?.frequency).toBeCloseTo(1, 12)
    expect(entry?.cubic).toBeCloseTo(1 / (2 * a ** 3), 12)
    expect(entry?.elasticity).toBeCloseTo((a / (1 + a * a)) * 2 * a, 12)
    expect(entry?.flip).toBeNull()
  })

  test('an onset at zero has no elasticity; a coefficient k of the cubic term moves the cubic by -1 per unit', () => {
    const found = entries({
      ...normalForm,
      equations: 'q2 = k*(x^2+y^2)\ndx/dt = (mu-s)*x - w*y - x*q2\ndy/dt = w*x + (mu-s)*y - y*q2',
      parameters: { k: 2, s: 0, w: 3 },
    })
    expect(found['0:k']).toMatchObject({ elasticity: null })
    expect(found['0:k']?.cubic).toBeCloseTo(-1, 12)
    expect(found['0:k']?.onset).toBeCloseTo(0, 12)
    // a parameter whose own value is 0 still has derivatives
    expect(found['0:s']?.onset).toBeCloseTo(1, 12)
    expect(found['0:w']?.frequency).toBeCloseTo(1, 12)
  })

  test('an observed helper that depends on a parameter: h = k x has cubic -1/k², so 2/k³', () => {
    const k = 3
    const { '0:k': entry } = entries({
      ...normalForm,
      equations: `${normalForm.equations}\nh = k*x`,
      parameters: { k },
      observed: 'h',
    })
    expect(entry?.cubic).toBeCloseTo(2 / k ** 3, 8)
    expect(entry?.onset).toBeCloseTo(0, 12)
  })
})

test('agrees with differences of recomputed cards, quadratic and cubic terms and a moving steady state included', () => {
  const model = (k: number, c: number): ShortModel => ({
    equations: 'dx/dt = y\ndy/dt = z\ndz/dt = -alpha*z - c*y - k*x + x^2 + 0.3*x*y*z - 0.2 + 0.1*alpha',
    control: { alpha: [1, 0.3, 2] },
    parameters: { k, c },
    states: { x: [-0.4, 0.4], y: [-0.5, 0.5], z: [-0.5, 0.5] },
    observed: 'x',
  })
  const found = entries(model(1, 1.25))
  const step = 1e-4
  const differences = {
    k: [cardOf(model(1 + step, 1.25)).hopf?.[0], cardOf(model(1 - step, 1.25)).hopf?.[0]],
    c: [cardOf(model(1, 1.25 + step)).hopf?.[0], cardOf(model(1, 1.25 - step)).hopf?.[0]],
  } as const
  for (const symbol of ['k', 'c'] as const) {
    const [above, below] = differences[symbol]
    const slope = (key: 'p' | 'omega' | 'cubic') =>
      ((above?.[key] ?? Number.NaN) - (below?.[key] ?? Number.NaN)) / (2 * step)
    const entry = found[`0:${symbol}`]
    // central differences are good to step² times a third derivative
    expect(entry?.onset).toBeCloseTo(slope('p'), 6)
    expect(entry?.frequency).toBeCloseTo(slope('omega'), 6)
    expect(entry?.cubic).toBeCloseTo(slope('cubic'), 6)
  }
})
