import * as encoding from 'lib0/encoding'
import { describe, expect, test } from 'vitest'
import * as Y from 'yjs'
import { judgeUpdate } from '#collab/check-update.ts'
import { collabLimits } from '#collab/limits.ts'
import { longestBlock } from '#shared/model/equations.ts'
import { utf8Length } from '#shared/model/utf8.ts'
import {
  equationsOf,
  orderBetween,
  parametersOf,
  prepareRoots,
  readDraft,
  rootNames,
  settingsOf,
  statesOf,
  writeDraft,
} from '#shared/ydoc/shape.ts'
import { smallDraft } from '#tests/support/collab-pages.ts'
import { newSeed, randomFrom } from '#tests/support/random.ts'
import { editSomething } from '#tests/support/random-edits.ts'

const limits = collabLimits.document
const bytesOf = (doc: Y.Doc) => utf8Length(equationsOf(doc).toString())
const judge = (doc: Y.Doc, update: Uint8Array) => judgeUpdate(doc, update, bytesOf(doc), limits)

/** The server's document and a browser's copy of it. */
function pair() {
  const server = new Y.Doc()
  writeDraft(server, smallDraft)
  const browser = new Y.Doc()
  prepareRoots(browser)
  Y.applyUpdate(browser, Y.encodeStateAsUpdate(server))
  return { server, browser }
}

/** What a change of the browser's copy sends. */
function updateOf(browser: Y.Doc, change: (doc: Y.Doc) => void): Uint8Array {
  const updates: Uint8Array[] = []
  const collect = (update: Uint8Array) => updates.push(update)
  browser.on('update', collect)
  browser.transact(() => change(browser))
  browser.off('update', collect)
  const [update] = updates
  if (!update || updates.length !== 1) throw new Error(`${updates.length} updates`)
  return update
}

describe('what people do passes', () => {
  const seed = newSeed()
  test(`thousands of random edits of two people, one of whom is away for a while (seed ${seed})`, () => {
    const random = randomFrom(seed)
    const { server, browser } = pair()
    const away = new Y.Doc()
    prepareRoots(away)
    Y.applyUpdate(away, Y.encodeStateAsUpdate(server))
    let present = 0
    for (let i = 0; i < 3000; i++) {
      const update = updateOf(browser, (doc) => editSomething(doc, random))
      const judgement = judge(server, update)
      if (judgement !== 'ok') throw new Error(`edit ${i}: ${judgement}`)
      Y.applyUpdate(server, update)
      editSomething(away, random)
      if (++present % 500 === 0) {
        const back = Y.encodeStateAsUpdate(away, Y.encodeStateVector(server))
        expect(judge(server, back)).toBe('ok')
        Y.applyUpdate(server, back)
        for (const doc of [browser, away]) Y.applyUpdate(doc, Y.encodeStateAsUpdate(server))
        expect(readDraft(browser)).toEqual(readDraft(server))
      }
    }
  })

  test('several edits merged into one, and an edit that is known already', () => {
    const { server, browser } = pair()
    const updates = ['a', 'b', 'c'].map((text) => updateOf(browser, (doc) => equationsOf(doc).insert(0, text)))
    const merged = Y.mergeUpdates(updates)
    expect(judge(server, merged)).toBe('ok')
    Y.applyUpdate(server, merged)
    for (const update of updates) expect(judge(server, update)).toBe('ok')
    // The second half is new, the first is known.
    Y.applyUpdate(server, updates[0] ?? merged)
    expect(judge(server, Y.encodeStateAsUpdate(browser))).toBe('ok')
  })

  test('a row made and removed again while away, whose inside is gone', () => {
    const { server, browser } = pair()
    const row = new Y.Map<string>()
    parametersOf(browser).set('new', row)
    row.set('symbol', 'k')
    parametersOf(browser).delete('new')
    expect(judge(server, Y.encodeStateAsUpdate(browser))).toBe('ok')
  })

  test('a cell typed in a row that somebody else has removed', () => {
    const { server, browser } = pair()
    const update = updateOf(browser, (doc) => parametersOf(doc).get('p1')?.set('value', '3'))
    parametersOf(server).delete('p1')
    expect(judge(server, update)).toBe('ok')
    Y.applyUpdate(server, update)
    expect(server.store.pendingStructs).toBeNull()
    expect(readDraft(server).parameters).toEqual([])
  })
})

