import { and, eq, lt } from 'drizzle-orm'
import type { Queryable } from '#drizzle/client.ts'
import { idempotencyKeys } from '#drizzle/schema/index.ts'

type Row = typeof idempotencyKeys.$inferInsert

const of = (personId: number, key: string) => and(eq(idempotencyKeys.personId, personId), eq(idempotencyKeys.key, key))

export async function insert(db: Queryable, row: Row): Promise<void> {
  await db.insert(idempotencyKeys).values(row)
}

export async function find(db: Queryable, personId: number, key: string) {
  const [row] = await db.select().from(idempotencyKeys).where(of(personId, key)).limit(1)
  return row ?? null
}

export async function finish(
  db: Queryable,
  personId: number,
  key: string,
  answer: { status: number; answer: unknown },
): Promise<void> {
  await db.update(idempotencyKeys).set(answer).where(of(personId, key))
}

export async function remove(db: Queryable, personId: number, key: string): Promise<void> {
  await db.delete(idempotencyKeys).where(of(personId, key))
}

export async function removeBefore(db: Queryable, personId: number, time: Date): Promise<void> {
  await db
    .delete(idempotencyKeys)
    .where(and(eq(idempotencyKeys.personId, personId), lt(idempotencyKeys.createdAt, time)))
}
