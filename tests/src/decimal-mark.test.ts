import { afterEach, beforeEach, describe, expect, test, vi } from 'vitest'
import { decimalMarkOf } from '#src/lib/decimal-mark.ts'
import { exactFigure } from '#src/lib/figures.ts'
import { summary } from './fixtures.ts'
import { straight } from './stability-card/cards.ts'

test.each([
  ['en-GB', '.'],
  ['de-DE', ','],
  ['fr', ','],
  ['nb-NO', ','],
  // Neither of the two the product writes: the Arabic decimal separator.
  ['ar-EG', '.'],
  ['not a language', '.'],
  [undefined, '.'],
])('%s writes %s', (language, mark) => {
  expect(decimalMarkOf(language)).toBe(mark)
})

test('an entered number keeps every digit, the true minus, and a power of ten that can be read', () => {
  expect(exactFigure(-0.1 - 0.2)).toBe('−0.30000000000000004')
  expect(exactFigure(-2.5e-7)).toBe('−2.5×10⁻⁷')
  expect(exactFigure(undefined)).toBe('')
})

describe('for a reader whose language writes a comma', () => {
  beforeEach(() => {
    vi.stubGlobal('navigator', { language: 'de-DE' })
    vi.resetModules()
  })
  afterEach(() => {
    vi.unstubAllGlobals()
    vi.resetModules()
  })

  test('screens write it: list rows, strips, axes and distances', async () => {
    const { onsetText, frequencyText } = await import('#src/lib/onset-figures.ts')
    const { shortFigure } = await import('#src/lib/figures.ts')
    const { stripText } = await import('#src/lib/strip-text.ts')
    const { axisBetween } = await import('#src/features/stability-card/geometry/frame.ts')
    const { gapFigure } = await import('#src/features/stability-card/geometry/figures.ts')
    const { subjectOf } = await import('#src/features/stability-card/geometry/subject.ts')
    expect(onsetText({ p: 7.1083, direction: 1 })).toBe('7,108')
    // 14.6 rad/s are 14.6 / (2 pi) = 2.3237 Hz.
    expect(frequencyText(14.6, 's').figure).toBe('2,32')
    expect(shortFigure(-0.25)).toBe('−0,25')
    expect(stripText(summary({ control: { value: 40.5 } }))).toContain('Running at 40,5.')
    expect(axisBetween(0, 1, 0, 100, 4).ticks.map((tick) => tick.text)).toContain('0,2')
    // As many decimals as the value beside it has.
    expect(gapFigure(3.456, '58,0', subjectOf(straight('hard').document))).toBe('3,4')
  })

  test('tables to copy from keep the ASCII point and minus', async () => {
    const { copiedFigure, copiedText } = await import('#src/features/stability-card/geometry/figures.ts')
    expect(copiedFigure(-0.123456789, 6)).toBe('-0.123457')
    expect(copiedFigure(1.5e-9, 6)).toBe('1.5e-9')
    expect(copiedFigure(1e-20, 6, 1e-12)).toBe('0')
    expect(copiedText('−0,125 ± 14,6i')).toBe('-0.125 ± 14.6i')
    expect(copiedText('−1,60 × 10⁻⁶')).toBe('-1.60e-6')
  })
})
