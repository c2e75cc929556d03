import { and, asc, desc, eq, inArray, isNull, lte, sql } from 'drizzle-orm'
import { unionAll } from 'drizzle-orm/mysql-core'
import * as Y from 'yjs'
import type { Database, Queryable } from '#drizzle/client.ts'
import { draftWriters, pageSnapshots, pages, pageUpdates } from '#drizzle/schema/index.ts'
import type { DraftContent } from '#shared/model/draft.ts'
import { prepareRoots, settingsOf, shapeVersion, writeDraft } from '#shared/ydoc/shape.ts'

/**
 * The co-edited document in the database: an append-only log of updates (page_updates) after a compacted state
 * (page_snapshots), both of one generation of one page.
 *
 * Who holds which lock: append and compact update or lock the page's row first, so they exclude each other and every
 * service that locks the page (sending for review, approving). A process owns a page from takeOver on: it raised
 * pages.owner_epoch, and whatever an earlier owner still wants to write is refused ('fenced').
 */

/** The draft in the database cannot be read: there is none of this generation, or its log is damaged. Nothing may be written over it. */
export class DraftUnreadable extends Error {
  override readonly name = 'DraftUnreadable'
}

/** One change of the document, as it is committed. */
export interface UpdateRow {
  /** Whose socket brought it. */
  personId: number
  data: Uint8Array
  at: Date
}

/** Which draft, and in whose name as its owner. */
export interface DraftOwner {
  pageId: number
  generation: number
  ownerEpoch: number
}

/**
 * Why nothing was written: another process took the page over, a new generation began, a review is under way, or the
 * page was removed.
 */
export type AppendRefusal = 'fenced' | 'generation-closed' | 'locked' | 'removed'
export type AppendResult = { ok: true } | { ok: false; reason: AppendRefusal }

/** A document with the size of the log behind its snapshot. */
export interface LoadedDraft {
  doc: Y.Doc
  rows: number
  bytes: number
  /** The newest update contained; 0 where there is only the first snapshot. */
  uptoSeq: number
}

/**
 * Writes the first state of a draft. Once per page and generation, in the transaction that makes the page or begins the
 * generation; nobody else ever fills an empty document.
 */
export async function createDraft(
  tx: Queryable,
  pageId: number,
  generation: number,
  content: DraftContent,
  now: Date,
): Promise<void> {
  const doc = new Y.Doc()
  writeDraft(doc, content)
  await tx.insert(pageSnapshots).values({ pageId, generation, uptoSeq: 0, data: Y.encodeStateAsUpdate(doc), at: now })
  doc.destroy()
}

/**
 * The draft as it is committed. One statement reads snapshot and log, so a compaction in between cannot hide rows; in a
 * transaction that locked the page nothing newer is on its way.
 *
 * @throws {DraftUnreadable}
 */
export async function loadDocument(db: Queryable, pageId: number, generation: number): Promise<Y.Doc> {
  return (await loadDraft(db, pageId, generation)).doc
}

/** loadDocument with the size of the log. */
export async function loadDraft(db: Queryable, pageId: number, generation: number): Promise<LoadedDraft> {
  const newest = db
    .select({
      seq: pageSnapshots.uptoSeq,
      snapshot: sql<number>`1`.mapWith(Number).as('snapshot'),
      data: pageSnapshots.data,
    })
    .from(pageSnapshots)
    .where(and(eq(pageSnapshots.pageId, pageId), eq(pageSnapshots.generation, generation)))
    .orderBy(desc(pageSnapshots.uptoSeq), desc(pageSnapshots.id))
    .limit(1)
  const log = db
    .select({ seq: pageUpdates.seq, snapshot: sql<number>`0`.mapWith(Number).as('snapshot'), data: pageUpdates.data })
    .from(pageUpdates)
    .where(and(eq(pageUpdates.pageId, pageId), eq(pageUpdates.generation, generation)))
  const found = await unionAll(newest, log)
  const snapshot = found.find((row) => row.snapshot === 1)
  if (!snapshot) throw new DraftUnreadable(`Page ${pageId} has no draft of generation ${generation}.`)
  const updates = found.filter((row) => row.snapshot === 0 && row.seq > snapshot.seq).sort((a, b) => a.seq - b.seq)
  return {
    doc: documentFrom([snapshot.data, ...updates.map((row) => row.data)], `page ${pageId}, generation ${generation}`),
    rows: updates.length,
    bytes: updates.reduce((sum, row) => sum + row.data.byteLength, 0),
    uptoSeq: updates.at(-1)?.seq ?? snapshot.seq,
  }
}

function documentFrom(parts: Uint8Array[], name: string): Y.Doc {
  const doc = new Y.Doc()
  prepareRoots(doc)
  try {
    doc.transact(() => {
      for (const part of parts) Y.applyUpdate(doc, part)
    })
  } catch (cause) {
    throw new DraftUnreadable(`The log of ${name} holds an update that cannot be read.`, { cause })
  }
  if (doc.store.pendingStructs !== null || doc.store.pendingDs !== null)
    throw new DraftUnreadable(`The log of ${name} has a gap.`)
  const shape: unknown = settingsOf(doc).get('shape')
  if (shape !== shapeVersion) throw new DraftUnreadable(`The draft of ${name} has the unknown shape ${String(shape)}.`)
  return doc
}

