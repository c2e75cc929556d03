import { describe, expect, test } from 'vitest'
import type { RevisionHead } from '#shared/api/pages.ts'
import { actWords } from '#src/api/act-words.ts'
import { ApiProblem } from '#src/api/api-problem.ts'
import { consequenceOf } from '#src/features/reviews/consequence.ts'
import { keptRemarks, noRemarks, readRemarks, toSend } from '#src/features/reviews/remarks.ts'
import { nextPlace } from '#src/features/reviews/use-review-keys.ts'
import { summary } from '../fixtures.ts'

const revision = (more: Partial<RevisionHead> = {}): RevisionHead => ({
  mark: '1.0.1',
  state: 'in-review',
  summary: 'First issue',
  sentBy: { id: 1, name: 'Tove Marrowby' },
  sentAt: '2026-11-09T09:41:00.000Z',
  settledAt: null,
  reason: null,
  base: null,
  signatures: [],
  engine: '0.1.0',
  fingerprint: `sha256:${'0'.repeat(64)}`,
  card: summary({ kind: 'hard' }),
  etag: '1.0.1.in-review',
  ...more,
})

describe('the consequence of a review in the list', () => {
  test('says what approving changes', () => {
    expect(consequenceOf({ revision: revision(), wasKind: 'soft' })).toBe('Turns the verdict from soft to hard')
    expect(consequenceOf({ revision: revision(), wasKind: 'hard' })).toBe('Leaves the verdict as it is')
  })

  test('claims no first revision where nothing is in force: another one may have been withdrawn', () => {
    expect(consequenceOf({ revision: revision(), wasKind: null })).toBe('Nothing in force to compare with')
  })

  test('of a settled one says its kind only: what is in force now was not what it was held against', () => {
    expect(consequenceOf({ revision: revision({ state: 'in-force' }), wasKind: 'hard' })).toBe('Hard')
  })
})

describe('refused acts', () => {
  const words = (code: ApiProblem['code']) => actWords(new ApiProblem(code, 409, 'as it came'), 'Nothing is signed.')

  test('by code, with what still holds and what to do first', () => {
    expect(words('changed')).toEqual({
      headline: 'It changed while you were reading',
      text: 'Nothing is signed.',
      first: 'read-again',
    })
    expect(words('already-settled').headline).toBe('Already settled by somebody else')
    expect(words('base-superseded')).toMatchObject({ headline: 'A newer revision is in force', first: 'open-page' })
    expect(words('not-signed-in')).toMatchObject({ headline: 'You were signed out', first: 'sign-in' })
  })

  test('what is not allowed any more may have been settled meanwhile: it can be read again', () => {
    expect(words('may-not')).toEqual({
      headline: 'as it came',
      text: 'Nothing is signed. It may have been settled meanwhile.',
      first: 'read-again',
    })
  })

  test('an answer that was lost promises nothing about what was done', () => {
    expect(words('network').text).not.toContain('Nothing is signed')
  })

  test('others speak for themselves', () => {
    expect(words('wrong-password')).toEqual({ headline: 'as it came', text: '', first: null })
  })
})

describe('remarks being written', () => {
  const remarks = [
    { id: 0, text: ' Where from? ', target: 'line 3' },
    { id: 1, text: '   ', target: '' },
    { id: 2, text: 'Unit', target: 'symbol g_0' },
  ]

  test('go with their target; empty ones do not go', () => {
    expect(toSend(remarks)).toEqual([
      { text: 'Where from?', line: 3 },
      { text: 'Unit', symbol: 'g_0' },
    ])
  })

  test('come back as they were kept; nothing written is not kept', () => {
    expect(readRemarks(keptRemarks(remarks))).toEqual(remarks)
    expect(keptRemarks(noRemarks)).toBeNull()
  })

  test('what is kept in another shape is not taken', () => {
    expect(readRemarks('{"a":1}')).toEqual(noRemarks)
    expect(readRemarks('not json')).toEqual(noRemarks)
    expect(readRemarks('[]')).toEqual(noRemarks)
  })
})

test('the keys go round: from nowhere to the first or the last, and on past the ends', () => {
  expect(nextPlace(3, -1, 1)).toBe(0)
  expect(nextPlace(3, -1, -1)).toBe(2)
  expect(nextPlace(3, 2, 1)).toBe(0)
  expect(nextPlace(3, 0, -1)).toBe(2)
  expect(nextPlace(0, -1, 1)).toBe(-1)
})
