import { z } from 'zod'
import type { Database } from './client.ts'

/** Names of the database's tables. */
export async function listTables(db: Database): Promise<string[]> {
  const [rows] = await db.$client
    .promise()
    .query(
      "SELECT table_name AS name FROM information_schema.tables WHERE table_schema = DATABASE() AND table_type = 'BASE TABLE' ORDER BY table_name",
    )
  return z
    .array(z.object({ name: z.string() }))
    .parse(rows)
    .map((row) => row.name)
}

/** Removes every table of the database, with all rows and triggers. Needs a user who may change tables. */
export async function dropTables(db: Database): Promise<void> {
  const names = await listTables(db)
  // Foreign keys are checked for one connection: the drops have to run on the same one.
  const connection = await db.$client.promise().getConnection()
  try {
    await connection.query('SET SESSION foreign_key_checks = 0')
    try {
      for (const name of names) await connection.query('DROP TABLE IF EXISTS ??', [name])
    } finally {
      await connection.query('SET SESSION foreign_key_checks = 1')
    }
  } finally {
    connection.release()
  }
}