describe('what the document does not hold is foreign', () => {
  const cases: [string, (doc: Y.Doc) => void][] = [
    ['another root', (doc) => doc.getText('other').insert(0, 'x')],
    ['a root with a name of the language', (doc) => doc.getMap('__proto__').set('a', 'b')],
    ['a list', (doc) => doc.getArray('rows').push(['x'])],
    ['formatted text', (doc) => equationsOf(doc).insert(0, 'x', { bold: true })],
    ['an embedded object', (doc) => equationsOf(doc).insertEmbed(0, { image: 'x' })],
    ['an attribute of the text', (doc) => equationsOf(doc).setAttribute('a', 'b')],
    ['a setting that is a number', (doc) => doc.getMap('settings').set('title', 7)],
    ['a setting that is an object', (doc) => doc.getMap('settings').set('title', { a: 1 })],
    ['a setting that is bytes', (doc) => doc.getMap('settings').set('title', Uint8Array.of(1))],
    ['a setting that is a document', (doc) => doc.getMap('settings').set('title', new Y.Doc())],
    ['an unknown setting', (doc) => doc.getMap('settings').set('colour', 'red')],
    ['the shape', (doc) => settingsOf(doc).set('shape', '2')],
    ['the shape, to the same', (doc) => settingsOf(doc).set('shape', '1')],
    ['taking the shape away', (doc) => settingsOf(doc).delete('shape')],
    ['a row that is a text', (doc) => doc.getMap('parameters').set('p9', 'x')],
    ['a row that is a Y.Text', (doc) => doc.getMap('parameters').set('p9', new Y.Text('x'))],
    ['a row that is a Y.Array', (doc) => doc.getMap('states').set('p9', new Y.Array())],
    ['a row of markup', (doc) => doc.getMap('states').set('p9', new Y.XmlElement('p'))],
    ['a row id with a space', (doc) => parametersOf(doc).set('p 9', new Y.Map())],
    ['an endless row id', (doc) => parametersOf(doc).set('p'.repeat(limits.rowId + 1), new Y.Map())],
    ['an unknown cell', (doc) => parametersOf(doc).get('p1')?.set('colour', 'red')],
    ['a cell of the other table', (doc) => parametersOf(doc).get('p1')?.set('start', '1')],
    ['a cell of the other table', (doc) => statesOf(doc).get('s1')?.set('value', '1')],
    ['an order that is none', (doc) => parametersOf(doc).get('p1')?.set('order', 'Z 1')],
    [
      'a cell that is too long',
      (doc) =>
        parametersOf(doc)
          .get('p1')
          ?.set('unit', 'm'.repeat(limits.cell + 1)),
    ],
    ['a setting that is too long', (doc) => settingsOf(doc).set('notes', 'm'.repeat(limits.setting + 1))],
    [
      'a row in a row',
      (doc) => {
        const row: Y.Map<unknown> | undefined = doc.getMap<Y.Map<unknown>>('parameters').get('p1')
        row?.set('value', new Y.Map())
      },
    ],
  ]
  test.each(cases)('%s', (_, change) => {
    const { server, browser } = pair()
    const before = readDraft(server)
    expect(judge(server, updateOf(browser, change))).toBe('foreign')
    expect(readDraft(server)).toEqual(before)
    expect([...server.share.keys()]).toEqual([...rootNames])
  })

  test('the longest cell and setting still pass', () => {
    const { server, browser } = pair()
    const update = updateOf(browser, (doc) => {
      parametersOf(doc).get('p1')?.set('unit', 'm'.repeat(limits.cell))
      settingsOf(doc).set('notes', 'm'.repeat(limits.setting))
      parametersOf(doc).get('p1')?.set('order', orderBetween('i', undefined))
    })
    expect(judge(server, update)).toBe('ok')
  })

  test('a stretch of text hung between the text and another list', () => {
    // In the attacker's copy clients 11 and 12 wrote next to each other; on the server 12 wrote a setting.
    const { server } = pair()
    const write = (doc: Y.Doc, client: number, change: () => void) => {
      doc.clientID = client
      change()
    }
    write(server, 11, () => equationsOf(server).insert(0, 'abc'))
    write(server, 12, () => settingsOf(server).set('title', 'def'))
    const forged = new Y.Doc()
    write(forged, 11, () => forged.getText('equations').insert(0, 'abc'))
    write(forged, 12, () => forged.getText('equations').insert(3, 'd'))
    const before = Y.encodeStateVector(forged)
    write(forged, 13, () => forged.getText('equations').insert(3, 'X'))
    expect(judge(server, Y.encodeStateAsUpdate(forged, before))).toBe('foreign')
  })

  test('a stretch that continues, in the text, what the server has in a setting', () => {
    const { server } = pair()
    server.clientID = 21
    settingsOf(server).set('title', 'x')
    const forged = new Y.Doc()
    forged.clientID = 21
    forged.getText('equations').insert(0, 'hello')
    expect(judge(server, Y.encodeStateAsUpdate(forged))).toBe('foreign')
  })
})

