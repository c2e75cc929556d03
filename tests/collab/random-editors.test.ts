import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import * as Y from 'yjs'
import { loadDocument } from '#collab/persistence.ts'
import { readDraft } from '#shared/ydoc/shape.ts'
import { makePage, makePeople } from '#tests/support/collab-pages.ts'
import { changedLimits, openDraft, startCollab, until } from '#tests/support/collab-server.ts'
import { startProxy } from '#tests/support/cut-proxy.ts'
import { freshDatabase } from '#tests/support/database.ts'
import { newSeed, randomFrom } from '#tests/support/random.ts'
import { editSomething } from '#tests/support/random-edits.ts'

/** More of them in a nightly run: RUNS. */
const runs = Number(process.env.RUNS ?? 20)
const editors = 8
const edits = 500

let database: Awaited<ReturnType<typeof freshDatabase>>
let server: Awaited<ReturnType<typeof startCollab>>
let groupId: number
let tokens: string[]

beforeAll(async () => {
  // The provider of each of eight clients listens for the end of the process.
  process.setMaxListeners(100)
  database = await freshDatabase()
  const made = await makePeople(database.db, Array<'contributor'>(editors).fill('contributor'))
  groupId = made.groupId
  server = await startCollab(database.db, {
    // Faster than people type, and reconnecting more often: only pace is changed, no rule.
    limits: changedLimits((limits) => {
      limits.rate.frames = { perSecond: 100_000, burst: 100_000 }
      limits.rate.bytes = { perSecond: 1e9, burst: 1e9 }
      limits.handshake.perSecond = 10_000
      // So that several compactions fall into each run.
      limits.compaction.rows = 300
    }),
  })
  tokens = made.ids.map((id) => server.signIn(id))
})
afterAll(async () => {
  await server.close()
  await database.close()
})

const state = (doc: Y.Doc) => Buffer.from(Y.encodeStateAsUpdate(doc)).toString('base64')

/**
 * The state of a fresh document that was given this one's. Documents that hold the same may cut their stretches of text
 * in different places until they are loaded afresh.
 */
function pureState(doc: Y.Doc): string {
  const fresh = new Y.Doc()
  Y.applyUpdate(fresh, Y.encodeStateAsUpdate(doc))
  return state(fresh)
}

describe(`${editors} editors, ${edits} edits each, over lines that are slow and get cut,`, () => {
  const seed = newSeed()
  test.each(Array.from({ length: runs }, (_, i) => seed + i))(
    'all have what the database has (seed %i)',
    async (runSeed) => {
      console.info(`random editors: SEED=${runSeed}`)
      const random = randomFrom(runSeed)
      const pageId = await makePage(database.db, groupId)
      const people = await Promise.all(
        tokens.map(async (token) => {
          const proxy = await startProxy(server.port, random, 8)
          const url = `ws://127.0.0.1:${proxy.port}/collab`
          return { proxy, connection: openDraft(url, pageId, token, { random }) }
        }),
      )
      await until(() => people.every(({ connection }) => connection.getState().synced), 'all are in')

      let left = edits * editors
      const undone = people.map(() => edits)
      while (left > 0) {
        const who = Math.floor(random() * editors)
        const burst = Math.min(undone[who] ?? 0, 1 + Math.floor(random() * 25))
        const person = people[who]
        if (!person || burst === 0) continue
        for (let i = 0; i < burst; i++) editSomething(person.connection.doc, random)
        undone[who] = (undone[who] ?? 0) - burst
        left -= burst
        const dice = random()
        if (dice < 0.04) person.proxy.cut()
        else if (dice < 0.06) person.proxy.setFrozen(true)
        else if (dice < 0.12) for (const { proxy } of people) proxy.setFrozen(false)
        if (random() < 0.3) await new Promise((resolve) => setTimeout(resolve, random() * 4))
      }
      for (const { proxy } of people) proxy.setFrozen(false)

      const quiet = () => people.every(({ connection }) => connection.getState().phase === 'saved')
      const same = () => new Set(people.map(({ connection }) => JSON.stringify(readDraft(connection.doc)))).size === 1
      const now = () => people.map(({ connection }) => JSON.stringify(connection.getState())).join('\n')
      await until(() => quiet() && same(), now, 60_000)

      const loaded = await loadDocument(database.db, pageId, 1)
      const [first] = people
      if (!first) throw new Error('nobody')
      expect(readDraft(loaded)).toEqual(readDraft(first.connection.doc))
      for (const { connection } of people) expect(pureState(connection.doc) === pureState(loaded)).toBe(true)
      expect(server.errors).toEqual([])
      for (const { connection, proxy } of people) {
        connection.close()
        await proxy.close()
      }
    },
  )
})
