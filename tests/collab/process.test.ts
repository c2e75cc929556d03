import { afterAll, beforeAll, expect, test } from 'vitest'
import * as Y from 'yjs'
import { closeCodes } from '#shared/ydoc/rooms.ts'
import { equationsOf } from '#shared/ydoc/shape.ts'
import type { DraftConnection } from '#src/features/editor/draft-connection.ts'
import { type CollabChild, forkCollab } from '#tests/support/collab-child.ts'
import { committed, makePage, makePeople } from '#tests/support/collab-pages.ts'
import { openDraft, saved, until } from '#tests/support/collab-server.ts'
import { freshDatabase } from '#tests/support/database.ts'
import { newSeed, randomFrom } from '#tests/support/random.ts'
import { editSomething } from '#tests/support/random-edits.ts'
import { RawSocket, syncFrame } from '#tests/support/raw-socket.ts'

let database: Awaited<ReturnType<typeof freshDatabase>>
let groupId: number
let people: number[]

beforeAll(async () => {
  process.setMaxListeners(200)
  database = await freshDatabase()
  const made = await makePeople(database.db, Array<'contributor'>(10).fill('contributor'))
  groupId = made.groupId
  people = made.ids
})
afterAll(() => database.close())

const token = (index: number) => `session-of-${people[index]}`

/** Somebody who types one numbered line after another, and knows how many of them were acknowledged. */
function typist(connection: DraftConnection, name: string) {
  let typed = 0
  const codes: number[] = []
  connection.subscribe(() => {
    const { closed } = connection.getState()
    if (closed) codes.push(closed.code)
  })
  const line = (i: number) => `${name}.${i};`
  return {
    connection,
    /** How the line was closed, each time. */
    codes,
    type() {
      equationsOf(connection.doc).insert(0, line(typed))
      typed++
    },
    /** Edits are acknowledged in the order they were made. */
    acknowledged: () => Array.from({ length: typed - connection.getState().unsaved }, (_, i) => line(i)),
    all: () => Array.from({ length: typed }, (_, i) => line(i)),
  }
}
type Typist = ReturnType<typeof typist>

const missing = (lines: string[], text: string) => {
  const there = new Set(text.match(/\w+\.\d+;/g) ?? [])
  return lines.filter((line) => !there.has(line))
}

async function typeFor(typists: Typist[], milliseconds: number): Promise<void> {
  const end = Date.now() + milliseconds
  while (Date.now() < end) {
    for (const each of typists) each.type()
    await new Promise((resolve) => setTimeout(resolve, 8))
  }
}

/** Every typed line stands once in the committed draft. */
async function expectAll(typists: Typist[], pageId: number): Promise<void> {
  const { equations } = await committed(database.db, pageId)
  const lines = typists.flatMap((each) => each.all())
  expect(missing(lines, equations)).toEqual([])
  expect(equations.match(/\w+\.\d+;/g)?.length).toBe(lines.length)
}

test('kill -9 while two people type, ten times: nothing acknowledged is lost, nothing doubled, browsers come back', async () => {
  const settings = { databaseUrl: database.url, people }
  const pageId = await makePage(database.db, groupId)
  let server: CollabChild = await forkCollab(settings)
  const port = await server.listen(0)
  const url = `ws://127.0.0.1:${port}/collab`
  const typists = [typist(openDraft(url, pageId, token(0)), 'a'), typist(openDraft(url, pageId, token(1)), 'b')]
  await Promise.all(typists.map(({ connection }) => saved(connection)))
  const random = randomFrom(newSeed())
  for (let kill = 0; kill < 10; kill++) {
    const standby = forkCollab(settings)
    await typeFor(typists, 150 + random() * 150)
    expect((await server.kill('SIGKILL')).signal).toBe('SIGKILL')
    await until(() => typists.every(({ connection }) => connection.getState().phase === 'offline'), 'both notice')
    const acknowledged = typists.flatMap((each) => each.acknowledged())
    expect(acknowledged.length).toBeGreaterThan(kill * 2)
    expect(missing(acknowledged, (await committed(database.db, pageId)).equations)).toEqual([])
    for (const each of typists) each.type()
    server = await standby
    await server.listen(port)
    await Promise.all(typists.map(({ connection }) => saved(connection)))
  }
  await expectAll(typists, pageId)
  for (const { connection } of typists) connection.close()
  expect((await server.kill('SIGTERM')).code).toBe(0)
}, 300_000)

