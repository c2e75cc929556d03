import { expect, test } from 'vitest'
import * as Y from 'yjs'
import { readPresence } from '#src/features/editor/presence-state.ts'

const user = { id: 4, name: 'Cora Vane', role: 'contributor' as const }

test('carets that Yjs wrote are read, beside an item and at the end of the text', () => {
  const doc = new Y.Doc()
  const text = doc.getText('equations')
  text.insert(0, 'dx/dt')
  const place = (index: number): unknown =>
    JSON.parse(JSON.stringify(Y.relativePositionToJSON(Y.createRelativePositionFromTypeIndex(text, index))))
  const read = readPresence({ user, cursor: { anchor: place(0), head: place(5) } })
  expect(read.user).toEqual(user)
  const at = (json: unknown) =>
    Y.createAbsolutePositionFromRelativePosition(Y.createRelativePositionFromJSON(json), doc)?.index
  expect([at(read.cursor?.anchor), at(read.cursor?.head)]).toEqual([0, 5])
})

test('what is of another shape is as good as absent, and spoils nothing beside it', () => {
  expect(readPresence({ user, cursor: 'here' })).toEqual({ user, cursor: null })
  expect(readPresence({ user: { name: 5 }, cursor: null })).toEqual({ user: null, cursor: null })
  expect(readPresence({ user, cursor: { anchor: { item: 'x' }, head: {} } }).cursor).toBeNull()
  expect([readPresence(null), readPresence('text'), readPresence({})]).toEqual([{}, {}, {}])
})