describe('what depends on edits that are not there is orphaned', () => {
  test('a gap in one client’s edits, and a reference to another client’s', () => {
    const { server, browser } = pair()
    updateOf(browser, (doc) => equationsOf(doc).insert(0, 'lost'))
    expect(
      judge(
        server,
        updateOf(browser, (doc) => equationsOf(doc).insert(0, 'a')),
      ),
    ).toBe('orphaned')
    const other = new Y.Doc()
    Y.applyUpdate(other, Y.encodeStateAsUpdate(browser))
    expect(
      judge(
        server,
        updateOf(other, (doc) => doc.getText('equations').insert(2, 'b')),
      ),
    ).toBe('orphaned')
  })

  test('a removal of what is not there', () => {
    const { server, browser } = pair()
    updateOf(browser, (doc) => equationsOf(doc).insert(0, 'lost'))
    expect(
      judge(
        server,
        updateOf(browser, (doc) => equationsOf(doc).delete(0, 4)),
      ),
    ).toBe('orphaned')
  })

  test('two stretches that each refer to the other', () => {
    const encoder = encoding.createEncoder()
    const text = (client: number, origin: number) => {
      encoding.writeVarUint(encoder, 1) // structs
      encoding.writeVarUint(encoder, client)
      encoding.writeVarUint(encoder, 0) // clock
      encoding.writeUint8(encoder, 0x80 | 4) // a text with an origin
      encoding.writeVarUint(encoder, origin)
      encoding.writeVarUint(encoder, 0)
      encoding.writeVarString(encoder, 'x')
    }
    encoding.writeVarUint(encoder, 2) // clients
    text(71, 72)
    text(72, 71)
    encoding.writeVarUint(encoder, 0) // nothing deleted
    expect(judge(pair().server, encoding.toUint8Array(encoder))).toBe('orphaned')
  })

  test('a stretch that refers to itself', () => {
    const encoder = encoding.createEncoder()
    for (const value of [1, 1, 73, 0]) encoding.writeVarUint(encoder, value)
    encoding.writeUint8(encoder, 0x80 | 4)
    for (const value of [73, 0]) encoding.writeVarUint(encoder, value)
    encoding.writeVarString(encoder, 'x')
    encoding.writeVarUint(encoder, 0)
    expect(judge(pair().server, encoding.toUint8Array(encoder))).toBe('orphaned')
  })
})

describe('what is no update, or one that only costs, is malformed', () => {
  test('bytes of any kind', () => {
    const { server } = pair()
    for (const bytes of [[], [0], [1], [255, 255, 255, 255, 255], [1, 1, 1, 0, 9], [1, 1, 1, 0, 4, 1, 5]])
      expect(judge(server, Uint8Array.from(bytes))).toBe('malformed')
  })

  test('removals that overlap or go back, which would be walked again and again', () => {
    const { server } = pair()
    const { client, clock } = equationsOf(server)._start?.id ?? { client: 0, clock: 0 }
    const update = (ranges: [number, number][]) => {
      const encoder = encoding.createEncoder()
      for (const value of [0, 1, client, ranges.length, ...ranges.flat()]) encoding.writeVarUint(encoder, value)
      return encoding.toUint8Array(encoder)
    }
    expect(judge(server, update([[clock, 3]]))).toBe('ok')
    expect(
      judge(
        server,
        update([
          [clock, 3],
          [clock + 2, 3],
        ]),
      ),
    ).toBe('malformed')
    expect(
      judge(
        server,
        update([
          [clock + 5, 1],
          [clock, 1],
        ]),
      ),
    ).toBe('malformed')
  })

  test('a deleted stretch without end', () => {
    const encoder = encoding.createEncoder()
    for (const value of [1, 1, 74, 0, 0, limits.deletedLength + 1, 0]) encoding.writeVarUint(encoder, value)
    expect(judge(pair().server, encoding.toUint8Array(encoder))).toBe('malformed')
  })
})

