import { and, eq } from 'drizzle-orm'
import { isDuplicate, type Queryable } from '#drizzle/client.ts'
import { cards } from '#drizzle/schema/index.ts'

type NewCard = Omit<typeof cards.$inferInsert, 'id'>

async function findLike(db: Queryable, { fingerprint, engine, parts }: NewCard): Promise<number | null> {
  const [row] = await db
    .select({ id: cards.id })
    .from(cards)
    .where(and(eq(cards.fingerprint, fingerprint), eq(cards.engine, engine), eq(cards.parts, parts)))
  return row?.id ?? null
}

/** Stores a card unless one of that fingerprint, engine and parts is there; its id. A stored card never changes. */
export async function keepCard(db: Queryable, row: NewCard): Promise<number> {
  const known = await findLike(db, row)
  if (known !== null) return known
  try {
    const [made] = await db.insert(cards).values(row).$returningId()
    if (made) return made.id
  } catch (error) {
    if (!isDuplicate(error)) throw error
  }
  // Somebody else stored it at this moment.
  const id = await findLike(db, row)
  if (id === null) throw new Error('A card that was just stored is not there.')
  return id
}

/** A stored card, unparsed. */
export async function findCard(db: Queryable, id: number): Promise<unknown> {
  const [row] = await db.select({ card: cards.card }).from(cards).where(eq(cards.id, id))
  return row?.card ?? null
}
