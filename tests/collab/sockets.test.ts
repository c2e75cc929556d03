import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import * as Y from 'yjs'
import { collabLimits } from '#collab/limits.ts'
import { loadDraft } from '#collab/persistence.ts'
import { pageSnapshots, pages, pageUpdates } from '#drizzle/schema/index.ts'
import { closeCodes } from '#shared/ydoc/rooms.ts'
import { equationsOf, parametersOf, settingsOf } from '#shared/ydoc/shape.ts'
import { committed, makePage, makePeople, smallDraft } from '#tests/support/collab-pages.ts'
import { changedLimits, openDraft, saved, startCollab, until } from '#tests/support/collab-server.ts'
import { freshDatabase } from '#tests/support/database.ts'
import { RawSocket, syncFrame } from '#tests/support/raw-socket.ts'

let database: Awaited<ReturnType<typeof freshDatabase>>
let groupId: number
let ids: number[]

beforeAll(async () => {
  process.setMaxListeners(100)
  database = await freshDatabase()
  const made = await makePeople(database.db, ['contributor', 'maintainer', 'reader'])
  groupId = made.groupId
  ids = made.ids
})
afterAll(() => database.close())

/** A server with its own limits for one test, a page, and tokens for contributor, maintainer and reader. */
async function setUp(change: Parameters<typeof changedLimits>[0] = () => undefined) {
  const server = await startCollab(database.db, { limits: changedLimits(change) })
  const pageId = await makePage(database.db, groupId)
  const [contributor = '', maintainer = '', reader = ''] = ids.map((id) => server.signIn(id))
  return { server, pageId, room: `${server.url}/${pageId}`, contributor, maintainer, reader }
}

/** One more edit of the document a raw socket has. */
function edit(doc: Y.Doc, text: string): Uint8Array {
  const before = Y.encodeStateVector(doc)
  equationsOf(doc).insert(0, text)
  return Y.encodeStateAsUpdate(doc, before)
}

describe('the handshake', () => {
  test('is refused from a foreign page, and without an origin', async () => {
    const { server, room, contributor } = await setUp()
    for (const origin of ['http://foreign.example', null]) {
      const raw = new RawSocket(room, { token: contributor, origin })
      await until(() => raw.refused !== null, 'refused')
      expect(raw.refused).toBe(403)
    }
    await server.close()
  })

  test('of another address is answered, and does not hang', async () => {
    const { server, contributor } = await setUp()
    const base = `ws://127.0.0.1:${server.port}`
    for (const path of [
      '/',
      '/collab',
      '/collab/',
      '/collab/0',
      '/collab/x',
      '/collab/1/2',
      '/collab/-1',
      '//',
      '/%',
    ]) {
      const raw = new RawSocket(`${base}${path}`, { token: contributor })
      await until(() => raw.refused !== null, path)
      expect(raw.refused).toBe(404)
    }
    await server.close()
  })

  test('is put off where more come in a second than are taken', async () => {
    const { server, room, contributor } = await setUp((limits) => {
      limits.handshake.perSecond = 1
    })
    const all = Array.from({ length: 8 }, () => new RawSocket(room, { token: contributor }))
    await until(() => all.every((raw) => raw.refused !== null || raw.of('room').length > 0), 'all answered')
    const refused = all.filter((raw) => raw.refused !== null)
    // One at once and one a second: all eight would pass only if opening them took seven seconds.
    expect(refused.length).toBeGreaterThanOrEqual(1)
    expect(refused.length).toBeLessThan(8)
    expect(new Set(refused.map((raw) => `${raw.refused} ${raw.retryAfter}`))).toEqual(new Set(['503 1']))
    await server.close()
  })

  test('counts the sockets of a person in a room, of a person, and of all', async () => {
    const { server, room, contributor, maintainer } = await setUp((limits) => {
      limits.sockets = { perPersonAndRoom: 2, perPerson: 3, total: 5 }
    })
    const other = `${server.url}/${await makePage(database.db, groupId)}`
    const code = async (url: string, token: string) => {
      const raw = await RawSocket.join(url, token)
      return raw.refused ?? raw.closed?.code ?? 'in'
    }
    expect([await code(room, contributor), await code(room, contributor)]).toEqual(['in', 'in'])
    expect(await code(room, contributor)).toBe(closeCodes.tooMany)
    expect(await code(other, contributor)).toBe('in')
    expect(await code(other, contributor)).toBe(closeCodes.tooMany)
    expect([await code(room, maintainer), await code(room, maintainer)]).toEqual(['in', 'in'])
    // Five sockets are open: the house is full before anybody is asked who they are.
    await until(() => server.collab.stats().sockets === 5, 'closed ones are gone')
    expect(await code(other, maintainer)).toBe(503)
    await server.close()
  })

  test('the product’s limits are those that were decided', () => {
    expect(collabLimits.sockets).toEqual({ perPersonAndRoom: 5, perPerson: 20, total: 2000 })
    expect(collabLimits.socket).toMatchObject({ payload: 262_144, fragments: 64, unsent: 4_194_304 })
    expect(collabLimits.rate.frames).toEqual({ perSecond: 60, burst: 200 })
    expect(collabLimits.rate.bytes.perSecond).toBe(65_536)
    expect(collabLimits.document).toMatchObject({ text: 65_536, state: 2_097_152 })
    expect(collabLimits.presence).toEqual({ state: 1024, perSecond: 10 })
    expect(collabLimits.append).toMatchObject({ wait: 20, rows: 64 })
    expect(collabLimits.compaction).toEqual({ rows: 500, bytes: 262_144 })
    expect(collabLimits.handshake.perSecond).toBe(50)
    expect([collabLimits.room.idle, collabLimits.recheck.every, collabLimits.strikes]).toEqual([60_000, 30_000, 3])
  })
})

