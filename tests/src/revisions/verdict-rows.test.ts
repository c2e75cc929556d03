import { describe, expect, test } from 'vitest'
import { consequenceNote, differenceTexts, verdictRows } from '#src/features/revisions/verdict-rows.ts'
import { empty, straight } from '../stability-card/cards.ts'

const rowOf = (rows: ReturnType<typeof verdictRows>, what: string) => rows.find((row) => row.what === what)

describe('both verdicts side by side', () => {
  test('a turned verdict at the same place: the kind differs, the place does not', () => {
    const rows = verdictRows(straight('soft'), straight('hard'))
    expect(rowOf(rows, 'Kind of onset')).toEqual({ what: 'Kind of onset', was: 'soft', now: 'hard' })
    const limit = rowOf(rows, 'Stability ends at')
    expect(limit?.was).toBe(limit?.now)
    expect(rowOf(rows, 'Cubic coefficient')).toMatchObject({ was: '−0.0125', now: '+0.0125' })
    expect(consequenceNote(straight('soft'), straight('hard'))).toMatch(
      /^Onset stays at .+\. What changes is what happens there\.$/,
    )
  })

  test('a moved onset is rounded down on both sides: the danger lies above', () => {
    const rows = verdictRows(straight('hard', { p: 58.019 }), straight('hard', { p: 57.999 }))
    expect(rowOf(rows, 'Stability ends at')).toMatchObject({ was: '58.01 m/s', now: '57.99 m/s' })
    expect(consequenceNote(straight('hard', { p: 58.019 }), straight('hard', { p: 57.999 }))).toBe(
      'Onset moves from 58.01 m/s to 57.99 m/s.',
    )
  })

  test('an onset that is gone is said to be', () => {
    expect(consequenceNote(straight('hard'), empty)).toMatch(/^The onset at .+ is gone\.$/)
    expect(consequenceNote(empty, straight('hard'))).toMatch(/^An onset appears at /)
    expect(consequenceNote(empty, empty)).toBeNull()
  })
})

describe('a difference', () => {
  const of = (was: number | string | null, now: number | string | null, unit?: string) =>
    differenceTexts({ what: 'Position of the onset', was, now, change: 'minor', ...(unit ? { unit } : {}) })

  test('has as many digits as tell the two apart', () => {
    expect(of(58.00001, 58.00002, 'm/s')).toEqual(['58.00001 m/s', '58.00002 m/s'])
    expect(of(58.01, 59.01, '1')).toEqual(['58.01', '59.01'])
  })

  test('of positions is rounded to the safe side, as onsets are everywhere', () => {
    const position = { what: 'Position of the onset', was: 68.759, now: 69.149, unit: 'm/s', change: 'minor' as const }
    expect(differenceTexts({ ...position, rounding: 'down' })).toEqual(['68.75 m/s', '69.14 m/s'])
    expect(differenceTexts({ ...position, rounding: 'up' })).toEqual(['68.76 m/s', '69.15 m/s'])
  })

  test('says what is not there, and counts as counts', () => {
    expect(of(null, 0.25)).toEqual(['not there', '0.2500'])
    expect(of(1, 2)).toEqual(['1', '2'])
    expect(of('soft', 'hard')).toEqual(['soft', 'hard'])
  })
})
