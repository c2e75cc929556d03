import { describe, expect, test } from 'vitest'
import { utf8Length } from '#shared/model/utf8.ts'
import { closeCodes, closeReasons, isFinalClose, roomNews } from '#shared/ydoc/rooms.ts'

describe('close codes', () => {
  test.each(Object.entries(closeCodes))('%s has words that fit a close frame', (_, code) => {
    // RFC 6455, 5.5: a control frame carries at most 125 bytes, two of them are the code.
    expect(utf8Length(closeReasons[code])).toBeLessThanOrEqual(123)
    expect(closeReasons[code]).not.toBe('')
  })

  test('a client comes back by itself after a restart, a cut line and a failed load, and after nothing else of ours', () => {
    const final = Object.entries(closeCodes).filter(([, code]) => !isFinalClose(code))
    expect(final.map(([name]) => name)).toEqual(['restart', 'loadFailed'])
    expect([1000, 1001, 1006, 1011].some(isFinalClose)).toBe(false)
  })
})

test('the news of a room is read strictly', () => {
  expect(roomNews.parse({ state: 'live', generation: 2 })).toEqual({ state: 'live', generation: 2 })
  expect(roomNews.safeParse({ state: 'open', generation: 2 }).success).toBe(false)
  expect(roomNews.safeParse({ state: 'live' }).success).toBe(false)
})