describe('frames', () => {
  test('that cannot be read close the socket at the third, and nobody else’s', async () => {
    const { server, room, contributor, maintainer } = await setUp()
    const good = await RawSocket.join(room, maintainer)
    const bad = await RawSocket.join(room, contributor)
    bad.send('text')
    bad.send(Uint8Array.of(9, 9, 9))
    await bad.synced()
    expect(bad.closed).toBeNull()
    bad.sendSync(1, Uint8Array.of(255))
    expect(await bad.closes()).toBe(closeCodes.badFrame)
    const doc = await good.synced()
    good.sendSync(2, edit(doc, 'still here '))
    await until(() => good.saved === 2, 'the other goes on')
    await server.close()
  })

  test('larger than the limit close the socket with 1009', async () => {
    const { server, room, contributor } = await setUp()
    const raw = await RawSocket.join(room, contributor)
    raw.send(new Uint8Array(collabLimits.socket.payload + 1))
    expect(await raw.closes()).toBe(1009)
    await server.close()
  })

  test('in more fragments than the limit close the socket', async () => {
    const { server, room, contributor } = await setUp()
    const raw = await RawSocket.join(room, contributor)
    for (let i = 0; i < collabLimits.socket.fragments; i++) raw.socket.send(Uint8Array.of(0), { fin: false })
    raw.socket.send(Uint8Array.of(0), { fin: true })
    expect(await raw.closes()).toBe(1008)
    await server.close()
  })

  test('sent before the page was looked up are handled, in their order', async () => {
    const { server, room, contributor } = await setUp()
    const raw = new RawSocket(room, { token: contributor })
    await new Promise((resolve) => raw.socket.once('open', resolve))
    const doc = new Y.Doc()
    raw.sendSync(0, Y.encodeStateVector(doc))
    raw.sendSync(1, Y.encodeStateAsUpdate(doc))
    raw.sendSync(2, edit(doc, 'early '))
    await until(() => raw.saved === 2, 'saved')
    expect(raw.heard.map(({ kind }) => kind).slice(0, 3)).toEqual(['room', 'step-1', 'saved'])
    expect((await committed(database.db, Number(room.split('/').at(-1)))).equations).toContain('early ')
    await server.close()
  })

  test('over the rate are handled later, none is lost', async () => {
    const { server, room, contributor } = await setUp((limits) => {
      limits.rate.frames = { perSecond: 200, burst: 50 }
    })
    const raw = await RawSocket.join(room, contributor)
    const doc = await raw.synced()
    const begun = Date.now()
    for (let i = 0; i < 150; i++) raw.sendSync(2, edit(doc, 'x'))
    await until(
      () => raw.saved === 151,
      () => `${raw.saved} saved`,
    )
    // 151 frames and the state: more than 100 beyond the burst at 200 a second. A bucket cannot be faster.
    expect(Date.now() - begun).toBeGreaterThan(400)
    expect(raw.closed).toBeNull()
    await server.close()
  })

  test('without end close the socket', async () => {
    const { server, room, contributor } = await setUp((limits) => {
      limits.rate.waitingFrames = 100
      limits.rate.frames = { perSecond: 1, burst: 10 }
    })
    const raw = await RawSocket.join(room, contributor)
    const empty = syncFrame(0, Uint8Array.of(0))
    for (let i = 0; i < 500; i++) raw.send(empty)
    expect(await raw.closes()).toBe(closeCodes.tooMany)
    await server.close()
  })

  test('a reader who takes nothing in is cut, and keeps nobody waiting', async () => {
    const { server, room, contributor, maintainer } = await setUp((limits) => {
      limits.socket.unsent = 200_000
      limits.rate.bytes = { perSecond: 1e9, burst: 1e9 }
      limits.rate.frames = { perSecond: 1e6, burst: 1e6 }
    })
    const slow = await RawSocket.join(room, maintainer)
    await slow.synced()
    slow.socket.pause()
    const writer = await RawSocket.join(room, contributor)
    const doc = await writer.synced()
    const note = (i: number) => {
      const before = Y.encodeStateVector(doc)
      settingsOf(doc).set('notes', String(i).padEnd(19_000, 'n'))
      return Y.encodeStateAsUpdate(doc, before)
    }
    // Until what the kernel holds for the paused socket is full, and then the limit of what the server holds.
    for (let i = 0; i < 3000 && server.collab.stats().sockets === 2; i++) {
      writer.sendSync(2, note(i))
      if (i % 20 === 19) await until(() => writer.saved >= i, 'saved')
    }
    await until(() => server.collab.stats().sockets === 1, 'the slow one is cut')
    expect(writer.closed).toBeNull()
    slow.end()
    await server.close()
  })
})

