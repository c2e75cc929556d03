import { describe, expect, test } from 'vitest'
import { analyse } from '#shared/stability/card.ts'
import { cardOf, documentOf, type ShortModel, warningCodes } from './documents.ts'

const box = [-2, 2] as const
const line = (equation: string, parameters: Record<string, number> = {}): ShortModel => ({
  equations: `dx/dt = ${equation}`,
  control: { mu: [-0.5, -1, 0.9] },
  parameters,
  states: { x: box },
  observed: 'x',
})

describe('turning points', () => {
  test.each([1e-3, 1e-5])('two close together, mu = x³ - e x with e = %s: at ∓2 (e/3)^(3/2)', (e) => {
    const card = cardOf(line('mu - x^3 + e*x', { e }))
    const fold = 2 * (e / 3) ** 1.5
    expect(card.folds).toHaveLength(2)
    expect(card.folds?.[0]?.p).toBeCloseTo(-fold, 14)
    expect(card.folds?.[1]?.p).toBeCloseTo(fold, 14)
    expect(card.branchPoints).toEqual([])
  })

  test('the cubic mu = x³ - x: at ±2/(3 sqrt 3), good to rounding; each is a point of its branch', () => {
    const card = cardOf(line('mu + x - x^3'))
    const fold = 2 / (3 * Math.sqrt(3))
    expect(card.folds?.map(({ p }) => p)).toHaveLength(2)
    expect(card.folds?.[0]?.p).toBeCloseTo(-fold, 14)
    expect(card.folds?.[1]?.p).toBeCloseTo(fold, 14)
    expect(card.branches).toHaveLength(1)
    const turning = card.branches?.[0]?.points.filter(({ p }) => Math.abs(Math.abs(p) - fold) < 1e-13)
    expect(turning).toHaveLength(2)
  })

  test('a corner at a kink, mu = |x|, is one; both arms are one branch', () => {
    const card = cardOf({ ...line('mu - abs(x)'), control: { mu: [0.5, -1, 1] } })
    expect(card.folds).toHaveLength(1)
    expect(card.folds?.[0]?.p).toBeCloseTo(0, 6)
    expect(card.branches).toHaveLength(1)
  })

  test('no drawing is further than 1 % of the observed range from the branch', () => {
    // x on mu = x³ - x: compare the middle of each chord with the curve
    const card = cardOf(line('mu + x - x^3'))
    const points = card.branches?.[0]?.points ?? []
    expect(points.length).toBeGreaterThan(60)
    expect(points.length).toBeLessThan(400)
    for (let i = 0; i + 1 < points.length; i++) {
      const x = ((points[i]?.observed ?? 0) + (points[i + 1]?.observed ?? 0)) / 2
      const mu = ((points[i]?.p ?? 0) + (points[i + 1]?.p ?? 0)) / 2
      // distance along mu over the slope, or along x: the smaller
      const off = Math.abs(mu - (x ** 3 - x))
      expect(Math.min(off / 1.9, off / Math.max(1e-9, Math.abs(3 * x * x - 1)) / 4)).toBeLessThan(0.01)
    }
  })
})

