import { and, eq, sql } from 'drizzle-orm'
import { afterAll, afterEach, beforeAll, describe, expect, test } from 'vitest'
import { createDraft } from '#collab/persistence.ts'
import { draftWriters, memberships, pages, pageUpdates, people } from '#drizzle/schema/index.ts'
import { closeCodes, closeReasons } from '#shared/ydoc/rooms.ts'
import { equationsOf, parametersOf, settingsOf } from '#shared/ydoc/shape.ts'
import { attachToWindow, type DraftConnection } from '#src/features/editor/draft-connection.ts'
import { committed, makePage, makePeople, makeRevision, smallDraft } from '#tests/support/collab-pages.ts'
import {
  type CollabServerForTests,
  changedLimits,
  openDraft,
  saved,
  socketOf,
  startCollab,
  until,
} from '#tests/support/collab-server.ts'
import { startProxy } from '#tests/support/cut-proxy.ts'
import { freshDatabase } from '#tests/support/database.ts'
import { RawSocket } from '#tests/support/raw-socket.ts'

let database: Awaited<ReturnType<typeof freshDatabase>>
const servers: CollabServerForTests[] = []
const opened: DraftConnection[] = []
const now = new Date('2026-12-01T10:00:00.000Z')

beforeAll(async () => {
  process.setMaxListeners(100)
  database = await freshDatabase()
})
afterEach(async () => {
  for (const connection of opened.splice(0)) connection.close()
  for (const server of servers.splice(0)) await server.close()
})
afterAll(() => database.close())

async function start(change: Parameters<typeof changedLimits>[0] = () => undefined, options = {}) {
  const server = await startCollab(database.db, { limits: changedLimits(change), ...options })
  servers.push(server)
  return server
}

/** A page with a contributor and a maintainer, both signed in. */
async function setUp(change?: Parameters<typeof changedLimits>[0], options = {}) {
  const server = await start(change, options)
  const { groupId, ids } = await makePeople(database.db, ['contributor', 'maintainer'])
  const [anna = 0, boris = 0] = ids
  const pageId = await makePage(database.db, groupId)
  const tokens = { anna: server.signIn(anna), boris: server.signIn(boris) }
  return { server, groupId, anna, boris, pageId, tokens }
}

function open(server: { url: string }, pageId: number, token: string): DraftConnection {
  const connection = openDraft(server.url, pageId, token)
  opened.push(connection)
  return connection
}

const setPage = (pageId: number, set: Partial<typeof pages.$inferInsert>) =>
  database.db.update(pages).set(set).where(eq(pages.id, pageId))
const textOf = (connection: DraftConnection) => equationsOf(connection.doc).toString()
const refusedWith = (connection: DraftConnection, code: number) =>
  until(
    () => connection.getState().phase === 'refused' && connection.getState().closed?.code === code,
    () => JSON.stringify(connection.getState()),
  )
const roomIs = (connection: DraftConnection, room: string) =>
  until(
    () => connection.getState().room === room,
    () => `${room}: ${JSON.stringify(connection.getState())}`,
  )

