import { randomBytes } from 'node:crypto'
import mysql from 'mysql2/promise'
import { inject } from 'vitest'
import { createDatabase } from '#drizzle/client.ts'
import { migrate } from '#drizzle/migrate.ts'

/** A migrated database of this test file's own; `close` drops it. */
export async function freshDatabase() {
  const admin = new URL(inject('databaseUrl'))
  const name = `test_${randomBytes(6).toString('hex')}`
  const connection = await mysql.createConnection(admin.href)
  await connection.query(`CREATE DATABASE ${name} CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci`)
  await connection.end()
  const url = new URL(admin)
  url.pathname = `/${name}`
  const database = createDatabase(url.href)
  await migrate(database.db)
  return {
    ...database,
    url: url.href,
    close: async () => {
      await database.close()
      const last = await mysql.createConnection(admin.href)
      await last.query(`DROP DATABASE ${name}`)
      await last.end()
    },
  }
}
