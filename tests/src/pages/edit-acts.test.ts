import { expect, test } from 'vitest'
import { whyNotSend } from '#src/pages/edit-acts.tsx'
import { commandOf } from '#src/pages/use-command-key.ts'

const checked = { kind: 'checked' as const, id: 1, document: null, errors: [], warnings: [], lines: [], helpers: [] }

test('a draft is sent only when every edit is saved and nothing is wrong with it', () => {
  expect(whyNotSend('saved', checked)).toBeNull()
  expect(whyNotSend('saving', checked)).toBe('Wait until every edit is saved.')
  const faulty = { ...checked, errors: [{ code: 'syntax' as const, message: 'A bracket is open.', line: 1 }] }
  expect(whyNotSend('saved', faulty)).toBe('Settle the faults first.')
})

test('Ctrl+Enter runs again, Ctrl+Shift+Enter sends, on a Mac with Command', () => {
  const key = (changes: object) =>
    commandOf({ key: 'Enter', ctrlKey: false, metaKey: false, shiftKey: false, ...changes })
  expect([key({ ctrlKey: true }), key({ metaKey: true })]).toEqual(['again', 'again'])
  expect(key({ ctrlKey: true, shiftKey: true })).toBe('send')
  expect([key({}), key({ shiftKey: true }), key({ key: 'a', ctrlKey: true })]).toEqual([null, null, null])
})
