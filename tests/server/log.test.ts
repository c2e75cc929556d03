import { readFileSync } from 'node:fs'
import { asc, eq, sql } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import type { Database } from '#drizzle/client.ts'
import { breakpoint } from '#drizzle/guarded.ts'
import { log, people } from '#drizzle/schema/index.ts'
import { record, verify } from '#server/services/log.ts'
import { freshDatabase } from '#tests/support/database.ts'

let database: Awaited<ReturnType<typeof freshDatabase>>
let db: Database
let actor: number
beforeAll(async () => {
  database = await freshDatabase()
  db = database.db
  const made = { createdAt: new Date('2026-12-01T09:00:00.000Z') }
  const [row] = await db
    .insert(people)
    .values({ email: 'a@example.org', name: 'A', ...made })
    .$returningId()
  actor = row?.id ?? 0
})
afterAll(() => database.close())

const write = (target: string, after?: unknown) =>
  db.transaction((tx) =>
    record(tx, {
      at: new Date('2026-12-01T10:00:00.123Z'),
      personId: actor,
      act: 'test:act',
      target,
      after,
      requestId: null,
    }),
  )
/** Changes the log as somebody can who may change tables: without the triggers that keep it. */
async function unguarded(work: () => Promise<unknown>): Promise<void> {
  await db.execute(sql`drop trigger log_frozen`)
  await db.execute(sql`drop trigger log_kept`)
  await work()
  const file = readFileSync('drizzle/migrations/0001_records_stay.sql', 'utf8')
  for (const statement of file.split(breakpoint)) {
    if (/ (log_frozen|log_kept) /.test(statement)) await db.execute(sql.raw(statement))
  }
}
const rows = () => db.select().from(log).orderBy(asc(log.id))

describe('the log', () => {
  test('chains every row to the one before, also when many acts end at once', async () => {
    await Promise.all(Array.from({ length: 24 }, (_, i) => write(`page ${i}`, { n: i, text: 'ü \n "' })))
    const all = await rows()
    expect(all).toHaveLength(24)
    for (const [i, row] of all.entries()) expect(row.previousHash).toBe(all[i - 1]?.hash ?? '0'.repeat(64))
    expect(await verify(db)).toEqual({ ok: true, rows: 24 })
  })

  test('writes nothing where the act fails', async () => {
    const failing = db.transaction(async (tx) => {
      await record(tx, { at: new Date(), personId: actor, act: 'test:act', target: 'x', requestId: null })
      throw new Error('the act failed')
    })
    await expect(failing).rejects.toThrow('the act failed')
    expect(await verify(db)).toEqual({ ok: true, rows: 24 })
  })

  test('does not care in which order a document’s keys come back', async () => {
    await write('page order', { b: [{ y: 1, x: undefined }], a: null })
    const [last] = (await rows()).slice(-1)
    await unguarded(() =>
      db.execute(sql`update log set after_value = '{"a": null, "b": [{"y": 1}]}' where id = ${last?.id}`),
    )
    expect(await verify(db)).toEqual({ ok: true, rows: 25 })
  })
})

describe('a log that somebody changed is found out', () => {
  type Row = Awaited<ReturnType<typeof rows>>[number]
  const at = async (position: number): Promise<Row> => {
    const row = (await rows())[position]
    if (!row) throw new Error('no such row')
    return row
  }
  const remove = (row: Row) => unguarded(() => db.delete(log).where(eq(log.id, row.id)))
  const restore = async (row: Row) => {
    await remove(row)
    await db.insert(log).values(row)
    expect(await verify(db)).toMatchObject({ ok: true })
  }

  test.each([
    ['the time', { at: new Date('2026-12-01T10:00:00.124Z') }],
    ['the person', { personId: null }],
    ['the act', { act: 'test:other' }],
    ['the target', { target: 'page 999' }],
    ['a value before', { before: { n: 1 } }],
    ['a value after', { after: { n: 'changed' } }],
    ['the request', { requestId: 'other' }],
    ['the hash', { hash: 'f'.repeat(64) }],
  ])('where %s was changed', async (_name, change) => {
    const row = await at(5)
    await unguarded(() => db.update(log).set(change).where(eq(log.id, row.id)))
    expect(await verify(db)).toMatchObject({ ok: false, firstBad: row.id, rows: 5 })
    await restore(row)
  })

  test('where a row was removed', async () => {
    const [row, next] = [await at(5), await at(6)]
    await remove(row)
    expect(await verify(db)).toMatchObject({ ok: false, firstBad: next.id })
    await restore(row)
  })

  test('where a row was put in', async () => {
    const row = await at(24)
    await db.insert(log).values({ ...row, id: row.id + 1, previousHash: row.hash, hash: 'a'.repeat(64) })
    expect(await verify(db)).toMatchObject({ ok: false, firstBad: row.id + 1 })
    await unguarded(() => db.delete(log).where(eq(log.id, row.id + 1)))
  })

  test('where the newest rows were cut off', async () => {
    const row = await at(24)
    await remove(row)
    expect(await verify(db)).toMatchObject({ ok: false, firstBad: null, rows: 24 })
    await restore(row)
  })
})