describe('presence', () => {
  test('bears the session’s name and role, whatever the browser says', async () => {
    const { server, room, contributor, reader } = await setUp()
    const watching = await RawSocket.join(room, reader)
    const raw = await RawSocket.join(room, contributor)
    raw.sendPresence([{ clientId: 5, clock: 1, state: { user: { name: 'Somebody else', id: 1 }, cursor: { a: 1 } } }])
    await until(() => watching.of('presence').length > 0, 'presence')
    expect(watching.of('presence')[0]?.states).toMatchObject([
      { clientId: 5, state: { user: { id: ids[0], name: 'Person 0', role: 'contributor' }, cursor: { a: 1 } } },
    ])
    await server.close()
  })

  test('of another socket cannot be written, moved or ended', async () => {
    const { server, room, contributor, maintainer, reader } = await setUp()
    const watching = await RawSocket.join(room, reader)
    const honest = await RawSocket.join(room, contributor)
    honest.sendPresence([{ clientId: 5, clock: 1, state: { cursor: 'mine' } }])
    await until(() => watching.of('presence').length === 1, 'presence')
    const spoofer = await RawSocket.join(room, maintainer)
    spoofer.sendPresence([{ clientId: 6, clock: 1, state: {} }])
    await until(() => watching.of('presence').length === 2, 'the second')
    spoofer.sendPresence([{ clientId: 5, clock: 99, state: { cursor: 'moved' } }])
    spoofer.sendPresence([{ clientId: 5, clock: 100, state: null }])
    spoofer.sendPresence([{ clientId: 6, clock: 2, state: { last: true } }])
    await until(() => watching.of('presence').length === 3, 'the third')
    const about5 = watching.of('presence').flatMap(({ states }) => states.filter(({ clientId }) => clientId === 5))
    expect(about5).toMatchObject([{ state: { cursor: 'mine', user: { name: 'Person 0' } } }])

    // Claiming it at once, before naming an id of one's own, is refused too.
    const second = await RawSocket.join(room, maintainer)
    for (let i = 0; i < 3; i++) second.sendPresence([{ clientId: 5, clock: 200 + i, state: {} }])
    expect(await second.closes()).toBe(closeCodes.badFrame)
    await server.close()
  })

  test('ends when the socket ends, and is told to whoever comes later', async () => {
    const { server, room, contributor, maintainer, reader } = await setUp()
    const raw = await RawSocket.join(room, contributor)
    raw.sendPresence([{ clientId: 5, clock: 1, state: { n: 1 } }])
    await raw.synced()
    const later = await RawSocket.join(room, reader)
    await until(() => later.of('presence').length === 1, 'told on joining')
    const clock = later.of('presence')[0]?.states[0]?.clock ?? 0
    raw.end()
    await until(() => later.of('presence').length === 2, 'gone')
    const [gone] = later.of('presence')[1]?.states ?? []
    expect(gone).toMatchObject({ clientId: 5, state: null })
    expect(gone?.clock).toBeGreaterThan(clock)
    // The same tab comes back with its old clock and is seen again.
    const again = await RawSocket.join(room, contributor)
    again.sendPresence([{ clientId: 5, clock: 1, state: { n: 1 } }])
    await until(() => later.of('presence').length === 3, 'back')
    expect(later.of('presence')[2]?.states[0]?.clock).toBeGreaterThan(gone?.clock ?? 0)
    const latest = await RawSocket.join(room, maintainer)
    await until(() => latest.of('presence').length === 1, 'told on joining')
    await server.close()
  })

  test('larger than a kilobyte, or no object, is a bad frame', async () => {
    const { server, room, contributor } = await setUp()
    for (const state of [{ big: 'x'.repeat(collabLimits.presence.state) }, '"text"', '{', '{"__proto__":{"a":1}}']) {
      const raw = await RawSocket.join(room, contributor)
      for (let i = 0; i < 3; i++) raw.sendPresence([{ clientId: 9, clock: i + 1, state }])
      expect(await raw.closes()).toBe(closeCodes.badFrame)
    }
    await server.close()
  })

  test('is passed on ten times a second at most, the newest of it', async () => {
    const { server, room, contributor, reader } = await setUp()
    const watching = await RawSocket.join(room, reader)
    const raw = await RawSocket.join(room, contributor)
    const begun = Date.now()
    for (let i = 1; i <= 60; i++) {
      raw.sendPresence([{ clientId: 5, clock: i, state: { i } }])
      await new Promise((resolve) => setTimeout(resolve, 5))
    }
    await until(() => JSON.stringify(watching.of('presence').at(-1)).includes('"i":60'), 'the newest')
    const most = Math.ceil((Date.now() - begun) / (1000 / collabLimits.presence.perSecond)) + 1
    expect(watching.of('presence').length).toBeLessThanOrEqual(most)
    await server.close()
  })
})

