import { describe, expect, test } from 'vitest'
import type { StabilityCard } from '#shared/model/card-document.ts'
import { compareCards } from '#shared/stability/compare.ts'
import type { DescribedModel } from '#shared/stability/summary.ts'
import { card, document, onset } from './example-card.ts'

type Side = { document?: DescribedModel; card?: StabilityCard }
const compare = (before: Side, after: Side) =>
  compareCards({ document, card: card(), ...before }, { document, card: card(), ...after })
const level = (after: Side, before: Side = {}) => compare(before, after).level
const withControl = (changes: Partial<DescribedModel['parameters'][number]>): DescribedModel => ({
  ...document,
  parameters: document.parameters.map((row) => (row.symbol === 'v' ? { ...row, ...changes } : row)),
})
const withOnsets = (...hopf: ReturnType<typeof onset>[]) => ({ card: card({ hopf }) })

// The rule, spec of marks: verdict, set (count, kind, operating) of onsets, unit, control or observed quantity: major;
// numbers beyond tolerance (onset 1e-6 of the control range, here 1e-5; others 1e-5 relative or error bar): minor; else patch.
describe('a comparison of two cards', () => {
  test('is patch where nothing differs', () => {
    expect(compare({}, {})).toEqual({ level: 'patch', differences: [], kind: null })
  })

  test('is patch for words and meanings', () => {
    expect(level({ document: withControl({ meaning: 'speed of the belt' }) })).toBe('patch')
  })

  test('is patch where only the running point moves and steady running keeps its ends', () => {
    const steadyStates = [
      { state: { x: 1, y: 0 }, eigenvalues: [], stable: true, kind: 'stable spiral' as const, residual: 0 },
    ]
    expect(level({ document: withControl({ value: 4 }), card: card({ steadyStates }) })).toBe('patch')
  })

  test('is major and tells the headline where soft turns hard', () => {
    const hard = card({
      hopf: [onset({ verdict: 'hard', cubic: 1 })],
      window: {
        branch: 0,
        from: 0,
        to: 5,
        low: { kind: 'range-end' },
        high: { kind: 'onset', index: 0, verdict: 'hard' },
      },
    })
    const result = compare({}, { card: hard })
    expect(result.level).toBe('major')
    expect(result.kind).toEqual({ was: 'soft', now: 'hard' })
    expect(result.differences).toContainEqual({ what: 'Verdict', was: 'soft', now: 'hard', change: 'major' })
    expect(result.differences).toContainEqual({ what: 'Kind of the onset', was: 'soft', now: 'hard', change: 'major' })
  })

  test('is major where two onsets exchange their kinds although the set of kinds is the same', () => {
    const window = null
    const before = card({ window, hopf: [onset({ p: 2 }), onset({ p: 8, verdict: 'hard' })] })
    const after = card({ window, hopf: [onset({ p: 2, verdict: 'hard' }), onset({ p: 8 })] })
    expect(level({ card: after }, { card: before })).toBe('major')
  })

  test('is major for another count of onsets, even one that is not operating', () => {
    expect(level(withOnsets(onset(), onset({ p: 7, operating: false })))).toBe('major')
  })

  test('is major where an onset is no longer a limit, or on the other side', () => {
    expect(level(withOnsets(onset({ operating: false })))).toBe('major')
    expect(level(withOnsets(onset({ crossing: -0.5 })))).toBe('major')
  })

  test.each([
    ['of the control', withControl({ unit: 'km/h' })],
    ['of the control, now not given', withControl({ unit: undefined })],
    ['of time', { ...document, timeUnit: 'min' }],
    ['of a state', { ...document, states: document.states.map((row) => ({ ...row, unit: 'mm' })) }],
    ['of another parameter', { ...document, parameters: document.parameters.map((row) => ({ ...row, unit: 'm/s' })) }],
  ])('is major for another unit %s', (_name, changed) => {
    expect(level({ document: changed })).toBe('major')
  })

  test('takes a unit with other spaces as the same', () => {
    const spaced = withControl({ unit: ' m/s ' })
    expect(level({ document: spaced })).toBe('patch')
  })

  test('is major for another control, without comparing its numbers, and for another observed quantity', () => {
    const other = {
      ...document,
      control: 'mu',
      parameters: document.parameters.map((row) => ({ ...row, low: 0, high: 10 })),
    }
    const result = compare({}, { document: other, ...withOnsets(onset({ p: 6 })) })
    expect(result.differences).toEqual([{ what: 'Control parameter', was: 'v', now: 'mu', change: 'major' }])
    expect(level({ document: { ...document, observed: 'y' } })).toBe('major')
  })

  test('takes two spellings of one symbol as the same', () => {
    const spell = (symbol: string) => ({
      ...document,
      control: symbol,
      parameters: [{ symbol, value: 3, low: 0, high: 10 }],
    })
    expect(level({ document: spell('μ') }, { document: spell('mu') })).toBe('patch')
  })

  test('is major where the running point is no longer steady or something else ends steady running', () => {
    expect(level({ card: card({ window: null }) })).toBe('major')
    const fold = card({
      window: { branch: 0, from: 0, to: 5, low: { kind: 'fold', index: 0 }, high: { kind: 'onset', index: 0 } },
    })
    expect(level({ card: fold })).toBe('major')
  })

  test('is minor from a move of the onset by more than 1e-6 of the control range', () => {
    expect(level(withOnsets(onset({ p: 5 + 0.9e-5 })))).toBe('patch')
    const moved = compare({}, withOnsets(onset({ p: 5 + 1.1e-5 })))
    expect(moved.level).toBe('minor')
    expect(moved.differences).toEqual([
      { what: 'Position of the onset', was: 5, now: 5 + 1.1e-5, unit: 'm/s', rounding: 'down', change: 'minor' },
    ])
  })

  test.each(['omega', 'crossing', 'cubic'] as const)(
    'is minor from a relative move of %s by more than 1e-5',
    (name) => {
      const value = onset()[name] ?? 0
      expect(level(withOnsets(onset({ [name]: value * (1 + 0.9e-5) })))).toBe('patch')
      expect(level(withOnsets(onset({ [name]: value * (1 + 1.1e-5) })))).toBe('minor')
    },
  )

  test('leaves a cubic coefficient within its error bar alone', () => {
    expect(level(withOnsets(onset({ cubic: -1.01, cubicError: 0.02 })))).toBe('patch')
    expect(level(withOnsets(onset({ cubic: -1.03, cubicError: 0.02 })))).toBe('minor')
  })

  test('compares the first Lyapunov coefficient where the observed quantity is silent', () => {
    const silent = { cubic: null, cubicError: null, shift: null }
    const before = withOnsets(onset(silent))
    expect(level(withOnsets(onset({ ...silent, firstLyapunov: -2 })), before)).toBe('patch')
    expect(level(withOnsets(onset({ ...silent, firstLyapunov: -2.1 })), before)).toBe('minor')
    expect(level(withOnsets(onset()), before)).toBe('minor')
  })

  test('is minor where an end of steady running at zero moves beyond the tolerance of the range', () => {
    const window = (from: number) =>
      card({ window: { branch: 0, from, to: 5, low: { kind: 'range-end' }, high: { kind: 'onset', index: 0 } } })
    expect(level({ card: window(0.9e-5) })).toBe('patch')
    expect(level({ card: window(1.1e-5) })).toBe('minor')
  })

  test('is minor for turning points that come, go or move', () => {
    const folds = [{ p: 6, state: { x: 0 } }]
    expect(compare({}, { card: card({ folds }) }).differences).toEqual([
      { what: 'Number of turning points', was: 0, now: 1, change: 'minor' },
    ])
    expect(level({ card: card({ folds: [{ p: 6.1, state: { x: 0 } }] }) }, { card: card({ folds }) })).toBe('minor')
    const branchPoints = [{ p: 6, state: { x: 0 }, kind: 'pitchfork' as const }]
    expect(level({ card: card({ branchPoints }) })).toBe('minor')
  })

  test('is minor where a steady state at the same running point moves', () => {
    const steady = (x: number) => [
      { state: { x, y: 0 }, eigenvalues: [], stable: true, kind: 'stable spiral' as const, residual: 0 },
    ]
    // The search range of x is 4 wide: tolerance 4e-6.
    expect(level({ card: card({ steadyStates: steady(3e-6) }) })).toBe('patch')
    expect(level({ card: card({ steadyStates: steady(5e-6) }) })).toBe('minor')
    expect(level({ card: card({ steadyStates: [] }) })).toBe('minor')
  })

  test('is not disturbed by rounding that exchanges a mirrored pair or two pairs that cross together', () => {
    const left = onset({ state: { x: -1, y: 0 } })
    const right = onset({ state: { x: 1, y: 0 }, p: 5 + 1e-9 })
    expect(level(withOnsets({ ...right, p: 5 }, { ...left, p: 5 + 1e-9 }), withOnsets(left, right))).toBe('patch')
    const slow = onset({ omega: 1, cubic: -3 })
    const fast = onset({ omega: 4, p: 5 + 1e-9 })
    expect(level(withOnsets({ ...fast, p: 5 }, { ...slow, p: 5 + 1e-9 }), withOnsets(slow, fast))).toBe('patch')
  })
})