describe('while a review is under way', () => {
  test('nobody writes; what was typed all the same waits in the tab and goes in when the draft is open again', async () => {
    const { server, pageId, tokens } = await setUp()
    const [left, right] = [open(server, pageId, tokens.anna), open(server, pageId, tokens.boris)]
    await Promise.all([saved(left), saved(right)])
    await setPage(pageId, { inReviewId: await makeRevision(database.db, pageId) })
    server.tell({ kind: 'page-changed', pageId })
    await Promise.all([roomIs(left, 'locked'), roomIs(right, 'locked')])
    equationsOf(left.doc).insert(0, 'typed during the review\n')
    await new Promise((resolve) => setTimeout(resolve, 100))
    expect(left.getState()).toMatchObject({ phase: 'saving', unsaved: 1 })
    expect(textOf(right)).toBe(smallDraft.equations)
    expect((await committed(database.db, pageId)).equations).toBe(smallDraft.equations)

    await setPage(pageId, { inReviewId: null })
    server.tell({ kind: 'page-changed', pageId })
    await saved(left)
    await until(() => textOf(right).startsWith('typed during'), 'the other has it')
    expect((await committed(database.db, pageId)).equations).toBe(`typed during the review\n${smallDraft.equations}`)
  })

  test('the database itself refuses an edit that was on its way when it began', async () => {
    const { server, pageId, tokens } = await setUp()
    const client = open(server, pageId, tokens.anna)
    await saved(client)
    // No event: the edit is applied and shown before the append finds the review.
    await setPage(pageId, { inReviewId: await makeRevision(database.db, pageId) })
    equationsOf(client.doc).insert(0, 'too late\n')
    await roomIs(client, 'locked')
    await until(() => client.getState().phase === 'saving', 'joined again')
    expect((await committed(database.db, pageId)).equations).toBe(smallDraft.equations)
    const fresh = open(server, pageId, tokens.boris)
    await until(() => fresh.getState().synced, 'another joins')
    expect(textOf(fresh)).toBe(smallDraft.equations)
    await setPage(pageId, { inReviewId: null })
    server.tell({ kind: 'page-changed', pageId })
    await saved(client)
    expect((await committed(database.db, pageId)).equations).toBe(`too late\n${smallDraft.equations}`)
  })
})

describe('a new generation of the draft', () => {
  async function begin(pageId: number) {
    await database.db.transaction(async (tx) => {
      await tx.update(pages).set({ generation: 2 }).where(eq(pages.id, pageId))
      await createDraft(tx, pageId, 2, { ...smallDraft, equations: 'the second generation' }, now)
    })
  }

  test('closes the sockets of the old one, for good', async () => {
    const { server, pageId, tokens } = await setUp()
    const client = open(server, pageId, tokens.anna)
    await saved(client)
    await begin(pageId)
    server.tell({ kind: 'page-changed', pageId })
    await refusedWith(client, closeCodes.generationClosed)
    expect(client.getState().closed?.text).toBe(closeReasons[closeCodes.generationClosed])
    const next = open(server, pageId, tokens.anna)
    await saved(next)
    expect(textOf(next)).toBe('the second generation')
    expect(next.getState().generation).toBe(2)
  })

  test('refuses an edit of the old one in the append itself', async () => {
    const { server, pageId, tokens } = await setUp()
    const client = open(server, pageId, tokens.anna)
    await saved(client)
    await begin(pageId)
    equationsOf(client.doc).insert(0, 'for the old one\n')
    await refusedWith(client, closeCodes.generationClosed)
    expect(client.unsavedEdits().lines).toEqual(['for the old one'])
    expect((await committed(database.db, pageId, 1)).equations).toBe(smallDraft.equations)
    expect((await committed(database.db, pageId, 2)).equations).toBe('the second generation')
  })

  test('never mixes with what was typed offline: that is kept and offered line by line', async () => {
    const { server, pageId, tokens } = await setUp()
    const proxy = await startProxy(server.port, Math.random)
    const client = open({ url: `ws://127.0.0.1:${proxy.port}/collab` }, pageId, tokens.anna)
    await saved(client)
    equationsOf(client.doc).insert(0, '# saved\n')
    await saved(client)
    proxy.setFrozen(true)
    equationsOf(client.doc).insert(0, 'q = x*y\n')
    equationsOf(client.doc).insert(textOf(client).length, '# offline\n')
    parametersOf(client.doc).get('p1')?.set('value', '0.25')
    settingsOf(client.doc).set('notes', 'noted offline')
    await begin(pageId)
    proxy.cut()
    await until(() => client.getState().phase === 'offline', 'offline')
    expect(client.getState().unsaved).toBe(4)
    proxy.setFrozen(false)
    await refusedWith(client, closeCodes.generationClosed)
    expect(client.unsavedEdits()).toEqual({
      lines: ['q = x*y', '# offline'],
      cells: [
        { table: 'parameters', row: 'mu', cell: 'value', value: '0.25' },
        { table: 'settings', row: '', cell: 'notes', value: 'noted offline' },
      ],
    })
    expect((await committed(database.db, pageId, 2)).equations).toBe('the second generation')
    await proxy.close()
  })
})

