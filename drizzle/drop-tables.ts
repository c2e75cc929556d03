import { z } from 'zod'
import type { Database } from './client.ts'

/** Removes every table of the database, with all rows and triggers. Needs a user who may change tables. */
export async function dropTables(db: Database): Promise<void> {
  // Foreign keys are checked for one connection: the drops have to run on the same one.
  const connection = await db.$client.promise().getConnection()
  try {
    const [rows] = await connection.query(
      "SELECT table_name AS name FROM information_schema.tables WHERE table_schema = DATABASE() AND table_type = 'BASE TABLE'",
    )
    const names = z.array(z.object({ name: z.string() })).parse(rows)
    await connection.query('SET SESSION foreign_key_checks = 0')
    try {
      for (const { name } of names) await connection.query('DROP TABLE IF EXISTS ??', [name])
    } finally {
      await connection.query('SET SESSION foreign_key_checks = 1')
    }
  } finally {
    connection.release()
  }
}
