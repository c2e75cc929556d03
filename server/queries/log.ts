import { asc, eq, gt, sql } from 'drizzle-orm'
import type { Queryable } from '#drizzle/client.ts'
import { log, people, settings } from '#drizzle/schema/index.ts'

const tipName = 'log-tip'

/** Locks the chain's tip until the transaction ends, so that two acts cannot follow the same row; its value as stored. */
export async function lockTip(tx: Queryable, first: unknown): Promise<unknown> {
  const read = () => tx.select({ value: settings.value }).from(settings).where(eq(settings.name, tipName)).for('update')
  const [row] = await read()
  if (row) return row.value
  await tx
    .insert(settings)
    .values({ name: tipName, value: first })
    .onDuplicateKeyUpdate({ set: { name: sql`name` } })
  const [made] = await read()
  return made?.value
}

/** Keeps the person's row from being changed until the transaction ends. */
export async function holdPerson(tx: Queryable, personId: number): Promise<void> {
  // MariaDB knows no FOR SHARE, which the query builder would write.
  await tx.execute(sql`select 1 from ${people} where ${people.id} = ${personId} lock in share mode`)
}

export async function readTip(db: Queryable): Promise<unknown> {
  const [row] = await db.select({ value: settings.value }).from(settings).where(eq(settings.name, tipName))
  return row?.value
}

export async function moveTip(tx: Queryable, value: unknown): Promise<void> {
  await tx.update(settings).set({ value }).where(eq(settings.name, tipName))
}

export async function insert(tx: Queryable, row: typeof log.$inferInsert): Promise<void> {
  await tx.insert(log).values(row)
}

/** The next rows of the log after an id, in order. */
export async function listAfter(db: Queryable, id: number, limit: number) {
  return db.select().from(log).where(gt(log.id, id)).orderBy(asc(log.id)).limit(limit)
}