test('SIGTERM with fifty editors, ten times: all is written, acknowledged and closed with 1012, and goes on', async () => {
  const settings = { databaseUrl: database.url, people }
  const pageIds = await Promise.all(Array.from({ length: 5 }, () => makePage(database.db, groupId)))
  let server: CollabChild = await forkCollab(settings)
  const port = await server.listen(0)
  const url = `ws://127.0.0.1:${port}/collab`
  // Ten people, each in five pages.
  const rooms = pageIds.map((pageId, room) => ({
    pageId,
    typists: people.map((_, index) => typist(openDraft(url, pageId, token(index)), `r${room}p${index}`)),
  }))
  const typists = rooms.flatMap((room) => room.typists)
  expect(typists).toHaveLength(50)
  await Promise.all(typists.map(({ connection }) => saved(connection)))
  for (let stop = 0; stop < 10; stop++) {
    const standby = forkCollab(settings)
    const typing = typeFor(typists, 250)
    await new Promise((resolve) => setTimeout(resolve, 120))
    for (const { codes } of typists) codes.length = 0
    const ending = server.kill('SIGTERM')
    await typing
    expect(await ending).toEqual({ code: 0, signal: null })
    await until(() => typists.every(({ connection }) => connection.getState().phase === 'offline'), 'all notice')
    // Later tries, while nobody listens, end with 1006.
    for (const { codes } of typists) expect(codes[0]).toBe(closeCodes.restart)
    for (const { pageId, typists: here } of rooms) {
      const acknowledged = here.flatMap((each) => each.acknowledged())
      expect(missing(acknowledged, (await committed(database.db, pageId)).equations)).toEqual([])
    }
    server = await standby
    await server.listen(port)
    await Promise.all(typists.map(({ connection }) => saved(connection)))
  }
  for (const room of rooms) await expectAll(room.typists, room.pageId)
  for (const { connection } of typists) connection.close()
  expect((await server.kill('SIGTERM')).code).toBe(0)
}, 300_000)

const seed = newSeed()
test(`ten thousand malformed frames do no harm (seed ${seed})`, async () => {
  console.info(`malformed frames: SEED=${seed}`)
  const random = randomFrom(seed)
  const [spoilt, calm] = await Promise.all([makePage(database.db, groupId), makePage(database.db, groupId)])
  const server = await forkCollab({ databaseUrl: database.url, people, roomy: true })
  const url = `ws://127.0.0.1:${await server.listen(0)}/collab`
  const bystander = typist(openDraft(url, calm, token(0)), 'calm')
  const neighbour = openDraft(url, spoilt, token(1))
  await Promise.all([saved(bystander.connection), saved(neighbour)])

  let attacker: { raw: RawSocket; doc: Y.Doc } | null = null
  async function attack(frames: number): Promise<void> {
    for (let i = 0; i < frames; i++) {
      if (!attacker || attacker.raw.closed) {
        const raw = await RawSocket.join(`${url}/${spoilt}`, token(2))
        attacker = { raw, doc: await raw.synced() }
      }
      attacker.raw.send(malformed(attacker.doc, random))
      if (i % 50 === 0) {
        bystander.type()
        // Keeps pace with the server, so that every frame is really read.
        const before = attacker.raw.of('step-2').length
        attacker.raw.sendSync(0, Uint8Array.of(0))
        const { raw } = attacker
        await until(() => raw.of('step-2').length > before || raw.closed !== null, 'the server still answers')
        raw.heard.length = 0
      }
    }
  }

  await attack(3000)
  const before = await server.memory()
  await attack(10_000)
  const after = await server.memory()
  expect(after.rss - before.rss).toBeLessThan(20 * 1024 * 1024)

  await saved(bystander.connection)
  await expectAll([bystander], calm)
  // The attacked page is still a draft that can be edited and loaded.
  equationsOf(neighbour.doc).insert(0, 'still mine ')
  await saved(neighbour)
  expect((await committed(database.db, spoilt)).equations.startsWith('still mine ')).toBe(true)
  expect(after.errors).toEqual([])
  bystander.connection.close()
  neighbour.close()
  expect((await server.kill('SIGTERM')).code).toBe(0)
})

/** A frame that is wrong somewhere: in its type, its length, its update, or only in a bit. */
function malformed(doc: Y.Doc, random: () => number): Uint8Array | string {
  const before = Y.encodeStateVector(doc)
  editSomething(doc, random)
  const frame = syncFrame(random() < 0.3 ? 1 : 2, Y.encodeStateAsUpdate(doc, before))
  const dice = random()
  if (dice < 0.1) return 'text'
  if (dice < 0.2) return Uint8Array.from({ length: 1 + Math.floor(random() * 40) }, () => Math.floor(random() * 256))
  if (dice < 0.3) return frame.slice(0, Math.floor(random() * frame.length))
  if (dice < 0.4) return Uint8Array.of(...frame, 0)
  const at = dice < 0.5 ? Math.floor(random() * 3) : Math.floor(random() * frame.length)
  frame[at] = (frame[at] ?? 0) ^ (1 << Math.floor(random() * 8))
  return frame
}
