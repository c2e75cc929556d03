import { and, asc, desc, eq, inArray } from 'drizzle-orm'
import { alias } from 'drizzle-orm/mysql-core'
import type { Queryable } from '#drizzle/client.ts'
import { people, remarks, revisions, signatures } from '#drizzle/schema/index.ts'
import type { RevisionState } from '#shared/api/pages.ts'
import type { Mark } from '#shared/stability/marks.ts'

const base = alias(revisions, 'base')

/** Everything of a revision but its frozen document. */
const headFields = {
  id: revisions.id,
  pageId: revisions.pageId,
  number: revisions.number,
  major: revisions.major,
  minor: revisions.minor,
  patch: revisions.patch,
  state: revisions.state,
  summary: revisions.summary,
  digest: revisions.digest,
  fingerprint: revisions.fingerprint,
  engine: revisions.engine,
  cardId: revisions.cardId,
  cardSummary: revisions.cardSummary,
  baseId: revisions.baseId,
  generation: revisions.generation,
  sentBy: { id: people.id, name: people.name },
  sentAt: revisions.sentAt,
  settledAt: revisions.settledAt,
  reason: revisions.reason,
  base: { major: base.major, minor: base.minor, patch: base.patch },
}
const heads = (db: Queryable) =>
  db
    .select(headFields)
    .from(revisions)
    .innerJoin(people, eq(people.id, revisions.sentBy))
    .leftJoin(base, eq(base.id, revisions.baseId))
export type HeadRow = Awaited<ReturnType<typeof findHead>> & {}

export async function findHead(db: Queryable, id: number) {
  const [row] = await heads(db).where(eq(revisions.id, id))
  return row ?? null
}

export async function findHeads(db: Queryable, ids: readonly number[]) {
  return ids.length === 0 ? [] : heads(db).where(inArray(revisions.id, [...ids]))
}

export async function findByMark(db: Queryable, pageId: number, { major, minor, patch }: Mark) {
  const [row] = await heads(db).where(
    and(
      eq(revisions.pageId, pageId),
      eq(revisions.major, major),
      eq(revisions.minor, minor),
      eq(revisions.patch, patch),
    ),
  )
  return row ?? null
}

/** A page's revisions in these states, newest first. */
export async function listHeads(db: Queryable, pageId: number, states: readonly RevisionState[]) {
  return heads(db)
    .where(and(eq(revisions.pageId, pageId), inArray(revisions.state, [...states])))
    .orderBy(desc(revisions.number))
}

/** The newest revision of a page in one of these states. */
export async function findNewest(db: Queryable, pageId: number, states: readonly RevisionState[]) {
  const [row] = await heads(db)
    .where(and(eq(revisions.pageId, pageId), inArray(revisions.state, [...states])))
    .orderBy(desc(revisions.number))
    .limit(1)
  return row ?? null
}

/** The frozen document, unparsed. */
export async function findDocument(db: Queryable, id: number): Promise<unknown> {
  const [row] = await db.select({ document: revisions.document }).from(revisions).where(eq(revisions.id, id))
  return row?.document ?? null
}

/** Every mark ever given on a page, and the number of its last revision. */
export async function listMarks(tx: Queryable, pageId: number): Promise<(Mark & { number: number })[]> {
  return tx
    .select({ major: revisions.major, minor: revisions.minor, patch: revisions.patch, number: revisions.number })
    .from(revisions)
    .where(eq(revisions.pageId, pageId))
}

export async function insert(tx: Queryable, row: Omit<typeof revisions.$inferInsert, 'id'>): Promise<number> {
  const [made] = await tx.insert(revisions).values(row).$returningId()
  if (!made) throw new Error('The database gave the new revision no id.')
  return made.id
}

/** The only change a revision ever knows. */
export async function settle(
  tx: Queryable,
  id: number,
  to: { state: RevisionState; settledAt: Date; reason?: string },
): Promise<void> {
  await tx.update(revisions).set(to).where(eq(revisions.id, id))
}

export async function sign(tx: Queryable, rows: Omit<typeof signatures.$inferInsert, 'id'>[]): Promise<void> {
  await tx.insert(signatures).values(rows)
}

export async function listSignatures(db: Queryable, revisionIds: readonly number[]) {
  if (revisionIds.length === 0) return []
  return db
    .select({
      revisionId: signatures.revisionId,
      person: { id: people.id, name: people.name },
      meaning: signatures.meaning,
      at: signatures.at,
    })
    .from(signatures)
    .innerJoin(people, eq(people.id, signatures.personId))
    .where(inArray(signatures.revisionId, [...revisionIds]))
    .orderBy(asc(signatures.at), asc(signatures.id))
}

export async function insertRemarks(tx: Queryable, rows: Omit<typeof remarks.$inferInsert, 'id'>[]): Promise<void> {
  await tx.insert(remarks).values(rows)
}

export async function listRemarks(db: Queryable, revisionId: number) {
  return db
    .select({
      author: { id: people.id, name: people.name },
      at: remarks.at,
      text: remarks.text,
      line: remarks.line,
      symbol: remarks.symbol,
    })
    .from(remarks)
    .innerJoin(people, eq(people.id, remarks.authorId))
    .where(eq(remarks.revisionId, revisionId))
    .orderBy(asc(remarks.id))
}
