import { describe, expect, test } from 'vitest'
import {
  compareLines,
  compareRows,
  parameterText,
  parseDocument,
  stateText,
} from '#src/features/revisions/document-parts.ts'

describe('equation blocks side by side', () => {
  test('an unchanged block is one piece', () => {
    expect(compareLines('a = 1\nb = 2', 'a = 1\r\nb = 2')).toEqual([{ kind: 'same', lines: ['a = 1', 'b = 2'], at: 1 }])
  })

  test('a changed line stands as was and now, with its number in the newer block', () => {
    expect(compareLines('a = 1\nc = -1\nb = 2', 'a = 1\nc = g\nb = 2')).toEqual([
      { kind: 'same', lines: ['a = 1'], at: 1 },
      { kind: 'changed', was: ['c = -1'], now: ['c = g'], at: 2 },
      { kind: 'same', lines: ['b = 2'], at: 3 },
    ])
  })

  test('removed lines move nothing, added ones move what follows', () => {
    const removed = compareLines('a\nb\nc', 'a\nc')
    expect(removed[1]).toEqual({ kind: 'changed', was: ['b'], now: [], at: 2 })
    expect(removed[2]).toMatchObject({ kind: 'same', at: 2 })
    const added = compareLines('a\nc', 'a\nb1\nb2\nc')
    expect(added[1]).toEqual({ kind: 'changed', was: [], now: ['b1', 'b2'], at: 2 })
    expect(added[2]).toMatchObject({ kind: 'same', at: 4 })
  })
})

describe('tables side by side', () => {
  const row = (symbol: string, value: number, unit?: string) => ({ symbol, value, ...(unit ? { unit } : {}) })

  test('new, gone and different rows are told, unchanged ones are not', () => {
    const before = [row('a', 1), row('b', 2, 'm'), row('c', 3)]
    const after = [row('a', 1), row('b', -2, 'm'), row('d', 4)]
    expect(compareRows(before, after, parameterText)).toEqual([
      { symbol: 'b', meaning: '', was: '2 m', now: '−2 m' },
      { symbol: 'd', meaning: '', was: null, now: '4' },
      { symbol: 'c', meaning: '', was: '3', now: null },
    ])
  })

  test('a changed unit or range is a difference as well', () => {
    expect(
      compareRows([{ ...row('a', 1), low: 0, high: 2 }], [{ ...row('a', 1), low: 0, high: 3 }], parameterText),
    ).toHaveLength(1)
    expect(compareRows([row('a', 1, 's')], [row('a', 1, 'min')], parameterText)).toHaveLength(1)
  })

  test('a state is its search range, start and unit', () => {
    expect(stateText({ symbol: 'x', low: -2, high: 2, start: 0.1, unit: 'mm' })).toBe('−2 to 2 mm, starts at 0.1')
  })
})

test('a document of another shape is not taken for one', () => {
  expect(parseDocument({ format: 'something-else' })).toBeNull()
  expect(parseDocument(null)).toBeNull()
})
