import { describe, expect, test } from 'vitest'
import type { StabilityCard } from '#shared/model/card-document.ts'
import { cardOf, normalForm, type ShortModel, warningCodes } from './documents.ts'

const box = [-2, 2] as const
const hardForm: ShortModel = {
  equations: 'q2 = x^2 + y^2\ng = mu + q2 - q2^2\ndx/dt = g*x - y\ndy/dt = x + g*y',
  control: { mu: [-0.1, -0.5, 0.5] },
  states: { x: [-2, 2, 0.1], y: [-2, 2, 0] },
  observed: 'x',
}
const reason = (card: StabilityCard) =>
  card.warnings.filter(({ code }) => code === 'no-window').map(({ message }) => message)

describe('what ends the stable stretch', () => {
  test('an onset above, the end of the range below', () => {
    const { window } = cardOf(normalForm)
    expect(window).toMatchObject({
      from: -1,
      low: { kind: 'range-end' },
      high: { kind: 'onset', index: 0, verdict: 'soft' },
    })
    expect(window?.to).toBeCloseTo(0, 14)
  })

  test('a turning point: mu = x³ - x on its upper arm, down to -2/(3 sqrt 3)', () => {
    const card = cardOf({
      equations: 'dx/dt = p + x - x^3 - 0.2*y\ndy/dt = -3*y',
      control: { p: [0.6, -1, 1] },
      states: { x: [-2, 2, 1], y: [-2, 2, 0.3] },
      observed: 'x',
    })
    expect(card.window).toMatchObject({ to: 1, low: { kind: 'fold', index: 0 }, high: { kind: 'range-end' } })
    expect(card.window?.from).toBeCloseTo(-2 / (3 * Math.sqrt(3)), 14)
  })

  test('an exchange of stability, and an onset on the other side: predator and prey with saturation', () => {
    // Rosenzweig & MacArthur 1963 (from memory): predators live from K = x* = 0.3571 on, cycles from K = h + 2 x* on
    const card = cardOf({
      equations: 'up = c*x/(x+h)\ndx/dt = x*(1 - x/K) - up*y\ndy/dt = 0.8*up*y - 0.4*y',
      control: { K: [0.9, 0.2, 4] },
      parameters: { c: 1.2, h: 0.5 },
      states: { x: [-0.1, 4, 1], y: [-0.1, 3, 0.5] },
      observed: 'x',
    })
    const prey = (0.4 * 0.5) / (0.8 * 1.2 - 0.4)
    expect(card.window?.low).toEqual({ kind: 'branch-point', index: 0 })
    expect(card.window?.from).toBeCloseTo(prey, 12)
    expect(card.window?.high).toMatchObject({ kind: 'onset', verdict: 'soft' })
    expect(card.window?.to).toBeCloseTo(0.5 + 2 * prey, 12)
  })

  test('onsets on both sides of the running point', () => {
    // growth 0.1 - (mu - 0.2)² < 0 outside 0.2 ± sqrt(0.1); here mirrored: stable between the two
    const card = cardOf({
      ...normalForm,
      equations: 'g = (mu-0.2)^2 - 0.1\ndx/dt = g*x - y - x*(x^2+y^2)\ndy/dt = x + g*y - y*(x^2+y^2)',
      control: { mu: [0.3, -1, 1] },
    })
    expect(card.window).toMatchObject({ low: { kind: 'onset', index: 0 }, high: { kind: 'onset', index: 1 } })
    expect(card.window?.from).toBeCloseTo(0.2 - Math.sqrt(0.1), 13)
    expect(card.window?.to).toBeCloseTo(0.2 + Math.sqrt(0.1), 13)
  })
})

