import { afterAll, beforeAll, expect, test } from 'vitest'
import * as Y from 'yjs'
import { equationsOf, orderBetween, parametersOf } from '#shared/ydoc/shape.ts'
import { committed, makePage, makePeople, smallDraft } from '#tests/support/collab-pages.ts'
import { changedLimits, openDraft, saved, startCollab, until } from '#tests/support/collab-server.ts'
import { freshDatabase } from '#tests/support/database.ts'
import { newSeed, randomFrom } from '#tests/support/random.ts'

const runs = Number(process.env.RUNS ?? 20)
const editors = 4
const edits = 300
const letters = ['A', 'B', 'C', 'D']

let database: Awaited<ReturnType<typeof freshDatabase>>
let server: Awaited<ReturnType<typeof startCollab>>
let groupId: number
let tokens: string[]

beforeAll(async () => {
  process.setMaxListeners(100)
  database = await freshDatabase()
  const made = await makePeople(database.db, Array<'contributor'>(editors).fill('contributor'))
  groupId = made.groupId
  server = await startCollab(database.db, {
    limits: changedLimits((limits) => {
      limits.rate.frames = { perSecond: 100_000, burst: 100_000 }
    }),
  })
  tokens = made.ids.map((id) => server.signIn(id))
})
afterAll(async () => {
  await server.close()
  await database.close()
})

/** What a person wrote: everybody types only their own letter, and takes away only that. */
const without = (text: string, letter: string) => text.replaceAll(letter, '')

function person(doc: Y.Doc, letter: string, random: () => number) {
  const text = equationsOf(doc)
  const rows = parametersOf(doc)
  const mine = Symbol(letter)
  const undo = new Y.UndoManager([text, rows], { trackedOrigins: new Set([mine]), captureTimeout: 0 })
  const others = () => without(text.toString(), letter)
  const edit = () =>
    doc.transact(() => {
      const dice = random()
      const own = [...text.toString()].flatMap((each, index) => (each === letter ? [index] : []))
      if (dice < 0.2 && own.length > 0) text.delete(own[Math.floor(random() * own.length)] ?? 0, 1)
      else if (dice < 0.3 && rows.has(letter)) rows.get(letter)?.set('value', String(Math.floor(random() * 100)))
      else if (dice < 0.35 && rows.has(letter)) rows.delete(letter)
      else if (dice < 0.4) {
        const row = new Y.Map<string>()
        row.set('order', orderBetween(undefined, undefined))
        row.set('value', '0')
        rows.set(letter, row)
      } else text.insert(Math.floor(random() * (text.length + 1)), letter.repeat(1 + Math.floor(random() * 3)))
    }, mine)
  return {
    edit,
    undo: () => {
      const before = others()
      undo.undo()
      expect(others()).toBe(before)
    },
    redo: () => {
      const before = others()
      undo.redo()
      expect(others()).toBe(before)
    },
    get undoable() {
      return undo.undoStack.length > 0
    },
  }
}

const seed = newSeed()
test.each(Array.from({ length: runs }, (_, i) => seed + i))(
  `${editors} people undo and redo only their own edits among others’ (seed %i)`,
  async (runSeed) => {
    console.info(`undo: SEED=${runSeed}`)
    const random = randomFrom(runSeed)
    const pageId = await makePage(database.db, groupId)
    const connections = tokens.map((token) => openDraft(server.url, pageId, token))
    await Promise.all(connections.map(saved))
    const people = connections.map(({ doc }, index) => person(doc, letters[index] ?? '?', random))

    for (let left = editors * edits; left > 0; left--) {
      const who = people[Math.floor(random() * editors)]
      const dice = random()
      if (dice < 0.65) who?.edit()
      else if (dice < 0.87) who?.undo()
      else who?.redo()
      if (random() < 0.1) await new Promise((resolve) => setTimeout(resolve, random() * 4))
    }
    const texts = () => connections.map(({ doc }) => equationsOf(doc).toString())
    const settle = async () => {
      await Promise.all(connections.map(saved))
      await until(
        () => new Set(texts()).size === 1,
        () => texts().join('\n---\n'),
      )
    }
    await settle()
    expect((await committed(database.db, pageId)).equations).toBe(texts()[0])

    // Everybody takes everything back, all at once: what was there before is there again.
    for (const each of people) while (each.undoable) each.undo()
    await settle()
    expect(texts()[0]).toBe(smallDraft.equations)
    const draft = await committed(database.db, pageId)
    expect(draft.equations).toBe(smallDraft.equations)
    expect(draft.parameters.map((row) => row.id)).toEqual(['p1'])
    expect(server.errors).toEqual([])
    for (const connection of connections) connection.close()
  },
)