describe('a change of who may do what', () => {
  test('sign-out closes that session’s sockets, and no other’s', async () => {
    const { server, pageId, anna, tokens } = await setUp()
    const second = server.signIn(anna, 'second-session')
    const [one, two] = [open(server, pageId, tokens.anna), open(server, pageId, second)]
    await Promise.all([saved(one), saved(two)])
    server.signOut(tokens.anna)
    server.tell({ kind: 'session-ended', sessionHash: tokens.anna })
    await refusedWith(one, closeCodes.notSignedIn)
    equationsOf(two.doc).insert(0, 'goes on ')
    await saved(two)
    // Signed in again, the same tab goes on with what it has.
    equationsOf(one.doc).insert(0, 'typed meanwhile ')
    server.signIn(anna, tokens.anna)
    one.retryNow()
    await saved(one)
    expect((await committed(database.db, pageId)).equations).toContain('typed meanwhile ')
  })

  test.each([
    ['disabled', { disabled: true }],
    ['signed out everywhere', { epoch: 2 }],
  ])('a person who is %s is out', async (_, change) => {
    const { server, pageId, anna, tokens } = await setUp()
    const client = open(server, pageId, tokens.anna)
    await saved(client)
    await database.db.update(people).set(change).where(eq(people.id, anna))
    server.tell({ kind: 'person-changed', personId: anna })
    await refusedWith(client, closeCodes.notSignedIn)
  })

  test('is noticed without any event, by looking again', async () => {
    const { server, pageId, tokens } = await setUp((limits) => {
      limits.recheck.every = 100
    })
    const client = open(server, pageId, tokens.anna)
    await saved(client)
    server.signOut(tokens.anna)
    await refusedWith(client, closeCodes.notSignedIn)
  })

  test('a contributor made reader may not write any more; made contributor again, what was typed goes in', async () => {
    const { server, pageId, groupId, anna, tokens } = await setUp()
    const client = open(server, pageId, tokens.anna)
    await saved(client)
    const become = async (role: 'reader' | 'contributor') => {
      await database.db
        .update(memberships)
        .set({ role })
        .where(and(eq(memberships.groupId, groupId), eq(memberships.personId, anna)))
      server.tell({ kind: 'person-changed', personId: anna })
    }
    await become('reader')
    await roomIs(client, 'read-only')
    equationsOf(client.doc).insert(0, 'as a reader ')
    await new Promise((resolve) => setTimeout(resolve, 50))
    expect((await committed(database.db, pageId)).equations).toBe(smallDraft.equations)
    await become('contributor')
    await roomIs(client, 'live')
    await saved(client)
    expect((await committed(database.db, pageId)).equations).toBe(`as a reader ${smallDraft.equations}`)
  })

  test('who leaves the group is out, and so is everybody when the page is removed', async () => {
    const { server, pageId, groupId, anna, tokens } = await setUp()
    const [left, right] = [open(server, pageId, tokens.anna), open(server, pageId, tokens.boris)]
    await Promise.all([saved(left), saved(right)])
    await database.db.delete(memberships).where(and(eq(memberships.groupId, groupId), eq(memberships.personId, anna)))
    server.tell({ kind: 'person-changed', personId: anna })
    await refusedWith(left, closeCodes.noSuchRoom)
    expect(right.getState().phase).toBe('saved')
    await setPage(pageId, { removedAt: now })
    server.tell({ kind: 'page-changed', pageId })
    await refusedWith(right, closeCodes.noSuchRoom)
  })
})

