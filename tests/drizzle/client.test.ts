import { sql } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { databaseErrorNumber, isDuplicate } from '#drizzle/client.ts'
import { people } from '#drizzle/schema/index.ts'
import { freshDatabase } from '#tests/support/database.ts'

let database: Awaited<ReturnType<typeof freshDatabase>>
beforeAll(async () => {
  database = await freshDatabase()
})
afterAll(() => database.close())

describe('the connection', () => {
  test('runs in UTC, with read committed, strict mode and utf8mb4 whatever the server prefers', async () => {
    const [rows] = await database.db.execute(
      sql`select @@session.time_zone as zone, @@session.tx_isolation as isolation, @@session.sql_mode as mode, @@session.character_set_client as charset`,
    )
    expect(rows).toEqual([
      {
        zone: '+00:00',
        isolation: 'READ-COMMITTED',
        mode: expect.stringContaining('STRICT_TRANS_TABLES'),
        charset: 'utf8mb4',
      },
    ])
  })

  test('keeps a time to the millisecond and in UTC', async () => {
    const createdAt = new Date('2026-03-29T01:30:00.123Z')
    await database.db.insert(people).values({ email: 'time@example.org', name: 'T 🜂', createdAt })
    const [row] = await database.db.select().from(people)
    expect(row?.createdAt.toISOString()).toBe('2026-03-29T01:30:00.123Z')
    expect(row?.name).toBe('T 🜂')
    const [raw] = await database.db.execute(sql`select cast(created_at as char) as text from people`)
    expect(raw).toEqual([{ text: '2026-03-29 01:30:00.123' }])
  })

  test('names a duplicate key through the wrapper of the query builder', async () => {
    const row = { email: 'twice@example.org', name: 'Twice', createdAt: new Date(0) }
    await database.db.insert(people).values(row)
    const error: unknown = await database.db
      .insert(people)
      .values(row)
      .catch((reason: unknown) => reason)
    expect(databaseErrorNumber(error)).toBe(1062)
    expect(isDuplicate(error)).toBe(true)
    expect(databaseErrorNumber(new Error('other'))).toBeNull()
  })

  test('matches nothing when an object is given where a text belongs', async () => {
    // mysql2 once turned object parameters into pieces of SQL (fixed in 3.16.3): `email = {"email":true}` was true everywhere.
    const [rows] = await database.db.execute(sql`select id from people where email = ${{ email: true }}`)
    expect(rows).toEqual([])
  })
})