describe('the steady state that the model settles on from its start', () => {
  test('of two stable ones, the one whose basin holds the start', () => {
    for (const start of [0.2, -0.2]) {
      const card = cardOf({
        equations: 'dx/dt = x - x^3 + 0*mu\ndy/dt = -y + mu',
        control: { mu: [0, -1, 1] },
        states: { x: [-2, 2, start], y: [-2, 2, 0] },
        observed: 'x',
      })
      const branch = card.branches?.find(({ id }) => id === card.window?.branch)
      expect(branch?.points[0]?.observed).toBeCloseTo(Math.sign(start), 10)
    }
  })

  test('none where the run settles on an oscillation: outside the unstable cycle of a hard onset', () => {
    // r' = -0.1 r + r³ - r⁵: zeros r² = (1 ± sqrt(0.6))/2; 0.1 lies inside the smaller, 1 outside
    expect(cardOf(hardForm).window).not.toBeNull()
    const outside = cardOf({ ...hardForm, states: { x: [-2, 2, 1], y: [-2, 2, 0] } })
    expect(outside.window).toBeNull()
    expect(reason(outside)).toEqual([expect.stringContaining('oscillation')])
  })

  test('just inside and just outside the unstable cycle (radius 0.33571) are told apart', () => {
    const radius = Math.sqrt((1 - Math.sqrt(0.6)) / 2)
    const from = (x: number) => cardOf({ ...hardForm, states: { x: [-2, 2, x], y: [-2, 2, 0] } })
    expect(from(0.98 * radius).window).not.toBeNull()
    expect(from(1.02 * radius).window).toBeNull()
  })

  test('a very slow spiral: damping 2e-4 of the frequency', () => {
    const card = cardOf({
      ...hardForm,
      control: { mu: [-2e-4, -0.5, 0.5] },
      states: { x: [-2, 2, 0.005], y: [-2, 2, 0] },
    })
    expect(card.window?.high).toMatchObject({ kind: 'onset', verdict: 'hard' })
  })

  test('a stiff model: rates 1e-1 and 1e5', () => {
    const card = cardOf({
      equations: 'dx/dt = mu - 0.1*x - 1e-3*x^3\ndz/dt = -1e5*(z - x^2)',
      control: { mu: [0.05, -0.1, 0.1] },
      states: { x: [-2, 2, -1.5], z: [-1, 5, 0] },
      observed: 'x',
    })
    expect(card.window).toMatchObject({ from: -0.1, to: 0.1 })
  })

  test('none, with the reason, where nothing is stable, nothing is steady, or the own value is out of range', () => {
    const unstable = cardOf({ ...normalForm, control: { mu: [0.5, -1, 1] } })
    expect(unstable.window).toBeNull()
    expect(reason(unstable)).toEqual([expect.stringContaining('No steady state is stable')])
    const nothing = cardOf({
      equations: 'dphi/dt = w\ndw/dt = I - sin(phi) - 0.5*w',
      control: { I: [1.2, 1.05, 2] },
      states: { phi: [-3.2, 3.2, 0], w: [-4, 4, 0] },
      observed: 'w',
    })
    expect([nothing.steadyStates, nothing.hopf, nothing.window]).toEqual([[], [], null])
    expect(warningCodes(nothing)).toEqual(['no-steady-state', 'no-window'])
    const outside = cardOf({ ...normalForm, control: { mu: [-3, -1, 1] } })
    expect(outside.window).toBeNull()
    expect(outside.steadyStates?.[0]?.eigenvalues[0]?.re).toBeCloseTo(-3, 12)
    expect(outside.hopf).toHaveLength(1)
    expect(warningCodes(outside)).toEqual(['no-window', 'value-outside-range'])
  })

  test('none where the run leaves for good', () => {
    const card = cardOf({
      equations: 'dx/dt = mu - x + x^2',
      control: { mu: [0.1, 0, 0.2] },
      states: { x: [-1, 3, 2] },
      observed: 'x',
    })
    expect(card.window).toBeNull()
    expect(reason(card)).toHaveLength(1)
  })
})

test('a branch that turns back above the running point: the window is the arm it stands on', () => {
  const card = cardOf({
    equations: 'dx/dt = mu + x - x^3',
    control: { mu: [0, -1, 1] },
    states: { x: [...box, -1] },
    observed: 'x',
  })
  expect(card.window).toMatchObject({ from: -1, low: { kind: 'range-end' }, high: { kind: 'fold', index: 1 } })
  expect(card.window?.to).toBeCloseTo(2 / (3 * Math.sqrt(3)), 13)
})
