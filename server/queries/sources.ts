import { and, asc, eq, isNull } from 'drizzle-orm'
import type { Queryable } from '#drizzle/client.ts'
import { sourceLinks, sources } from '#drizzle/schema/index.ts'

export type LinkRow = typeof sourceLinks.$inferSelect
export type SourceRow = typeof sources.$inferSelect

/** Links of a page's draft that stand, each with its source, in the order the sources came to the page. */
export async function listLinks(db: Queryable, pageId: number): Promise<{ link: LinkRow; source: SourceRow }[]> {
  return db
    .select({ link: sourceLinks, source: sources })
    .from(sourceLinks)
    .innerJoin(sources, eq(sources.id, sourceLinks.sourceId))
    .where(and(eq(sourceLinks.pageId, pageId), isNull(sourceLinks.removedAt)))
    .orderBy(asc(sourceLinks.id))
}

export async function findByDoi(db: Queryable, groupId: number, doi: string): Promise<SourceRow | null> {
  const [row] = await db
    .select()
    .from(sources)
    .where(and(eq(sources.groupId, groupId), eq(sources.doi, doi)))
  return row ?? null
}

export async function findByKey(db: Queryable, groupId: number, key: string): Promise<SourceRow | null> {
  const [row] = await db
    .select()
    .from(sources)
    .where(and(eq(sources.groupId, groupId), eq(sources.key, key)))
  return row ?? null
}

export async function insertSource(tx: Queryable, row: Omit<typeof sources.$inferInsert, 'id'>): Promise<number> {
  const [made] = await tx.insert(sources).values(row).$returningId()
  if (!made) throw new Error('The database gave the new source no id.')
  return made.id
}

export async function insertLink(tx: Queryable, row: Omit<typeof sourceLinks.$inferInsert, 'id'>): Promise<void> {
  await tx.insert(sourceLinks).values(row)
}

/** Takes links off the page: one, or all of a source. How many stood. */
export async function removeLinks(
  tx: Queryable,
  pageId: number,
  which: { linkId: number } | { sourceId: number },
  now: Date,
): Promise<number> {
  const one = 'linkId' in which ? eq(sourceLinks.id, which.linkId) : eq(sourceLinks.sourceId, which.sourceId)
  const [result] = await tx
    .update(sourceLinks)
    .set({ removedAt: now })
    .where(and(eq(sourceLinks.pageId, pageId), isNull(sourceLinks.removedAt), one))
  return result.affectedRows
}

/** A new generation's text has new anchors. */
export async function moveLink(tx: Queryable, linkId: number, to: { line: number; anchor: string }): Promise<void> {
  await tx.update(sourceLinks).set(to).where(eq(sourceLinks.id, linkId))
}