describe('two servers on one database', () => {
  test('never both write a page: the older owner is refused, and its browsers bring their edits again', async () => {
    const { server: first, pageId, anna, boris, tokens } = await setUp()
    const second = await start()
    second.signIn(anna, tokens.anna)
    second.signIn(boris, tokens.boris)
    const left = open(first, pageId, tokens.anna)
    await saved(left)
    const right = open(second, pageId, tokens.boris)
    await saved(right)
    // The second owns the page now. The first finds out when it wants to write.
    equationsOf(left.doc).insert(0, 'left\n')
    await saved(left)
    equationsOf(right.doc).insert(0, 'right\n')
    await saved(right)
    const { equations } = await committed(database.db, pageId)
    expect(
      equations
        .split('\n')
        .filter((line) => line === 'left' || line === 'right')
        .sort(),
    ).toEqual(['left', 'right'])
    const rows = await database.db.select().from(pageUpdates).where(eq(pageUpdates.pageId, pageId))
    const epochs = rows.map(({ ownerEpoch }) => ownerEpoch)
    // Owner epochs never go back in the order of the log.
    expect(epochs).toEqual([...epochs].sort((a, b) => a - b))
    expect(new Set(epochs).size).toBe(2)
  })
})

describe('when the database takes nothing', () => {
  test('edits are kept, everybody is told, and all is saved once it answers again', async () => {
    const { server, pageId, anna, boris, tokens } = await setUp((limits) => {
      limits.append.retries = [5, 5, 5]
      limits.append.retryEvery = 50
    })
    const [left, right] = [open(server, pageId, tokens.anna), open(server, pageId, tokens.boris)]
    await Promise.all([saved(left), saved(right)])
    await database.db.execute(sql`rename table page_updates to page_updates_away`)
    equationsOf(left.doc).insert(0, 'before it was known ')
    await Promise.all([roomIs(left, 'not-saving'), roomIs(right, 'not-saving')])
    settingsOf(right.doc).set('title', 'held back')
    await new Promise((resolve) => setTimeout(resolve, 100))
    expect([left.getState().unsaved, right.getState().unsaved]).toEqual([1, 1])
    expect(server.collab.stats()).toMatchObject({ notSaving: 1 })
    expect(server.collab.stats().unsavedAge).toBeGreaterThan(0)
    await database.db.execute(sql`rename table page_updates_away to page_updates`)
    await Promise.all([saved(left), saved(right)])
    expect([left.getState().room, right.getState().room]).toEqual(['live', 'live'])
    expect(server.collab.stats()).toMatchObject({ notSaving: 0, unsavedAge: 0 })
    const draft = await committed(database.db, pageId)
    expect(draft.equations).toBe(`before it was known ${smallDraft.equations}`)
    expect(draft.settings.title).toBe('held back')
    const writers = await database.db.select().from(draftWriters).where(eq(draftWriters.pageId, pageId))
    expect(writers.map(({ personId }) => personId).sort((a, b) => a - b)).toEqual([anna, boris])
  })
})

test('a database that hangs is noticed, and what waited for it is saved once', async () => {
  const { server, pageId, tokens } = await setUp((limits) => {
    limits.append.slow = 100
  })
  const client = open(server, pageId, tokens.anna)
  await saved(client)
  await database.db.transaction(async (tx) => {
    // Somebody else holds the page's row: the append waits for it.
    await tx.select({ id: pages.id }).from(pages).where(eq(pages.id, pageId)).for('update')
    equationsOf(client.doc).insert(0, 'waits ')
    await roomIs(client, 'not-saving')
    expect(client.getState()).toMatchObject({ phase: 'saving', unsaved: 1 })
  })
  await saved(client)
  expect(client.getState().room).toBe('live')
  const rows = await database.db.select().from(pageUpdates).where(eq(pageUpdates.pageId, pageId))
  expect(rows).toHaveLength(1)
  expect(server.errors).toEqual([])
})

describe('who only looks', () => {
  test('is no writer of the draft, also after coming back', async () => {
    const { server, pageId, anna, tokens } = await setUp()
    const proxy = await startProxy(server.port, Math.random)
    const looking = open({ url: `ws://127.0.0.1:${proxy.port}/collab` }, pageId, tokens.boris)
    const writing = open(server, pageId, tokens.anna)
    await Promise.all([saved(looking), saved(writing)])
    equationsOf(writing.doc).insert(0, 'x')
    equationsOf(writing.doc).delete(0, 1)
    await saved(writing)
    proxy.cut()
    await until(() => looking.getState().phase === 'offline', 'cut')
    await saved(looking)
    const writers = await database.db.select().from(draftWriters).where(eq(draftWriters.pageId, pageId))
    expect(writers.map(({ personId }) => personId)).toEqual([anna])
  })
})

