import { describe, expect, test } from 'vitest'
import * as Y from 'yjs'
import { parameterRows, settingsOf, stateRows } from '#shared/ydoc/shape.ts'
import {
  addParameter,
  addState,
  removeParameter,
  setControlValue,
  setParameterCell,
  setSetting,
  setStateCell,
} from '#src/features/editor/draft-tables.ts'
import { draftContentStore } from '#src/features/editor/use-draft-content.ts'

describe('co-edited tables', () => {
  test('rows are added at the end and keep half-typed cells', () => {
    const doc = new Y.Doc()
    const mu = addParameter(doc, { symbol: 'mu' })
    addParameter(doc, { symbol: 'k' })
    setParameterCell(doc, mu, 'value', '1e')
    expect(parameterRows(doc).map(({ symbol, value }) => [symbol, value])).toEqual([
      ['mu', '1e'],
      ['k', ''],
    ])
  })

  test('two people who add a row at once both keep theirs', () => {
    const [a, b] = [new Y.Doc(), new Y.Doc()]
    addParameter(a, { symbol: 'a' })
    addParameter(b, { symbol: 'b' })
    Y.applyUpdate(a, Y.encodeStateAsUpdate(b))
    Y.applyUpdate(b, Y.encodeStateAsUpdate(a))
    expect(
      parameterRows(a)
        .map((row) => row.symbol)
        .sort(),
    ).toEqual(['a', 'b'])
    expect(parameterRows(b)).toEqual(parameterRows(a))
  })

  test('a row somebody removed stays removed when a cell of it is written', () => {
    const doc = new Y.Doc()
    const id = addParameter(doc, { symbol: 'a' })
    removeParameter(doc, id)
    setParameterCell(doc, id, 'value', '3')
    expect(parameterRows(doc)).toEqual([])
  })

  test('"Set as the page\'s value" writes the control parameter digit by digit', () => {
    const doc = new Y.Doc()
    addParameter(doc, { symbol: 'k', value: '1' })
    addParameter(doc, { symbol: 'U', value: '6' })
    expect(setControlValue(doc, 7)).toBe(false)
    setSetting(doc, 'control', 'U')
    expect(setControlValue(doc, 7.10831457)).toBe(true)
    expect(parameterRows(doc).map((row) => row.value)).toEqual(['1', '7.10831457'])
    // On a range from 1000 to 1001 the point moves in steps of 0.005.
    setControlValue(doc, 1000.015)
    expect(parameterRows(doc)[1]?.value).toBe('1000.015')
    expect(setControlValue(doc, Number.NaN)).toBe(false)
  })

  test('it finds the control parameter in either spelling of its symbol', () => {
    const doc = new Y.Doc()
    addParameter(doc, { symbol: 'μ', value: '1' })
    setSetting(doc, 'control', 'mu')
    expect(setControlValue(doc, 2)).toBe(true)
    expect(parameterRows(doc)[0]?.value).toBe('2')
  })

  test('what is read is a new object only after a change', () => {
    const doc = new Y.Doc()
    const state = addState(doc, { symbol: 'x' })
    const store = draftContentStore(doc)
    let told = 0
    const stop = store.subscribe(() => told++)
    const first = store.get()
    expect(store.get()).toBe(first)
    setStateCell(doc, state, 'low', '-2')
    expect(told).toBe(1)
    expect(store.get()).not.toBe(first)
    expect(store.get().states[0]?.low).toBe('-2')
    // The same text again is no change.
    setStateCell(doc, state, 'low', '-2')
    expect(told).toBe(1)
    stop()
    expect(stateRows(doc)).toHaveLength(1)
    expect(settingsOf(doc).size).toBe(0)
  })
})