describe('the length of the equation block', () => {
  const filled = (text: string) => {
    const { server } = pair()
    equationsOf(server).delete(0, equationsOf(server).length)
    equationsOf(server).insert(0, text)
    const browser = new Y.Doc()
    prepareRoots(browser)
    Y.applyUpdate(browser, Y.encodeStateAsUpdate(server))
    return { server, browser }
  }

  test('is limited as the model’s own is', () => {
    expect(limits.text).toBe(longestBlock)
  })

  test('may be reached, not passed', () => {
    const { server, browser } = filled('x'.repeat(limits.text - 3))
    const fits = updateOf(browser, (doc) => equationsOf(doc).insert(9, 'abc'))
    expect(judge(server, fits)).toBe('ok')
    Y.applyUpdate(server, fits)
    expect(
      judge(
        server,
        updateOf(browser, (doc) => equationsOf(doc).insert(0, 'd')),
      ),
    ).toBe('text-full')
  })

  test('is counted in UTF-8 bytes', () => {
    const { server, browser } = filled('x'.repeat(limits.text - 3))
    // U+03BC takes two bytes.
    expect(
      judge(
        server,
        updateOf(browser, (doc) => equationsOf(doc).insert(0, 'μμ')),
      ),
    ).toBe('text-full')
  })

  test('lets text be replaced where it is full, also in pieces and with one’s own words taken back', () => {
    const { server, browser } = filled('x'.repeat(limits.text))
    const replaced = updateOf(browser, (doc) => {
      const text = equationsOf(doc)
      text.delete(100, 2)
      text.delete(500, 3)
      text.insert(50, 'abcdefg')
      text.delete(52, 2)
    })
    expect(judge(server, replaced)).toBe('ok')
    Y.applyUpdate(server, replaced)
    expect(bytesOf(server)).toBe(limits.text)
    const tooMuch = updateOf(browser, (doc) => {
      equationsOf(doc).delete(10, 4)
      equationsOf(doc).insert(10, 'abcde')
    })
    expect(judge(server, tooMuch)).toBe('text-full')
  })

  test('does not keep anybody from taking text away or editing elsewhere', () => {
    const { server, browser } = filled('x'.repeat(limits.text))
    expect(
      judge(
        server,
        updateOf(browser, (doc) => settingsOf(doc).set('title', 'still')),
      ),
    ).toBe('ok')
    const all = new Y.Doc()
    Y.applyUpdate(all, Y.encodeStateAsUpdate(server))
    expect(
      judge(
        server,
        updateOf(all, (doc) => doc.getText('equations').delete(0, 9)),
      ),
    ).toBe('ok')
  })
})

const seed = newSeed()
test(`20,000 spoiled updates never throw, and those that pass leave a sound document (seed ${seed})`, () => {
  const random = randomFrom(seed)
  const { server, browser } = pair()
  const log: Uint8Array[] = [Y.encodeStateAsUpdate(server)]
  server.on('update', (update: Uint8Array) => log.push(update))
  const counts: Record<string, number> = {}
  for (let i = 0; i < 20_000; i++) {
    const update = updateOf(browser, (doc) => editSomething(doc, random))
    const spoiled = update.slice(0, random() < 0.2 ? Math.floor(random() * update.length) : update.length)
    const blows = 1 + Math.floor(random() * 3)
    for (let k = 0; k < blows && spoiled.length > 0; k++) {
      const at = Math.floor(random() * spoiled.length)
      spoiled[at] = random() < 0.5 ? (spoiled[at] ?? 0) ^ (1 << Math.floor(random() * 8)) : Math.floor(random() * 256)
    }
    const judgement = judge(server, spoiled)
    counts[judgement] = (counts[judgement] ?? 0) + 1
    if (judgement === 'ok') {
      Y.applyUpdate(server, spoiled)
      expect(server.store.pendingStructs).toBeNull()
      expect(server.store.pendingDs).toBeNull()
      expect([...server.share.keys()]).toEqual([...rootNames])
    }
    const away = judge(server, update)
    // Where a spoiled one took its place, a client's clock may be used up; otherwise the true one goes in.
    if (away === 'ok') Y.applyUpdate(server, update)
    else Y.applyUpdate(browser, Y.encodeStateAsUpdate(server))
    if (away !== 'ok') browser.clientID = Math.floor(random() * 2 ** 31)
  }
  expect(counts.malformed).toBeGreaterThan(1000)
  const replayed = new Y.Doc()
  prepareRoots(replayed)
  for (const update of log) Y.applyUpdate(replayed, update)
  expect(readDraft(replayed)).toEqual(readDraft(server))
  expect(settingsOf(server).get('shape')).toBe('1')
}, 120_000)
