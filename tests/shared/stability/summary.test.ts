import { describe, expect, expectTypeOf, test } from 'vitest'
import { type CardSummary as Contract, cardSummary } from '#shared/api/pages.ts'
import { type CardSummary, summarise } from '#shared/stability/summary.ts'
import { branchAt, card, document, onset } from './example-card.ts'

describe('the summary of a card', () => {
  test('has the shape the API promises', () => {
    expectTypeOf<CardSummary>().toEqualTypeOf<Contract>()
    const summary = summarise(document, card())
    expect(cardSummary.parse(summary)).toEqual(summary)
  })

  test('names control, observed quantity and units from the document', () => {
    expect(summarise(document, card())).toMatchObject({
      control: { symbol: 'v', meaning: 'speed', unit: 'm/s', low: 0, high: 10, value: 3 },
      observed: { symbol: 'x', meaning: 'sway', unit: 'm' },
      timeUnit: 's',
    })
  })

  test('finds a control spelled with another form of the same Greek letter', () => {
    const greek = { ...document, control: 'μ', parameters: [{ symbol: 'mu', value: 0, low: -1, high: 1 }] }
    expect(summarise(greek, card()).control).toMatchObject({ symbol: 'mu', low: -1, high: 1, unit: '', meaning: '' })
  })

  test('gives an observed helper its name and no unit of its own', () => {
    expect(summarise({ ...document, observed: 'q2' }, card()).observed).toEqual({ symbol: 'q2', meaning: '', unit: '' })
  })

  test('refuses a document whose control has no range', () => {
    expect(() => summarise({ ...document, parameters: [{ symbol: 'v', value: 3 }] }, card())).toThrow(RangeError)
  })

  // The example's branch is stable at 0, 2 and 4 and unstable from 6 on; its onset is at 5.
  test('lets the ground end at the onset between the last stable point and the next', () => {
    expect(summarise(document, card()).ground).toEqual([{ from: 0, to: 5 }])
  })

  test('lets the ground end at the last stable point where no limit is known between the two', () => {
    expect(summarise(document, card({ hopf: [] })).ground).toEqual([{ from: 0, to: 4 }])
    expect(summarise(document, card({ hopf: [onset({ branch: 1 })] })).ground).toEqual([{ from: 0, to: 4 }])
  })

  test('begins the ground again where stability comes back', () => {
    const branches = [
      {
        id: 0,
        points: [branchAt(0, true), branchAt(4, true), branchAt(6, false), branchAt(8, true), branchAt(10, true)],
        ends: [],
      },
    ]
    const hopf = [onset({ p: 4.4 }), onset({ p: 7.1, crossing: -0.5 })]
    expect(summarise(document, card({ branches, hopf })).ground).toEqual([
      { from: 0, to: 4.4 },
      { from: 7.1, to: 10 },
    ])
  })

  test('takes the ground back over a turning branch to its turning points and joins what overlaps', () => {
    // Stable from 0 up to the fold at 6, unstable back to the fold at 3, stable again from 3 to 10.
    const points = [
      branchAt(0, true),
      branchAt(5.9, true),
      branchAt(6, false),
      branchAt(4, false),
      branchAt(3, false),
      branchAt(3.1, true),
      branchAt(10, true),
    ]
    const folds = [
      { p: 3, state: { x: 1 } },
      { p: 6, state: { x: 0 } },
    ]
    const cusped = card({ branches: [{ id: 0, points, ends: [] }], folds, hopf: [] })
    expect(summarise(document, cusped).ground).toEqual([{ from: 0, to: 10 }])
    expect(
      summarise(document, card({ branches: [{ id: 0, points: points.slice(0, 5), ends: [] }], folds, hopf: [] }))
        .ground,
    ).toEqual([{ from: 0, to: 6 }])
  })

  test('draws the ground of the window’s branch, and of the first where there is no window', () => {
    const branches = [
      { id: 4, points: [branchAt(0, true), branchAt(1, true)], ends: [] },
      { id: 7, points: [branchAt(2, true), branchAt(3, true)], ends: [] },
    ]
    const window = {
      branch: 7,
      from: 2,
      to: 3,
      low: { kind: 'range-end' as const },
      high: { kind: 'range-end' as const },
    }
    expect(summarise(document, card({ branches, window })).ground).toEqual([{ from: 2, to: 3 }])
    expect(summarise(document, card({ branches, window: null })).ground).toEqual([{ from: 0, to: 1 }])
  })

  test('speaks of the onset that ends the window nearest to the running point', () => {
    const hopf = [onset({ p: 1, verdict: 'hard', crossing: -1 }), onset({ p: 3.5, operating: false }), onset({ p: 9 })]
    const window = {
      branch: 0,
      from: 1,
      to: 9,
      low: { kind: 'onset' as const, index: 0 },
      high: { kind: 'onset' as const, index: 2 },
    }
    const near = summarise(document, card({ hopf, window }))
    expect(near).toMatchObject({ kind: 'hard', main: 0 })
    expect(near.onsets.map((one) => one.direction)).toEqual([-1, 1, 1])
    const [speed] = document.parameters
    if (!speed) throw new Error('the example has a control')
    const faster = { ...document, parameters: [{ ...speed, value: 8 }] }
    expect(summarise(faster, card({ hopf, window }))).toMatchObject({ kind: 'soft', main: 2 })
  })

  test('prefers the graver of two onsets that are equally near', () => {
    const hopf = [onset({ p: 1 }), onset({ p: 5, verdict: 'hard' })]
    const window = {
      branch: 0,
      from: 1,
      to: 5,
      low: { kind: 'onset' as const, index: 0 },
      high: { kind: 'onset' as const, index: 1 },
    }
    expect(summarise(document, card({ hopf, window }))).toMatchObject({ kind: 'hard', main: 1 })
  })

  test('says undecided for a degenerate or undetermined onset', () => {
    expect(summarise(document, card({ hopf: [onset({ verdict: 'degenerate' })] })).kind).toBe('undecided')
    expect(summarise(document, card({ hopf: [onset({ verdict: 'undetermined' })] })).kind).toBe('undecided')
  })

  test('says none where no onset ends the window, and names what else does', () => {
    const window = {
      branch: 0,
      from: 0,
      to: 6,
      low: { kind: 'box-left' as const },
      high: { kind: 'fold' as const, index: 0 },
    }
    expect(summarise(document, card({ window }))).toMatchObject({
      kind: 'none',
      main: null,
      otherEnds: [
        { p: 0, kind: 'box-left' },
        { p: 6, kind: 'fold' },
      ],
    })
  })

  test('without a window speaks of the nearest operating onset, never of one on an unstable branch', () => {
    const hopf = [onset({ p: 2.9, verdict: 'hard', operating: false }), onset({ p: 1 })]
    expect(summarise(document, card({ hopf, window: null }))).toMatchObject({ kind: 'soft', main: 1, otherEnds: [] })
    const idle = [onset({ operating: false })]
    expect(summarise(document, card({ hopf: idle, window: null }))).toMatchObject({ kind: 'none', main: null })
  })

  test('counts parts that were not computed as empty', () => {
    const { steadyStates: _a, branches: _b, folds: _c, branchPoints: _d, hopf: _e, window: _f, ...bare } = card()
    expect(summarise(document, bare)).toMatchObject({ kind: 'none', main: null, ground: [], onsets: [], otherEnds: [] })
  })
})
