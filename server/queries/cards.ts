import { and, eq, sql } from 'drizzle-orm'
import type { Queryable } from '#drizzle/client.ts'
import { cards } from '#drizzle/schema/index.ts'

/** Stores a card unless one of that fingerprint, engine and parts is there; its id. A stored card never changes. */
export async function keepCard(db: Queryable, row: Omit<typeof cards.$inferInsert, 'id'>): Promise<number> {
  await db
    .insert(cards)
    .values(row)
    .onDuplicateKeyUpdate({ set: { id: sql`id` } })
  const [kept] = await db
    .select({ id: cards.id })
    .from(cards)
    .where(and(eq(cards.fingerprint, row.fingerprint), eq(cards.engine, row.engine), eq(cards.parts, row.parts)))
  if (!kept) throw new Error('A card that was just stored is not there.')
  return kept.id
}

/** A stored card, unparsed. */
export async function findCard(db: Queryable, id: number): Promise<unknown> {
  const [row] = await db.select({ card: cards.card }).from(cards).where(eq(cards.id, id))
  return row?.card ?? null
}
