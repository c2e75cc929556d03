import { and, desc, eq, isNull, lt, or, sql } from 'drizzle-orm'
import { z } from 'zod'
import type { Queryable } from '#drizzle/client.ts'
import { draftWriters, groupPrefixes, pageCodes, pages, people, revisions } from '#drizzle/schema/index.ts'

export type PageRow = typeof pages.$inferSelect
export type NewPage = Omit<typeof pages.$inferInsert, 'id'>

/** Locks the page's row until the transaction ends: everything that freezes, settles or begins a draft does this first. */
export async function lockPage(tx: Queryable, pageId: number): Promise<PageRow | null> {
  const [row] = await tx.select().from(pages).where(eq(pages.id, pageId)).for('update')
  return row ?? null
}

export async function findPage(db: Queryable, pageId: number): Promise<PageRow | null> {
  const [row] = await db.select().from(pages).where(eq(pages.id, pageId))
  return row ?? null
}

export async function findPageByCode(db: Queryable, code: string): Promise<PageRow | null> {
  const [row] = await db.select().from(pages).where(eq(pages.code, code))
  return row ?? null
}

/** Locks a prefix, so that two new pages cannot take one number; the group it belongs to. */
export async function lockPrefix(tx: Queryable, prefix: string): Promise<number | null> {
  const [row] = await tx
    .select({ groupId: groupPrefixes.groupId })
    .from(groupPrefixes)
    .where(eq(groupPrefixes.prefix, prefix))
    .for('update')
  return row?.groupId ?? null
}

/** The last number ever given under a prefix; 0 before the first. */
export async function lastNumber(tx: Queryable, prefix: string): Promise<number> {
  const [row] = await tx
    .select({ number: pageCodes.number })
    .from(pageCodes)
    .where(eq(pageCodes.prefix, prefix))
    .orderBy(desc(pageCodes.number))
    .limit(1)
  return row?.number ?? 0
}

export async function insertCode(tx: Queryable, row: typeof pageCodes.$inferInsert): Promise<void> {
  await tx.insert(pageCodes).values(row)
}

export async function insertPage(tx: Queryable, row: NewPage): Promise<number> {
  const [made] = await tx.insert(pages).values(row).$returningId()
  if (!made) throw new Error('The database gave the new page no id.')
  return made.id
}

/** Changes the page's row and raises its version, which is its ETag. */
export async function changePage(tx: Queryable, pageId: number, changes: Partial<NewPage>): Promise<void> {
  await tx
    .update(pages)
    .set({ ...changes, version: sql`${pages.version} + 1` })
    .where(eq(pages.id, pageId))
}

/** What was computed from the draft. Nothing where another generation began since. */
export async function setDraftCard(
  db: Queryable,
  draft: { pageId: number; generation: number },
  computed: Pick<NewPage, 'draftCardId' | 'draftSummary' | 'draftDigest' | 'draftWords' | 'draftCardAt'>,
): Promise<void> {
  await db
    .update(pages)
    .set(computed)
    .where(and(eq(pages.id, draft.pageId), eq(pages.generation, draft.generation)))
}

/** Title block of a page that never was public: it follows the draft. */
export async function followDraft(
  db: Queryable,
  draft: { pageId: number; generation: number },
  words: { title?: string; summary: string; field: string },
): Promise<void> {
  await db
    .update(pages)
    .set(words)
    .where(and(eq(pages.id, draft.pageId), eq(pages.generation, draft.generation), eq(pages.everPublic, 0)))
}

/** What is attached to the draft changed: its card, words and digest are due. */
export async function noteDraftChange(tx: Queryable, pageId: number, now: Date): Promise<void> {
  await tx.update(pages).set({ draftChangedAt: now }).where(eq(pages.id, pageId))
}

/** Pages whose draft changed after its card was computed. */
export async function listDueDrafts(db: Queryable): Promise<number[]> {
  const rows = await db
    .select({ id: pages.id })
    .from(pages)
    .where(and(isNull(pages.removedAt), or(isNull(pages.draftCardAt), lt(pages.draftCardAt, pages.draftChangedAt))))
  return rows.map((row) => row.id)
}

/** Notes a writer of the draft. */
export async function noteWriter(
  tx: Queryable,
  row: { pageId: number; generation: number; personId: number; now: Date },
): Promise<void> {
  const { now, ...writer } = row
  await tx
    .insert(draftWriters)
    .values({ ...writer, first: now, last: now })
    .onDuplicateKeyUpdate({ set: { last: now } })
}

/** Makes the writers of one generation of a draft writers of another, with their times. */
export async function copyWriters(
  tx: Queryable,
  pageId: number,
  { from, to }: { from: number; to: number },
): Promise<void> {
  const rows = await tx
    .select()
    .from(draftWriters)
    .where(and(eq(draftWriters.pageId, pageId), eq(draftWriters.generation, from)))
  if (rows.length > 0) await tx.insert(draftWriters).values(rows.map((row) => ({ ...row, generation: to })))
}

/** Who wrote in a draft, in the order they began. */
export async function listWriters(
  db: Queryable,
  pageId: number,
  generation: number,
): Promise<{ id: number; name: string }[]> {
  return db
    .select({ id: people.id, name: people.name })
    .from(draftWriters)
    .innerJoin(people, eq(people.id, draftWriters.personId))
    .where(and(eq(draftWriters.pageId, pageId), eq(draftWriters.generation, generation)))
    .orderBy(draftWriters.first, people.id)
}

/** How many revisions a page ever had sent. */
export async function countRevisions(db: Queryable, pageId: number): Promise<number> {
  const [row] = await db
    .select({ count: sql<number>`count(*)`.mapWith(Number) })
    .from(revisions)
    .where(eq(revisions.pageId, pageId))
  return row?.count ?? 0
}

const counts = z.object({
  revisions: z.coerce.number(),
  publicRevisions: z.coerce.number(),
  draftSources: z.coerce.number(),
  frozenSources: z.coerce.number(),
})

/** What a page's head counts, in one question. `shownId`: the public revision whose frozen sources are counted. */
export async function countParts(
  db: Queryable,
  pageId: number,
  shownId: number | null,
): Promise<z.infer<typeof counts>> {
  const [rows] = await db.execute(sql`
    select count(*) as revisions,
      count(case when r.state in ('in-force', 'superseded', 'withdrawn') then 1 end) as publicRevisions,
      (select count(distinct l.source_id) from source_links l where l.page_id = ${pageId} and l.removed_at is null) as draftSources,
      coalesce((select json_length(s.document, '$.citations') from revisions s where s.id = ${shownId}), 0) as frozenSources
    from revisions r where r.page_id = ${pageId}`)
  const [row] = z.array(counts).parse(rows)
  if (!row) throw new Error('A count always has a row.')
  return row
}
