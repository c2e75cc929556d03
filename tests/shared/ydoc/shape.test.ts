import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import * as Y from 'yjs'
import type { DraftContent } from '#shared/model/draft.ts'
import {
  equationsOf,
  orderAt,
  orderBetween,
  orderPattern,
  ordersFor,
  parameterRows,
  parametersOf,
  readDraft,
  settingsOf,
  shapeVersion,
  stateRows,
  writeDraft,
} from '#shared/ydoc/shape.ts'

const order = fc.stringMatching(/^[0-9a-z]{0,6}[1-9a-z]$/)

describe('orderBetween', () => {
  test('sorts strictly between two orders, whatever they are', () => {
    fc.assert(
      fc.property(order, order, (a, b) => {
        fc.pre(a !== b)
        const [low, high] = a < b ? [a, b] : [b, a]
        const between = orderBetween(low, high)
        expect(between).toMatch(orderPattern)
        expect(low < between && between < high, `${low} < ${between} < ${high}`).toBe(true)
      }),
      { numRuns: 5000 },
    )
  })

  test('sorts before the first and after the last', () => {
    fc.assert(
      fc.property(order, (given) => {
        const first = orderBetween(undefined, given)
        const last = orderBetween(given, undefined)
        expect(first).toMatch(orderPattern)
        expect(last).toMatch(orderPattern)
        expect(first < given && given < last, `${first} < ${given} < ${last}`).toBe(true)
      }),
      { numRuns: 2000 },
    )
  })

  test.each([
    [undefined, undefined, 'i'], // the middle digit of 36
    ['i', undefined, 'j'],
    ['z', undefined, 'zi'],
    [undefined, '1', '0i'], // nothing between 0 and 1 in one digit: half-way from 0 to 1 in the second
    ['a', 'b', 'ai'],
    ['a', 'b5', 'b'],
    ['az', 'b', 'azi'],
    ['a', 'c', 'b'],
    ['a', 'a1', 'a0i'],
    ['a3', 'a35', 'a32'], // 0.(10)(3) and 0.(10)(3)(5): half of the third digit, floor(5/2)
  ])('between %s and %s is %s', (before, after, expected) => {
    expect(orderBetween(before, after)).toBe(expected)
  })

  test('ends for what is no order, and still sorts after a good `before`', () => {
    for (const bad of ['', '0', '00', 'a0', 'Ä', '\uffff', 'A', '-', 'a b']) {
      expect(orderBetween(bad, bad)).toBe('i')
      expect(orderBetween('k', bad) > 'k').toBe(true)
      expect(orderBetween(bad, 'k') < 'k').toBe(true)
    }
    expect(orderBetween('m', 'm') > 'm').toBe(true)
    expect(orderBetween('m', 'c') > 'm').toBe(true)
  })

  test('stays short when 200 rows are put one after another at the end', () => {
    let last: string | undefined
    for (let i = 0; i < 200; i++) last = orderBetween(last, undefined)
    // The first digit goes from i to z, then each further digit starts in the middle: 18 rows a character.
    expect(last?.length).toBeLessThanOrEqual(Math.ceil(200 / 18) + 1)
  })

  test('grows by one character for each five rows at worst when always put at one place', () => {
    const low = 'a'
    let high = 'b'
    for (let i = 0; i < 100; i++) high = orderBetween(low, high)
    expect(high > low).toBe(true)
    expect(high.length).toBeLessThanOrEqual(100 / 4)
  })
})

describe('orderAt', () => {
  test('puts a row at every place of a table', () => {
    fc.assert(
      fc.property(fc.uniqueArray(order, { maxLength: 12 }), fc.nat(12), (orders, place) => {
        const rows = orders.sort().map((value) => ({ order: value }))
        const index = Math.min(place, rows.length)
        const added = orderAt(rows, index)
        const sorted = [...orders, added].sort()
        expect(sorted.indexOf(added)).toBe(index)
      }),
    )
  })

  test('goes behind rows that share one order', () => {
    const rows = [{ order: 'c' }, { order: 'm' }, { order: 'm' }, { order: 't' }]
    const added = orderAt(rows, 2)
    expect('m' < added && added < 't').toBe(true)
  })
})

