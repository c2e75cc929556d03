import { describe, expect, test } from 'vitest'
import { stabilityCard } from '#shared/model/card-document.ts'
import { analyse } from '#shared/stability/card.ts'
import { documentOf, normalForm, type ShortModel } from '../documents.ts'

function cyclesOf(model: ShortModel) {
  const result = analyse(documentOf(model), { parts: ['hopf', 'cycles'] })
  if (!result.ok) throw new Error(JSON.stringify(result.errors))
  return stabilityCard.parse(result.card)
}

describe('one state', () => {
  // x' = p + x - x^3: folds at p = -+2/(3 sqrt 3); past the lower one the upper state jumps to x = -2/sqrt 3
  const card = cyclesOf({
    equations: 'dx/dt = p + x - x^3',
    control: { p: [0.6, -1, 1] },
    states: { x: [-2, 2, 1] },
    observed: 'x',
  })
  const fold = 2 / (3 * Math.sqrt(3))

  test('jumps to the other steady state and comes back at the other fold', () => {
    expect(card.cycles).toEqual([])
    expect(card.window?.low).toMatchObject({ kind: 'fold', jumpTo: { kind: 'steady' } })
    expect(card.window?.low.returnAt).toBeCloseTo(fold, 9)
    expect(card.window?.coexisting).toHaveLength(1)
    expect(card.window?.coexisting?.[0]).toMatchObject({ with: 'steady' })
  })

  test('tolerates kicks up to the unstable state between', () => {
    // at p = 0: stable 1, unstable 0, so the kick is 1
    const kicks = card.window?.toleratedKick ?? []
    expect(kicks.length).toBeGreaterThanOrEqual(5)
    const middle = kicks.find(({ p }) => Math.abs(p) < 1e-9)
    expect(middle?.kick?.x).toBeCloseTo(1, 1)
  })
})

test('a soft onset: its own small cycle, nothing coexists, no kick is too large', () => {
  const { window } = cyclesOf(normalForm)
  expect(window?.high).toMatchObject({ kind: 'onset', verdict: 'soft', jumpTo: { kind: 'cycle' } })
  expect(window?.high.returnAt).toBeUndefined()
  expect([window?.coexisting, window?.toleratedKick]).toEqual([[], []])
})

test('a soft onset below which a large oscillation persists says so', () => {
  // r' = mu r - r^3 + ... with an outer pair of cycles: mu = r^2 - 3 r^4 + r^6 ... chosen so that mu(s) = s (s - 1.5)^2 - 0.3 s
  // with s = r^2: soft at 0 (slope 1.95 > 0), turning points where 3 s^2 - 6 s + 1.95 = 0: s = 1 -+ sqrt(0.35)
  const card = cyclesOf({
    equations: 's = x^2 + y^2\ng = mu - s*(s - 1.5)^2 + 0.3*s\ndx/dt = g*x - y\ndy/dt = x + g*y',
    control: { mu: [-0.6, -1, 1.5] },
    states: { x: [-2, 2, 0.01], y: [-2, 2, 0] },
    observed: 'x',
  })
  const inner = 1 - Math.sqrt(0.35)
  const outer = 1 + Math.sqrt(0.35)
  const mu = (s: number): number => s * (s - 1.5) ** 2 - 0.3 * s
  expect(card.window?.high).toMatchObject({ kind: 'onset', verdict: 'soft' })
  expect(card.cycleFolds?.map(({ p }) => p)).toEqual([expect.closeTo(mu(inner), 9), expect.closeTo(mu(outer), 9)])
  // mu(outer) = -0.46 is below the onset: the large cycle coexists from there on
  expect(card.window?.coexisting).toEqual([
    { from: expect.closeTo(mu(outer), 9), to: expect.closeTo(0, 9), with: 'cycle' },
  ])
  // the unstable cycle between: at mu = -0.2 the middle root of mu(s)
  const kick = card.window?.toleratedKick?.[0]
  expect(kick?.p).toBeCloseTo(mu(outer), 6)
  expect(kick?.amplitude).toBeCloseTo(Math.sqrt(outer), 3)
})

test('a closed branch that meets no onset in range is found from an integrated cycle', () => {
  // (s - 1)^2 + 4 p^2 = 0.25 with s = r^2: a closed curve of cycles between p = -1/4 and 1/4; the origin is always stable
  const card = cyclesOf({
    equations: 's = x^2 + y^2\ng = (0.25 - (s - 1)^2 - 4*p^2)\ndx/dt = g*x - y\ndy/dt = x + g*y',
    control: { p: [0, -1, 1] },
    states: { x: [-2, 2, 0.05], y: [-2, 2, 0] },
    observed: 'x',
  })
  expect(card.hopf).toEqual([])
  expect(card.cycles?.map(({ hopf, end }) => [hopf, end.kind])).toEqual([[null, 'closed']])
  const folds = (card.cycleFolds ?? []).map(({ p }) => p).sort((a, b) => a - b)
  expect(folds).toEqual([expect.closeTo(-0.25, 9), expect.closeTo(0.25, 9)])
  expect(card.window).toMatchObject({ from: -1, to: 1, low: { kind: 'range-end' }, high: { kind: 'range-end' } })
  expect(card.window?.coexisting).toEqual([
    { from: expect.closeTo(-0.25, 9), to: expect.closeTo(0.25, 9), with: 'cycle' },
  ])
  // smallest unstable cycle at p = 0: s = 1/2
  const kicks = card.window?.toleratedKick ?? []
  expect(kicks.length).toBeGreaterThanOrEqual(5)
  expect(Math.min(...kicks.map(({ amplitude }) => amplitude ?? 9))).toBeCloseTo(Math.SQRT1_2, 2)
})

describe('stopping', () => {
  test('a request to stop ends the analysis with what there is and says so', () => {
    let asked = 0
    const result = analyse(documentOf(normalForm), { parts: ['hopf', 'cycles'], shouldStop: () => ++asked > 60 })
    expect(result.ok && result.card.warnings.map(({ code }) => code)).toContain('budget-spent')
    expect(result.ok && stabilityCard.safeParse(result.card).success).toBe(true)
  })

  test('the same document gives the same card', () => {
    expect(cyclesOf(normalForm)).toEqual(cyclesOf(normalForm))
  })
})
