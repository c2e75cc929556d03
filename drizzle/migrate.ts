import { fileURLToPath } from 'node:url'
import { is, sql } from 'drizzle-orm'
import { readMigrationFiles } from 'drizzle-orm/migrator'
import { getTableConfig, MySqlTable } from 'drizzle-orm/mysql-core'
import { migrate as runMigrations } from 'drizzle-orm/mysql2/migrator'
import { z } from 'zod'
import { type Database, databaseErrorNumber } from './client.ts'
import { dropTables, listTables } from './drop-tables.ts'
import { withNamedLock } from './named-lock.ts'
import * as schema from './schema/index.ts'

const migrationsFolder = fileURLToPath(new URL('./migrations', import.meta.url))
const migrationsTable = '__drizzle_migrations'
/** Another process may be changing the tables; that long it is waited for, in seconds. */
const patience = 60

/** Tables that this code did not make and does not touch. */
export class OtherTables extends Error {
  override readonly name = 'OtherTables'
}

/** Hashes of the migrations that have run, in their order. */
async function applied(db: Database): Promise<string[]> {
  try {
    const [rows] = await db.execute(sql`select hash from ${sql.identifier(migrationsTable)} order by created_at, id`)
    return z
      .array(z.object({ hash: z.string() }))
      .parse(rows)
      .map((row) => row.hash)
  } catch (error) {
    if (databaseErrorNumber(error) === 1146) return []
    throw error
  }
}

let read: string[] | undefined
/** Hashes of the migrations this code knows, in their order. Read once: the files of a newer version are not this code's. */
function known(): string[] {
  read ??= readMigrationFiles({ migrationsFolder }).map((migration) => migration.hash)
  return read
}

/**
 * Brings the tables to this code's state. Two processes that start at once do not collide: one waits for the other.
 * Safe after a start that was cut off anywhere: a first migration that did not end is begun anew, a later one is run again
 * from its beginning (every statement may run twice, guarded.ts). Needs a user who may change tables.
 *
 * @throws {OtherTables} where the tables were made by other migrations than this code's; then nothing was changed.
 * @throws {Error} if the lock is not given within a minute, or a statement fails (MariaDB does not roll tables back).
 */
export async function migrate(db: Database): Promise<void> {
  await withNamedLock(db, 'migrate', patience, async () => {
    const done = await applied(db)
    const ours = known()
    if (done.some((hash, position) => hash !== ours[position])) {
      throw new OtherTables(
        'The tables of this database were made by another version of Brinkbook, whose migrations this one does not know. Nothing was changed. Start the version that made them, or choose another database or BRINKBOOK_DATA.',
      )
    }
    if (done.length === 0) await clearRemains(db)
    await runMigrations(db, { migrationsFolder, migrationsTable })
  })
}

/** Tables without a finished migration are what a start left that was cut off: nothing has ever been written to them. */
async function clearRemains(db: Database): Promise<void> {
  const found = (await listTables(db)).filter((name) => name !== migrationsTable)
  const ours = new Set(
    Object.values(schema).flatMap((table) => (is(table, MySqlTable) ? getTableConfig(table).name : [])),
  )
  for (const name of found) {
    if (ours.has(name) && (await isEmpty(db, name))) continue
    throw new OtherTables(
      `The database holds a table ${name} that Brinkbook did not make. Nothing was changed. Choose a database of its own, or another BRINKBOOK_DATA.`,
    )
  }
  if (found.length > 0) await dropTables(db)
}

async function isEmpty(db: Database, table: string): Promise<boolean> {
  const [rows] = await db.execute(sql`select 1 from ${sql.identifier(table)} limit 1`)
  return z.array(z.unknown()).parse(rows).length === 0
}

/** True where every migration this code knows has run. A newer version may have run more. */
export async function isMigrated(db: Database): Promise<boolean> {
  const done = await applied(db)
  return known().every((hash, position) => hash === done[position])
}