describe('branch points', () => {
  test('transcritical: two branches through one point, stability exchanged', () => {
    const card = cardOf(line('mu*x - x^2'))
    expect(card.branchPoints).toMatchObject([{ kind: 'transcritical', state: { x: 0 } }])
    expect(card.branchPoints?.[0]?.p).toBeCloseTo(0, 14)
    expect(card.branches).toHaveLength(2)
    expect(card.folds).toEqual([])
    for (const branch of card.branches ?? []) {
      expect(branch.points.filter(({ stable }) => stable).length).toBeGreaterThan(10)
      expect(branch.points.filter(({ stable }) => !stable).length).toBeGreaterThan(10)
    }
  })

  test('pitchfork: the turn of the new branch is a branch point and no turning point', () => {
    const card = cardOf(line('mu*x - x^3'))
    expect(card.branchPoints).toMatchObject([{ kind: 'pitchfork', state: { x: 0 } }])
    expect(card.folds).toEqual([])
    expect(card.branches?.map(({ ends }) => ends.map(({ kind }) => kind)).sort()).toEqual([
      ['branch-point', 'range-end'],
      ['branch-point', 'range-end'],
      ['range-end', 'range-end'],
    ])
  })

  test('a pitchfork below with folds further on: mu = x⁴ - x² turns at -1/4', () => {
    const card = cardOf(line('mu*x + x^3 - x^5'))
    expect(card.branchPoints).toMatchObject([{ kind: 'pitchfork' }])
    expect(card.folds?.map(({ state }) => (state.x ?? 0) ** 2)).toHaveLength(2)
    for (const fold of card.folds ?? []) {
      expect(fold.p).toBeCloseTo(-0.25, 14)
      expect((fold.state.x ?? 0) ** 2).toBeCloseTo(0.5, 12)
    }
  })

  test.each([1e-3, 1e-6, 1e-9])('a pitchfork broken by %s is none: two branches that pass each other', (e) => {
    // mu x - x³ + e = 0 turns where 2 x³ = -e: mu = 3 (e/2)^(2/3)
    const card = cardOf(line('mu*x - x^3 + e', { e }))
    expect(card.branchPoints).toEqual([])
    expect(card.branches).toHaveLength(2)
    expect(card.folds?.map(({ p }) => p)).toHaveLength(1)
    expect(card.folds?.[0]?.p).toBeCloseTo(3 * (e / 2) ** (2 / 3), 14)
  })

  test('two equal parts that branch at once: found although the determinant keeps its sign', () => {
    const card = cardOf({
      equations: 'dx/dt = mu*x - x^3\ndy/dt = mu*y - y^3',
      control: { mu: [-0.5, -1, 0.9] },
      states: { x: box, y: box },
      observed: 'x',
    })
    expect(card.branchPoints?.map(({ kind }) => kind)).toEqual(['other'])
    expect(card.branchPoints?.[0]?.p).toBeCloseTo(0, 8)
    expect(card.window?.high).toEqual({ kind: 'branch-point', index: 0 })
    expect(card.window?.to).toBeCloseTo(0, 8)
  })
})

describe('where branches end', () => {
  test('at the box, named with the state; the range end is closed', () => {
    const card = cardOf({ ...line('mu - x'), control: { mu: [0, -1, 5] }, states: { x: [-1, 3] } })
    expect(card.branches?.[0]?.ends).toEqual([
      { kind: 'range-end', p: -1 },
      { kind: 'box-left', p: 3, symbol: 'x' },
    ])
    expect(card.window).toMatchObject({ from: -1, to: 3, low: { kind: 'range-end' }, high: { kind: 'box-left' } })
    expect(warningCodes(card)).toEqual(['branch-left-box'])
  })

  test('a branch that runs along the edge of the box stays in', () => {
    // x = 0 is the box\'s own edge
    const card = cardOf({ ...line('-x*(1+mu^2)'), states: { x: [0, 1] } })
    expect(card.branches?.[0]?.ends.map(({ kind }) => kind)).toEqual(['range-end', 'range-end'])
  })

  test('where the model has no finite value, with the line', () => {
    // mu = x - 0.001 sqrt(0.5 - x) ends at x = 0.5
    const card = cardOf({
      ...line('x'),
      equations: 'w = sqrt(0.5 - x)\ndx/dt = mu - x + 0.001*w',
      control: { mu: [0, -1, 1] },
      states: { x: [-3, 3, 0] },
    })
    const last = card.branches?.[0]?.ends.at(-1)
    expect(last?.kind).toBe('not-finite')
    expect(last?.p).toBeCloseTo(0.5, 4)
    expect(card.warnings.filter(({ code }) => code === 'not-finite-here').every(({ line: at }) => at === 1)).toBe(true)
    expect(card.warnings.map(({ code }) => code)).toContain('not-finite-here')
    expect(JSON.stringify(card)).not.toMatch(/NaN|Infinity|null,null/)
  })

  test('a line of steady states at one control value is told and not drawn', () => {
    const card = cardOf({ ...line('mu*x'), control: { mu: [0.5, -1, 1] } })
    expect(card.branches).toHaveLength(1)
    expect(card.branchPoints).toMatchObject([{ kind: 'other' }])
    expect(warningCodes(card)).toContain('continuum-of-steady-states')
  })
})

test('one document gives one card: ids, order and numbers are the same every time', () => {
  const model = line('mu*x + x^3 - x^5')
  expect(cardOf(model)).toEqual(cardOf(model))
})

test('a card that is stopped says what is missing, and no number in it is made up', () => {
  const document = documentOf(line('mu*x + x^3 - x^5'))
  let asked = 0
  const result = analyse(document, { parts: ['steady', 'hopf'], shouldStop: () => ++asked > 3 })
  const told = result.ok
    ? result.card.warnings.map(({ code }): string => code)
    : result.errors.map(({ code }): string => code)
  expect(told.some((code) => code === 'budget-spent' || code === 'budget-exceeded')).toBe(true)
  expect(asked).toBeGreaterThan(3)
})