test('ordersFor is sorted, distinct and leaves room between any two', () => {
  for (const count of [0, 1, 2, 34, 35, 36, 200, 1295, 1300]) {
    const orders = ordersFor(count)
    expect(orders).toHaveLength(count)
    expect(new Set(orders).size).toBe(count)
    expect([...orders].sort()).toEqual(orders)
    for (const value of orders) expect(value).toMatch(orderPattern)
  }
})

const cellText = fc.string({ maxLength: 12, unit: 'grapheme' })
const rowId = fc.stringMatching(/^[a-z0-9]{4,10}$/)
const draft: fc.Arbitrary<DraftContent> = fc.record({
  equations: fc.string({ maxLength: 200, unit: 'grapheme' }),
  parameters: fc.uniqueArray(
    fc.record({
      id: rowId,
      symbol: cellText,
      value: cellText,
      low: cellText,
      high: cellText,
      unit: cellText,
      meaning: cellText,
      uncertainty: cellText,
    }),
    { maxLength: 40, selector: (row) => row.id },
  ),
  states: fc.uniqueArray(
    fc.record({
      id: rowId,
      symbol: cellText,
      low: cellText,
      high: cellText,
      start: cellText,
      unit: cellText,
      meaning: cellText,
    }),
    { maxLength: 30, selector: (row) => row.id },
  ),
  settings: fc
    .tuple(cellText, cellText)
    .map(([title, control]) => ({ title, summary: '', field: '', timeUnit: 's', control, secondControl: '' }))
    .map((settings) => ({ ...settings, observed: 'x', quietWord: '', leftOut: 'a\nb', notes: '' })),
})

describe('a draft', () => {
  test('is read as it was written, in its order, also through an update', () => {
    fc.assert(
      fc.property(draft, (content) => {
        const doc = new Y.Doc()
        writeDraft(doc, content)
        expect(readDraft(doc)).toEqual(content)
        const copy = new Y.Doc()
        Y.applyUpdate(copy, Y.encodeStateAsUpdate(doc))
        expect(readDraft(copy)).toEqual(content)
        expect(settingsOf(copy).get('shape')).toBe(shapeVersion)
      }),
      { numRuns: 60 },
    )
  })

  test('keeps both rows when two people add one at once, and both see them in the same order', () => {
    const [left, right] = [new Y.Doc(), new Y.Doc()]
    const add = (doc: Y.Doc, id: string) => {
      const row = new Y.Map<string>()
      row.set('order', orderAt(parameterRows(doc), 0))
      row.set('symbol', id)
      parametersOf(doc).set(id, row)
    }
    add(left, 'one')
    add(right, 'two')
    Y.applyUpdate(left, Y.encodeStateAsUpdate(right))
    Y.applyUpdate(right, Y.encodeStateAsUpdate(left))
    expect(parameterRows(left).map((row) => row.id)).toEqual(['one', 'two'])
    expect(parameterRows(right)).toEqual(parameterRows(left))
  })

  test('reads as blank what is no text, and leaves out what is no row', () => {
    const doc = new Y.Doc()
    doc.getMap('settings').set('title', 7)
    doc.getMap('parameters').set('odd', 'no row')
    const row = new Y.Map()
    row.set('symbol', true)
    doc.getMap('states').set('s', row)
    equationsOf(doc).insert(0, 'dx/dt = x')
    const read = readDraft(doc)
    expect(read.settings.title).toBe('')
    expect(read.parameters).toEqual([])
    expect(stateRows(doc)).toMatchObject([{ id: 's', order: '', symbol: '' }])
  })
})