/**
 * Makes this process the owner of a page's draft and loads it, in one transaction: what an earlier owner has not
 * committed by now it never will.
 *
 * @returns null where there is no such page, or it was removed.
 * @throws {DraftUnreadable}
 */
export async function takeOver(db: Database, pageId: number): Promise<(LoadedDraft & DraftOwner) | null> {
  return db.transaction(async (tx) => {
    const [page] = await tx
      .select({ generation: pages.generation, ownerEpoch: pages.ownerEpoch, removedAt: pages.removedAt })
      .from(pages)
      .where(eq(pages.id, pageId))
      .for('update')
    if (!page || page.removedAt !== null) return null
    const ownerEpoch = page.ownerEpoch + 1
    const draft = await loadDraft(tx, pageId, page.generation)
    await tx.update(pages).set({ ownerEpoch }).where(eq(pages.id, pageId))
    return { ...draft, pageId, generation: page.generation, ownerEpoch }
  })
}

/**
 * Commits updates in their order with their writers. Nothing is written where the draft is not open to this owner any
 * more. After an error it is unknown whether the rows are there; appending them again does no harm (updates are
 * idempotent).
 *
 * @throws the driver's error.
 */
export async function append(
  db: Database,
  owner: DraftOwner,
  rows: readonly UpdateRow[],
  now: Date,
): Promise<AppendResult> {
  return db.transaction(async (tx): Promise<AppendResult> => {
    // One statement takes the lock, checks, and notes the change; without a match it changes nothing.
    const [{ affectedRows }] = await tx
      .update(pages)
      .set({ draftChangedAt: now })
      .where(
        and(
          eq(pages.id, owner.pageId),
          eq(pages.generation, owner.generation),
          eq(pages.ownerEpoch, owner.ownerEpoch),
          isNull(pages.inReviewId),
          isNull(pages.removedAt),
        ),
      )
    if (affectedRows === 0) return { ok: false, reason: await refusalOf(tx, owner) }
    const { pageId, generation, ownerEpoch } = owner
    await tx.insert(pageUpdates).values(rows.map((row) => ({ ...row, pageId, generation, ownerEpoch })))
    const writers = [...new Set(rows.map((row) => row.personId))]
    await tx
      .insert(draftWriters)
      .values(writers.map((personId) => ({ pageId, generation, personId, first: now, last: now })))
      .onDuplicateKeyUpdate({ set: { last: now } })
    return { ok: true }
  })
}

async function refusalOf(tx: Queryable, owner: DraftOwner): Promise<AppendRefusal> {
  const [page] = await tx
    .select({
      generation: pages.generation,
      ownerEpoch: pages.ownerEpoch,
      inReviewId: pages.inReviewId,
      removedAt: pages.removedAt,
    })
    .from(pages)
    .where(eq(pages.id, owner.pageId))
    .for('update')
  if (!page || page.removedAt !== null) return 'removed'
  if (page.generation !== owner.generation) return 'generation-closed'
  return page.ownerEpoch === owner.ownerEpoch ? 'locked' : 'fenced'
}

/**
 * Replaces the log by a snapshot of what is committed (never of what is only in memory). The snapshot before it is kept.
 *
 * @returns the size of the log afterwards, or null where this process is not the owner of this generation any more.
 * @throws {DraftUnreadable} or the driver's error; then nothing changed.
 */
export async function compact(
  db: Database,
  owner: DraftOwner,
  now: Date,
): Promise<{ rows: number; bytes: number } | null> {
  return db.transaction(async (tx) => {
    const { pageId, generation } = owner
    const [page] = await tx
      .select({ generation: pages.generation, ownerEpoch: pages.ownerEpoch })
      .from(pages)
      .where(eq(pages.id, pageId))
      .for('update')
    if (page?.generation !== generation || page.ownerEpoch !== owner.ownerEpoch) return null
    const { doc, rows, uptoSeq } = await loadDraft(tx, pageId, generation)
    const data = Y.encodeStateAsUpdate(doc)
    doc.destroy()
    if (rows === 0) return { rows: 0, bytes: 0 }
    await tx.insert(pageSnapshots).values({ pageId, generation, uptoSeq, data, at: now })
    await tx
      .delete(pageUpdates)
      .where(and(eq(pageUpdates.pageId, pageId), eq(pageUpdates.generation, generation), lte(pageUpdates.seq, uptoSeq)))
    const snapshots = await tx
      .select({ id: pageSnapshots.id })
      .from(pageSnapshots)
      .where(and(eq(pageSnapshots.pageId, pageId), eq(pageSnapshots.generation, generation)))
      .orderBy(asc(pageSnapshots.uptoSeq), asc(pageSnapshots.id))
    const old = snapshots.slice(0, -2).map(({ id }) => id)
    if (old.length > 0) await tx.delete(pageSnapshots).where(inArray(pageSnapshots.id, old))
    return { rows: 0, bytes: 0 }
  })
}