describe('the browser’s side', () => {
  test('asks before a tab with unsaved edits is closed, and only then', async () => {
    const { server, pageId, tokens } = await setUp()
    const client = open(server, pageId, tokens.anna)
    await saved(client)
    // An EventTarget is all of a window that is used.
    const target = new EventTarget() as Window
    const detach = attachToWindow(client, target)
    const leaves = () => target.dispatchEvent(new Event('beforeunload', { cancelable: true }))
    expect(leaves()).toBe(true)
    equationsOf(client.doc).insert(0, 'unsaved')
    expect(leaves()).toBe(false)
    await saved(client)
    expect(leaves()).toBe(true)
    equationsOf(client.doc).insert(0, 'unsaved')
    detach()
    expect(leaves()).toBe(true)
  })

  test('does not come back by itself after a refusal', async () => {
    const { server, pageId, anna, tokens } = await setUp()
    let sockets = 0
    class Counted extends socketOf(tokens.anna) {
      constructor(url: string | URL, protocols?: string | string[]) {
        super(url, protocols)
        sockets++
      }
    }
    await database.db.delete(memberships).where(eq(memberships.personId, anna))
    const client = openDraft(server.url, pageId, tokens.anna, { WebSocketPolyfill: Counted })
    opened.push(client)
    await refusedWith(client, closeCodes.noSuchRoom)
    await new Promise((resolve) => setTimeout(resolve, 500))
    expect(sockets).toBe(1)
    expect(client.getState()).toMatchObject({ synced: false, closed: { code: 4404 } })
  })

  test('tells every change of its state once, as a new object', async () => {
    const { server, pageId, tokens } = await setUp()
    const seen: string[] = []
    const client = openDraft(server.url, pageId, tokens.anna, { onState: (state) => seen.push(state.phase) })
    opened.push(client)
    const before = client.getState()
    await saved(client)
    expect(client.getState()).not.toBe(before)
    equationsOf(client.doc).insert(0, 'x')
    await saved(client)
    const changes = seen.filter((phase, index) => phase !== seen[index - 1])
    expect(changes).toEqual(['connecting', 'saved', 'saving', 'saved'])
  })

  test('says nothing of others to the server', async () => {
    const { server, pageId, tokens } = await setUp()
    const client = open(server, pageId, tokens.anna)
    await saved(client)
    const raw = await RawSocket.join(`${server.url}/${pageId}`, tokens.boris)
    raw.sendPresence([{ clientId: 5, clock: 1, state: { n: 1 } }])
    await until(() => client.awareness.getStates().has(5), 'the client hears of it')
    const before = raw.of('presence').length
    client.awareness.setLocalStateField('cursor', 1)
    await until(() => raw.of('presence').length > before, 'the client speaks')
    const ids = raw.of('presence').flatMap(({ states }) => states.map(({ clientId }) => clientId))
    expect(new Set(ids)).toEqual(new Set([client.doc.clientID]))
  })
})

test('the server around is told of use and of committed edits', async () => {
  const noted: number[] = []
  const drafts: number[] = []
  const { server, pageId, anna, tokens } = await setUp(undefined, {
    noteActivity: async (person: { personId: number }) => {
      noted.push(person.personId)
    },
    draftSaved: (saved: number) => drafts.push(saved),
  })
  const client = open(server, pageId, tokens.anna)
  await saved(client)
  expect(noted).toEqual([])
  for (let i = 0; i < 5; i++) equationsOf(client.doc).insert(0, 'x')
  await saved(client)
  await until(() => drafts.length > 0, 'told')
  expect([noted, drafts]).toEqual([[anna], [pageId]])
})
