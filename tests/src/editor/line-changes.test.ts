import { describe, expect, test } from 'vitest'
import { changeWords } from '#src/features/editor/change-marks.ts'
import { changedLines, linesInWords } from '#src/features/editor/line-changes.ts'

const before = 'q = x^2\ndx/dt = a*x\ndy/dt = -y'

describe('lines that differ from the revision in force', () => {
  test('none where the texts are the same but for blanks at line ends', () => {
    expect(changedLines(before, 'q = x^2  \r\ndx/dt = a*x\r\ndy/dt = -y')).toEqual([])
  })

  test('a line written over and a line put in are changed, the others are not', () => {
    expect(changedLines(before, 'q = x^2\ndx/dt = a*x^3\n# new\ndy/dt = -y')).toEqual([
      { line: 2, kind: 'changed' },
      { line: 3, kind: 'changed' },
    ])
  })

  test('lines that are gone are told where they stood, at the end too', () => {
    expect(changedLines(before, 'q = x^2\ndy/dt = -y')).toEqual([{ line: 2, kind: 'removed' }])
    expect(changedLines(before, 'q = x^2\ndx/dt = a*x')).toEqual([{ line: 2, kind: 'removed' }])
    expect(changedLines(before, '')).toEqual([{ line: 1, kind: 'changed' }])
  })

  test('texts that have next to nothing in common are changed from end to end', () => {
    const many = (word: string) => Array.from({ length: 600 }, (_, i) => `${word}${i}`).join('\n')
    expect(changedLines(many('a'), many('b'))).toHaveLength(600)
  })

  test('in words, for those who do not see the margin', () => {
    const lines = [2, 4, 5, 6].map((line) => ({ line, kind: 'changed' as const }))
    expect(linesInWords(lines)).toBe('lines 2, 4 to 6')
    expect(linesInWords(lines.slice(0, 1))).toBe('line 2')
    expect(changeWords({ line: 2, kind: 'changed' }, '2.1.0')).toBe('Line 2 changed since revision 2.1.0')
    expect(changeWords({ line: 2, kind: 'removed' }, '2.1.0')).toBe('Lines removed here since revision 2.1.0')
  })
})
