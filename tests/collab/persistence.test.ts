import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import * as Y from 'yjs'
import {
  append,
  compact,
  createDraft,
  type DraftOwner,
  DraftUnreadable,
  loadDocument,
  loadDraft,
  takeOver,
} from '#collab/persistence.ts'
import { draftWriters, pageSnapshots, pages, pageUpdates } from '#drizzle/schema/index.ts'
import { equationsOf, readDraft } from '#shared/ydoc/shape.ts'
import { committed, makePage, makePeople, makeRevision, smallDraft } from '#tests/support/collab-pages.ts'
import { freshDatabase } from '#tests/support/database.ts'

const now = new Date('2026-12-01T08:00:00.000Z')
let database: Awaited<ReturnType<typeof freshDatabase>>
let groupId: number
let anna: number
let boris: number

beforeAll(async () => {
  database = await freshDatabase()
  const made = await makePeople(database.db, ['contributor', 'maintainer'])
  groupId = made.groupId
  anna = made.ids[0] ?? 0
  boris = made.ids[1] ?? 0
})
afterAll(() => database.close())

async function ownedPage() {
  const pageId = await makePage(database.db, groupId)
  const owned = await takeOver(database.db, pageId)
  if (!owned) throw new Error('no page')
  return owned
}

/** Inserts a text at the start and gives back the update. */
function edit(doc: Y.Doc, text: string): Uint8Array {
  const before = Y.encodeStateVector(doc)
  equationsOf(doc).insert(0, text)
  return Y.encodeStateAsUpdate(doc, before)
}

const row = (data: Uint8Array, personId = anna) => ({ personId, data, at: now })

describe('a draft in the database', () => {
  test('is read back as it was created', async () => {
    const { doc, pageId } = await ownedPage()
    expect(readDraft(doc)).toMatchObject(smallDraft)
    expect(await committed(database.db, pageId)).toMatchObject(smallDraft)
  })

  test('is never invented: a generation without a snapshot does not load', async () => {
    const { pageId } = await ownedPage()
    await expect(loadDocument(database.db, pageId, 2)).rejects.toThrow(DraftUnreadable)
    await expect(loadDocument(database.db, 999_999, 1)).rejects.toThrow(DraftUnreadable)
    expect(await takeOver(database.db, 999_999)).toBeNull()
  })

  test('grows by appended updates, with their writers in the same transaction', async () => {
    const owned = await ownedPage()
    const first = edit(owned.doc, '# one\n')
    const second = edit(owned.doc, '# two\n')
    expect(await append(database.db, owned, [row(first), row(second, boris)], now)).toEqual({ ok: true })
    expect((await committed(database.db, owned.pageId)).equations).toBe(`# two\n# one\n${smallDraft.equations}`)
    const writers = await database.db.select().from(draftWriters).where(eq(draftWriters.pageId, owned.pageId))
    expect(writers.map((writer) => [writer.personId, writer.generation])).toEqual([
      [anna, 1],
      [boris, 1],
    ])
    const [page] = await database.db.select().from(pages).where(eq(pages.id, owned.pageId))
    expect(page?.draftChangedAt).toEqual(now)
    expect(page?.version).toBe(1)
  })

  test('notes the first and the last time of a writer', async () => {
    const owned = await ownedPage()
    const later = new Date(now.getTime() + 60_000)
    await append(database.db, owned, [row(edit(owned.doc, 'a'))], now)
    await append(database.db, owned, [row(edit(owned.doc, 'b'))], later)
    const [writer] = await database.db.select().from(draftWriters).where(eq(draftWriters.pageId, owned.pageId))
    expect([writer?.first, writer?.last]).toEqual([now, later])
  })

  test('appended twice is the same document', async () => {
    const owned = await ownedPage()
    const update = edit(owned.doc, 'twice\n')
    await append(database.db, owned, [row(update)], now)
    await append(database.db, owned, [row(update)], now)
    expect((await committed(database.db, owned.pageId)).equations).toBe(`twice\n${smallDraft.equations}`)
  })

  test('does not load where its log has a gap, and nothing is written over it', async () => {
    const owned = await ownedPage()
    edit(owned.doc, 'lost\n')
    await append(database.db, owned, [row(edit(owned.doc, 'depends on it\n'))], now)
    await expect(takeOver(database.db, owned.pageId)).rejects.toThrow(/gap/)
    await expect(compact(database.db, owned, now)).rejects.toThrow(/gap/)
    const rows = await database.db.select().from(pageUpdates).where(eq(pageUpdates.pageId, owned.pageId))
    expect(rows).toHaveLength(1)
    const [page] = await database.db.select().from(pages).where(eq(pages.id, owned.pageId))
    expect(page?.ownerEpoch).toBe(owned.ownerEpoch)
  })

  test('does not load where its log holds what is no update', async () => {
    const owned = await ownedPage()
    await append(database.db, owned, [row(Uint8Array.of(1, 200, 7, 7, 7))], now)
    await expect(loadDocument(database.db, owned.pageId, 1)).rejects.toThrow(DraftUnreadable)
  })

  test('does not load in a shape of another version', async () => {
    const pageId = await makePage(database.db, groupId)
    const doc = new Y.Doc()
    doc.getMap('settings').set('shape', '2')
    await database.db
      .insert(pageSnapshots)
      .values({ pageId, generation: 3, uptoSeq: 0, data: Y.encodeStateAsUpdate(doc), at: now })
    await expect(loadDocument(database.db, pageId, 3)).rejects.toThrow(/shape 2/)
  })
})

