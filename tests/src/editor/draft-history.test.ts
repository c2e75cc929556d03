import { describe, expect, test } from 'vitest'
import * as Y from 'yjs'
import { equationsOf, parameterRows, prepareRoots, settingsOf } from '#shared/ydoc/shape.ts'
import { createDraftHistory, historyKey } from '#src/features/editor/draft-history.ts'
import { addParameter, removeParameter, setParameterCell, setSetting } from '#src/features/editor/draft-tables.ts'

/** A draft with a colleague's copy of it; `hear` brings over what the colleague did, as the connection does. */
function setUp() {
  const doc = new Y.Doc()
  const theirs = new Y.Doc()
  prepareRoots(doc)
  const history = createDraftHistory(doc)
  const editor = { name: 'the editor' }
  history.addTrackedOrigin(editor)
  const connection = { name: 'the connection' }
  return {
    doc,
    theirs,
    history,
    type: (text: string) => doc.transact(() => equationsOf(doc).insert(equationsOf(doc).length, text), editor),
    tell: () => Y.applyUpdate(theirs, Y.encodeStateAsUpdate(doc)),
    hear: () => Y.applyUpdate(doc, Y.encodeStateAsUpdate(theirs), connection),
  }
}

describe('one history of the whole draft', () => {
  test('takes own steps back in the order they were made, text and cells apart', () => {
    const { doc, history, type } = setUp()
    const id = addParameter(doc, { symbol: 'mu', value: '1' })
    type('dx/dt = mu')
    setParameterCell(doc, id, 'value', '2')
    type('*x')
    const seen = () => [equationsOf(doc).toString(), parameterRows(doc)[0]?.value]
    expect(seen()).toEqual(['dx/dt = mu*x', '2'])
    const back: unknown[] = []
    while (history.undo()) back.push(seen())
    expect(back).toEqual([
      ['dx/dt = mu', '2'],
      ['dx/dt = mu', '1'],
      ['', '1'],
      ['', undefined],
    ])
    while (history.redo());
    expect(seen()).toEqual(['dx/dt = mu*x', '2'])
  })

  test('brings a removed row back as it was, and a setting', () => {
    const { doc, history } = setUp()
    const id = addParameter(doc, { symbol: 'mu', value: '1', meaning: 'growth' })
    setSetting(doc, 'title', 'Rig')
    history.stopCapturing()
    removeParameter(doc, id)
    setSetting(doc, 'title', 'Other')
    history.undo()
    expect(parameterRows(doc)).toMatchObject([{ id, symbol: 'mu', value: '1', meaning: 'growth' }])
    expect(settingsOf(doc).get('title')).toBe('Rig')
  })

  test('never undoes what others did, nor writes over it', () => {
    const { doc, theirs, history, type, tell, hear } = setUp()
    const id = addParameter(doc, { symbol: 'mu', value: '1' })
    history.stopCapturing()
    setParameterCell(doc, id, 'value', '2')
    type('mine ')
    tell()
    equationsOf(theirs).insert(0, 'theirs ')
    setParameterCell(theirs, id, 'value', '3')
    hear()
    history.undo()
    expect(equationsOf(doc).toString()).toBe('theirs ')
    history.undo()
    expect(parameterRows(doc)).toMatchObject([{ id, symbol: 'mu', value: '3' }])
    expect(history.undoStack).toEqual([])
  })

  test('takes an own row away again as long as nobody else has written in it', () => {
    const { doc, theirs, history, tell, hear } = setUp()
    const id = addParameter(doc, { symbol: 'mu' })
    tell()
    hear()
    history.undo()
    expect(parameterRows(doc)).toEqual([])
    history.redo()
    tell()
    setParameterCell(theirs, id, 'meaning', 'growth')
    hear()
    history.undo()
    expect(parameterRows(doc)).toMatchObject([{ id, symbol: 'mu', meaning: 'growth' }])
  })
})

test('Ctrl+Z takes back; Ctrl+Y and Ctrl+Shift+Z do again; other keys mean nothing', () => {
  const key = (name: string, also: object = {}) =>
    historyKey({ key: name, ctrlKey: true, metaKey: false, shiftKey: false, altKey: false, ...also })
  expect([key('z'), key('y'), key('Z', { shiftKey: true })]).toEqual(['undo', 'redo', 'redo'])
  expect(key('z', { ctrlKey: false, metaKey: true })).toBe('undo')
  expect([key('z', { ctrlKey: false }), key('z', { altKey: true }), key('x'), key('Y', { shiftKey: true })]).toEqual([
    null,
    null,
    null,
    null,
  ])
})
