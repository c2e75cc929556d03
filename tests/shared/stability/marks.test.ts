import { describe, expect, test } from 'vitest'
import { markText, nextMark, readMark } from '#shared/stability/marks.ts'

const mark = (text: string) => {
  const read = readMark(text)
  if (!read) throw new Error(`${text} is no mark`)
  return read
}
const next = (base: string | null, level: 'major' | 'minor' | 'patch', taken: string[] = []) =>
  markText(nextMark(base === null ? null : mark(base), level, taken.map(mark)))

describe('the mark of the next revision', () => {
  test('is 1.0.0 for the first', () => {
    expect(next(null, 'patch')).toBe('1.0.0')
    expect(next(null, 'major')).toBe('1.0.0')
  })

  test('raises the number of its level and begins the later ones again', () => {
    expect(next('2.3.4', 'major')).toBe('3.0.0')
    expect(next('2.3.4', 'minor')).toBe('2.4.0')
    expect(next('2.3.4', 'patch')).toBe('2.3.5')
  })

  test('is never one that was used: the last number goes up until it is free', () => {
    expect(next(null, 'major', ['1.0.0', '1.0.1'])).toBe('1.0.2')
    expect(next('1.0.0', 'major', ['1.0.0', '2.0.0'])).toBe('2.0.1')
    expect(next('1.0.0', 'minor', ['1.0.0', '1.1.0', '1.1.2'])).toBe('1.1.1')
  })

  test('leaves its base as it was', () => {
    const base = mark('1.0.0')
    nextMark(base, 'patch', [])
    expect(markText(base)).toBe('1.0.0')
  })

  test('reads marks and nothing else', () => {
    expect(readMark('10.0.12')).toEqual({ major: 10, minor: 0, patch: 12 })
    for (const text of ['1.0', '1.0.0.0', 'v1.0.0', '1.0.-1', '1.0.0 ', '', '1e3.0.0'])
      expect(readMark(text)).toBeNull()
  })
})