describe('an append is refused, and nothing of it is written,', () => {
  const change = (pageId: number, set: Partial<typeof pages.$inferInsert>) =>
    database.db.update(pages).set(set).where(eq(pages.id, pageId))

  async function refused(owner: DraftOwner & { doc: Y.Doc }) {
    const result = await append(database.db, owner, [row(edit(owner.doc, 'late'))], now)
    const rows = await database.db.select().from(pageUpdates).where(eq(pageUpdates.pageId, owner.pageId))
    const writers = await database.db.select().from(draftWriters).where(eq(draftWriters.pageId, owner.pageId))
    expect([rows.length, writers.length]).toEqual([0, 0])
    return result
  }

  test('while a review is under way', async () => {
    const owned = await ownedPage()
    await change(owned.pageId, { inReviewId: await makeRevision(database.db, owned.pageId) })
    expect(await refused(owned)).toEqual({ ok: false, reason: 'locked' })
  })

  test('after a new generation began', async () => {
    const owned = await ownedPage()
    await change(owned.pageId, { generation: 2 })
    expect(await refused(owned)).toEqual({ ok: false, reason: 'generation-closed' })
  })

  test('after another process took the page over', async () => {
    const owned = await ownedPage()
    const next = await takeOver(database.db, owned.pageId)
    expect(next?.ownerEpoch).toBe(owned.ownerEpoch + 1)
    expect(await refused(owned)).toEqual({ ok: false, reason: 'fenced' })
    expect(await compact(database.db, owned, now)).toBeNull()
  })

  test('after the page was removed', async () => {
    const owned = await ownedPage()
    await change(owned.pageId, { removedAt: now })
    expect(await refused(owned)).toEqual({ ok: false, reason: 'removed' })
    expect(await takeOver(database.db, owned.pageId)).toBeNull()
  })
})

describe('compaction', () => {
  const snapshotsOf = (pageId: number) =>
    database.db.select().from(pageSnapshots).where(eq(pageSnapshots.pageId, pageId)).orderBy(pageSnapshots.uptoSeq)

  test('leaves the same document and no rows, and keeps the snapshot before', async () => {
    const owned = await ownedPage()
    for (const text of ['a', 'b', 'c']) await append(database.db, owned, [row(edit(owned.doc, text))], now)
    const before = await loadDraft(database.db, owned.pageId, 1)
    expect(before.rows).toBe(3)
    expect(await compact(database.db, owned, now)).toEqual({ rows: 0, bytes: 0 })
    const after = await loadDraft(database.db, owned.pageId, 1)
    expect(after.rows).toBe(0)
    expect(Y.encodeStateAsUpdate(after.doc)).toEqual(Y.encodeStateAsUpdate(before.doc))
    expect(await snapshotsOf(owned.pageId)).toHaveLength(2)
    await append(database.db, owned, [row(edit(owned.doc, 'd'))], now)
    await compact(database.db, owned, now)
    const kept = await snapshotsOf(owned.pageId)
    expect(kept.map((snapshot) => snapshot.uptoSeq > 0)).toEqual([true, true])
    expect((await committed(database.db, owned.pageId)).equations).toBe(`dcba${smallDraft.equations}`)
  })

  test('does nothing to an empty log', async () => {
    const owned = await ownedPage()
    await compact(database.db, owned, now)
    expect(await snapshotsOf(owned.pageId)).toHaveLength(1)
  })

  test('never hides a row from somebody who reads at the same time', async () => {
    const owned = await ownedPage()
    let text = smallDraft.equations
    let reading = true
    const lengths: number[] = []
    const reader = (async () => {
      while (reading) lengths.push((await committed(database.db, owned.pageId)).equations.length)
    })()
    for (let i = 0; i < 30; i++) {
      await append(database.db, owned, [row(edit(owned.doc, 'x'))], now)
      text = `x${text}`
      if (i % 3 === 2) await compact(database.db, owned, now)
    }
    reading = false
    await reader
    // Text only grows, so what a reader saw may only grow.
    expect(lengths).toEqual([...lengths].sort((a, b) => a - b))
    expect((await committed(database.db, owned.pageId)).equations).toBe(text)
  })

  test('keeps generations apart', async () => {
    const owned = await ownedPage()
    await append(database.db, owned, [row(edit(owned.doc, 'old'))], now)
    await createDraft(database.db, owned.pageId, 2, { ...smallDraft, equations: 'new' }, now)
    expect((await committed(database.db, owned.pageId, 2)).equations).toBe('new')
    await compact(database.db, owned, now)
    expect((await committed(database.db, owned.pageId, 2)).equations).toBe('new')
    expect((await committed(database.db, owned.pageId, 1)).equations).toBe(`old${smallDraft.equations}`)
  })
})