describe('limits of the document', () => {
  test('text over the limit is not taken, the rest is kept back, and taking text away lets everything in', async () => {
    const { server, pageId, contributor, maintainer } = await setUp((limits) => {
      limits.document.text = 200
      limits.room.askAgain = 20
    })
    const writer = openDraft(server.url, pageId, contributor)
    const other = openDraft(server.url, pageId, maintainer)
    await Promise.all([saved(writer), saved(other)])
    equationsOf(writer.doc).insert(0, 'a'.repeat(300))
    await until(() => writer.getState().room === 'full', 'told that it is full')
    expect(writer.getState()).toMatchObject({ phase: 'saving', unsaved: 1 })
    expect((await committed(database.db, pageId)).equations).toBe(smallDraft.equations)
    // Others may go on meanwhile.
    settingsOf(other.doc).set('title', 'other')
    await saved(other)
    equationsOf(writer.doc).delete(0, 290)
    await saved(writer)
    expect(writer.getState()).toMatchObject({ room: 'live', unsaved: 0 })
    await until(() => equationsOf(other.doc).toString().startsWith('a'.repeat(10)), 'the rest arrives')
    expect((await committed(database.db, pageId)).equations).toBe(`${'a'.repeat(10)}${smallDraft.equations}`)
    writer.close()
    other.close()
    await server.close()
  })

  test('a document that has become too large takes no more edits, and says so to all', async () => {
    const { server, pageId, contributor, maintainer } = await setUp((limits) => {
      limits.document.state = 20_000
      limits.document.stateMargin = 2000
    })
    const writer = openDraft(server.url, pageId, contributor)
    const other = openDraft(server.url, pageId, maintainer)
    await Promise.all([saved(writer), saved(other)])
    for (let i = 0; i < 30; i++) {
      const row = new Y.Map<string>()
      row.set('meaning', 'm'.repeat(900))
      parametersOf(writer.doc).set(`row${i}`, row)
    }
    await until(() => other.getState().room === 'no-room' && writer.getState().room === 'no-room', 'both are told')
    const draft = await loadDraft(database.db, pageId, 1)
    expect(Y.encodeStateAsUpdate(draft.doc).byteLength).toBeLessThanOrEqual(18_000)
    // Taking away is a step as well, so it is not taken either, and it is not said to help.
    const unsaved = other.getState().unsaved
    parametersOf(other.doc).delete('p1')
    await new Promise((resolve) => setTimeout(resolve, 300))
    expect(other.getState()).toMatchObject({ room: 'no-room', phase: 'saving', unsaved: unsaved + 1 })
    expect((await committed(database.db, pageId)).parameters.map(({ id }) => id)).toContain('p1')
    writer.close()
    other.close()
    await server.close()
  })

  test('edits that depend on what the server never saw end the socket, and leave nothing behind', async () => {
    const { server, pageId, room, contributor, maintainer } = await setUp()
    const raw = await RawSocket.join(room, contributor)
    const doc = await raw.synced()
    edit(doc, 'never sent ')
    raw.sendSync(2, edit(doc, 'depends on it '))
    expect(await raw.closes()).toBe(closeCodes.orphaned)
    const rows = await database.db.select().from(pageUpdates).where(eq(pageUpdates.pageId, pageId))
    expect(rows).toEqual([])
    const next = await RawSocket.join(room, maintainer)
    expect(equationsOf(await next.synced()).toString()).toBe(smallDraft.equations)
    await server.close()
  })
})

