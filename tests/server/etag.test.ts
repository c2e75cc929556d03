import { describe, expect, test } from 'vitest'
import { AppError } from '#server/http/app-error.ts'
import { matchesNone, quoteTag, readIfMatch } from '#server/http/etag.ts'

// RFC 9110: 8.8.3 (form of a tag), 13.1.1 (If-Match compares strongly), 13.1.2 (If-None-Match compares weakly).

describe('If-Match', () => {
  test('names one strong tag, given without its quotes', () => {
    expect(readIfMatch('"12-3"')).toBe('12-3')
    expect(readIfMatch('  "a:b/c"  ')).toBe('a:b/c')
  })

  test.each([undefined, '', '*', 'W/"12"', '"1", "2"', '12', '"', '""', '"a"b"', '"line\nbreak"'])(
    'is missing or names no single state: %s',
    (header) => {
      const read = () => readIfMatch(header)
      expect(read).toThrow(AppError)
      expect(read).toThrow(/^needs-if-match/)
    },
  )
})

describe('If-None-Match', () => {
  test.each([
    ['"7"', true],
    ['W/"7"', true],
    ['"6", "7"', true],
    ['"6",W/"7"', true],
    ['*', true],
    ['"6"', false],
    ['7', false],
    ['', false],
    [undefined, false],
  ])('%s names tag 7: %s', (header, named) => {
    expect(matchesNone(header, '7')).toBe(named)
  })
})

test('a tag with a quote or a line end in it is a programming error, never a header', () => {
  expect(quoteTag('1')).toBe('"1"')
  for (const bad of ['a"b', 'a\r\nSet-Cookie: x=1', 'a b']) expect(() => quoteTag(bad)).toThrow()
})