describe('a room', () => {
  test('that cannot be loaded says so, writes nothing over, and loads once it can be read again', async () => {
    const { server, pageId, room, contributor } = await setUp((limits) => {
      limits.room.loadPause = 100
    })
    const good = await database.db.select().from(pageSnapshots).where(eq(pageSnapshots.pageId, pageId))
    await database.db
      .update(pageSnapshots)
      .set({ data: Uint8Array.of(1, 2, 3) })
      .where(eq(pageSnapshots.pageId, pageId))
    for (let i = 0; i < 3; i++) {
      const raw = await RawSocket.join(room, contributor)
      expect(await raw.closes()).toBe(closeCodes.loadFailed)
      expect(raw.closed?.reason).toMatch(/Nothing is lost/)
      expect(raw.heard).toEqual([])
    }
    expect(server.errors[0]?.message).toBe('collab: damaged draft')
    const kept = await database.db.select().from(pageSnapshots).where(eq(pageSnapshots.pageId, pageId))
    expect(kept.map(({ data }) => [...data])).toEqual([[1, 2, 3]])
    const [page] = await database.db.select().from(pages).where(eq(pages.id, pageId))
    expect(page?.ownerEpoch).toBe(0)

    await database.db
      .update(pageSnapshots)
      .set({ data: good[0]?.data ?? Uint8Array.of() })
      .where(eq(pageSnapshots.pageId, pageId))
    const client = openDraft(server.url, pageId, contributor)
    await saved(client)
    expect(equationsOf(client.doc).toString()).toBe(smallDraft.equations)
    client.close()
    await server.close()
  })

  test('is forgotten when it stood empty for a while, and is the same afterwards', async () => {
    const { server, pageId, contributor } = await setUp((limits) => {
      limits.room.idle = 50
    })
    const first = openDraft(server.url, pageId, contributor)
    await saved(first)
    equationsOf(first.doc).insert(0, 'kept ')
    await saved(first)
    first.close()
    await until(() => server.collab.stats().rooms === 0, 'forgotten')
    const second = openDraft(server.url, pageId, contributor)
    await saved(second)
    expect(equationsOf(second.doc).toString()).toBe(`kept ${smallDraft.equations}`)
    second.close()
    await server.close()
  })

  test('that is left and entered again and again at the moment it is forgotten loses nothing', async () => {
    const { server, pageId, contributor } = await setUp((limits) => {
      limits.room.idle = 1
      limits.handshake.perSecond = 1000
    })
    let expected = smallDraft.equations
    for (let i = 0; i < 25; i++) {
      const client = openDraft(server.url, pageId, contributor)
      await saved(client)
      expect(equationsOf(client.doc).toString()).toBe(expected)
      equationsOf(client.doc).insert(0, `${i};`)
      expected = `${i};${expected}`
      await saved(client)
      client.close()
      if (i % 3 === 0) await new Promise((resolve) => setTimeout(resolve, i % 5))
    }
    expect((await committed(database.db, pageId)).equations).toBe(expected)
    expect(server.errors).toEqual([])
    await server.close()
  })

  test('writes its log together when it is long', async () => {
    const { server, pageId, contributor } = await setUp((limits) => {
      limits.compaction.rows = 20
      limits.append.wait = 1
    })
    const client = openDraft(server.url, pageId, contributor)
    await saved(client)
    for (let i = 0; i < 50; i++) {
      equationsOf(client.doc).insert(0, 'x')
      if (i % 5 === 0) await saved(client)
    }
    await saved(client)
    const rowsLeft = async () => (await loadDraft(database.db, pageId, 1)).rows
    await until(async () => (await rowsLeft()) < 20, 'compacted')
    expect((await committed(database.db, pageId)).equations).toBe(`${'x'.repeat(50)}${smallDraft.equations}`)
    expect(server.errors).toEqual([])
    client.close()
    await server.close()
  })

  test('tells a silent socket something regularly, so that browsers do not give it up', async () => {
    const { server, room, contributor } = await setUp((limits) => {
      limits.socket.heartbeat = 50
    })
    const raw = await RawSocket.join(room, contributor)
    await until(() => raw.of('saved').length >= 4, 'message 100 again and again')
    await server.close()
  })
})
