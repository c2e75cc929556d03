import { spawn } from 'node:child_process'
import { randomBytes } from 'node:crypto'
import { once } from 'node:events'
import { readdirSync, readFileSync } from 'node:fs'
import { setTimeout as sleep } from 'node:timers/promises'
import { sql } from 'drizzle-orm'
import mysql from 'mysql2/promise'
import { afterAll, beforeAll, describe, expect, inject, test } from 'vitest'
import { z } from 'zod'
import { createDatabase, type Database } from '#drizzle/client.ts'
import { breakpoint, guarded, mayRunTwice } from '#drizzle/guarded.ts'
import { isMigrated, migrate, OtherTables } from '#drizzle/migrate.ts'
import { people } from '#drizzle/schema/index.ts'
import { freshDatabase } from '#tests/support/database.ts'
import { newSeed, randomFrom } from '#tests/support/random.ts'

const folder = 'drizzle/migrations'
const files = readdirSync(folder).filter((name) => name.endsWith('.sql'))
const statementsOf = (name: string) => readFileSync(`${folder}/${name}`, 'utf8').split(breakpoint)

/** An empty database of the test's own. */
async function emptyDatabase() {
  const url = new URL(inject('databaseUrl'))
  const name = `test_${randomBytes(6).toString('hex')}`
  const connection = await mysql.createConnection(url.href)
  // As a raw server would make it: the migrations must not rely on the database's own character set.
  await connection.query(`CREATE DATABASE ${name} CHARACTER SET latin1`)
  url.pathname = `/${name}`
  const database = createDatabase(url.href)
  return {
    ...database,
    url: url.href,
    close: async () => {
      await database.close()
      await connection.query(`DROP DATABASE ${name}`)
      await connection.end()
    },
  }
}

const named = z.array(z.object({ name: z.string() }))
const first = z.array(z.record(z.string(), z.unknown())).transform((rows) => rows[0] ?? {})

/** Every table and trigger as the database itself writes them down. */
async function schemaOf(db: Database): Promise<string[]> {
  const [tables] = await db.execute(
    sql`select table_name as name from information_schema.tables where table_schema = database() order by table_name`,
  )
  const texts: string[] = []
  for (const { name } of named.parse(tables)) {
    const [rows] = await db.execute(sql.raw(`show create table \`${name}\``))
    const text = String(first.parse(rows)['Create Table']).replace(/ AUTO_INCREMENT=\d+/, '')
    // The migrator's own table has the database's character set.
    texts.push(name === '__drizzle_migrations' ? text.replace(/\) ENGINE.*/, ')') : text)
  }
  const [triggers] = await db.execute(
    sql`select concat(trigger_name, ' ', event_manipulation, ' ', event_object_table, ' ', action_statement) as name
      from information_schema.triggers where trigger_schema = database() order by trigger_name`,
  )
  return [...texts, ...named.parse(triggers).map(({ name }) => name)]
}

let fresh: Awaited<ReturnType<typeof freshDatabase>>
let wanted: string[]
beforeAll(async () => {
  fresh = await freshDatabase()
  wanted = await schemaOf(fresh.db)
})
afterAll(() => fresh.close())

describe('migrations', () => {
  test('say whether the tables are at this code’s state', async () => {
    expect(await isMigrated(fresh.db)).toBe(true)
    await fresh.db.execute(sql`update __drizzle_migrations set hash = reverse(hash)`)
    expect(await isMigrated(fresh.db)).toBe(false)
    await fresh.db.execute(sql`update __drizzle_migrations set hash = reverse(hash)`)
    const empty = await emptyDatabase()
    expect(await isMigrated(empty.db)).toBe(false)
    await empty.close()
  })

  test('may be run again and by several processes at once without effect', async () => {
    await Promise.all([migrate(fresh.db), migrate(fresh.db), migrate(fresh.db)])
    expect(await isMigrated(fresh.db)).toBe(true)
    const [rows] = await fresh.db.execute(
      sql`select count(*) as n, count(distinct hash) as kinds from __drizzle_migrations`,
    )
    expect(rows).toEqual([{ n: files.length, kinds: files.length }])
  })

  test('name engine, character set and collation of every table, whatever the server prefers', async () => {
    const empty = await emptyDatabase()
    await migrate(empty.db)
    const [rows] = await empty.db.execute(
      sql`select distinct engine, table_collation as collation from information_schema.tables
        where table_schema = database() and table_name <> '__drizzle_migrations'`,
    )
    expect(rows).toEqual([{ engine: 'InnoDB', collation: 'utf8mb4_unicode_ci' }])
    const [columns] = await empty.db.execute(
      sql`select table_name as name from information_schema.columns
        where table_schema = database() and table_name <> '__drizzle_migrations'
        and character_set_name not in ('utf8mb4')`,
    )
    expect(columns).toEqual([])
    await empty.close()
  })

  test('consist of statements that may run twice, and running all of them twice changes nothing', async () => {
    for (const file of files) {
      expect(guarded(readFileSync(`${folder}/${file}`, 'utf8'))).toBe(readFileSync(`${folder}/${file}`, 'utf8'))
      for (const statement of statementsOf(file)) {
        expect(mayRunTwice(statement), statement).toBe(true)
        await fresh.db.execute(sql.raw(statement))
      }
    }
    expect(await schemaOf(fresh.db)).toEqual(wanted)
  })
})

describe('the guards', () => {
  // As drizzle-kit writes them, from the migrations it wrote of this schema and of changes to it.
  test.each([
    [
      'CREATE TABLE `a` (\n\t`b` int\n);',
      'CREATE TABLE IF NOT EXISTS `a` (\n\t`b` int\n) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;',
    ],
    ['ALTER TABLE `a` ADD `b` json;', 'ALTER TABLE `a` ADD COLUMN IF NOT EXISTS `b` json;'],
    ['ALTER TABLE `a` DROP COLUMN `b`;', 'ALTER TABLE `a` DROP COLUMN IF EXISTS `b`;'],
    ['ALTER TABLE `a` MODIFY COLUMN `b` json NOT NULL;', 'ALTER TABLE `a` MODIFY COLUMN `b` json NOT NULL;'],
    [
      'ALTER TABLE `a` ADD CONSTRAINT `c` FOREIGN KEY (`b`) REFERENCES `d`(`id`);',
      'ALTER TABLE `a` ADD CONSTRAINT `c` FOREIGN KEY IF NOT EXISTS (`b`) REFERENCES `d`(`id`);',
    ],
    ['ALTER TABLE `a` ADD CONSTRAINT `c` UNIQUE(`b`);', 'ALTER TABLE `a` ADD UNIQUE INDEX IF NOT EXISTS `c` (`b`);'],
    ['ALTER TABLE `a` DROP FOREIGN KEY `c`;', 'ALTER TABLE `a` DROP FOREIGN KEY IF EXISTS `c`;'],
    ['CREATE INDEX `c` ON `a` (`b`);', 'CREATE INDEX IF NOT EXISTS `c` ON `a` (`b`);'],
    ['DROP INDEX `c` ON `a`;', 'DROP INDEX IF EXISTS `c` ON `a`;'],
    ['DROP TABLE `a`;', 'DROP TABLE IF EXISTS `a`;'],
  ])('%s', (written, safe) => {
    expect(guarded(written)).toBe(safe)
    expect(guarded(safe)).toBe(safe)
  })

  test('refuse what they have no guard for', () => {
    expect(() => guarded('ALTER TABLE `a` ADD PRIMARY KEY(`b`);')).toThrow('may not run twice')
    expect(() => guarded('CREATE TRIGGER t BEFORE UPDATE ON a FOR EACH ROW SET NEW.b = 1;')).toThrow(
      'may not run twice',
    )
  })

  test('are MariaDB’s own: each of these runs twice', async () => {
    const { db, close } = await emptyDatabase()
    const written = [
      'CREATE TABLE `d` (\n\t`id` bigint NOT NULL,\n\tPRIMARY KEY(`id`)\n);',
      'CREATE TABLE `a` (\n\t`b` bigint\n);',
      'ALTER TABLE `a` ADD `e` json;',
      'ALTER TABLE `a` ADD CONSTRAINT `c` FOREIGN KEY (`b`) REFERENCES `d`(`id`);',
      'ALTER TABLE `a` ADD CONSTRAINT `u` UNIQUE(`b`);',
      'CREATE INDEX `i` ON `a` (`b`);',
      'DROP INDEX `i` ON `a`;',
      'ALTER TABLE `a` DROP FOREIGN KEY `c`;',
      'ALTER TABLE `a` DROP COLUMN `e`;',
      'DROP TABLE `a`;',
    ]
    for (const statement of written) {
      await db.execute(sql.raw(guarded(statement)))
      await db.execute(sql.raw(guarded(statement)))
    }
    await close()
  })
})

describe('a migration that was cut off', () => {
  const amount = z.array(z.object({ n: z.number() })).transform((rows) => rows[0]?.n ?? 0)
  /** Tables, constraints and triggers that are there by now. */
  async function made(db: Database): Promise<number> {
    const [rows] = await db.execute(sql`select
      (select count(*) from information_schema.tables where table_schema = database()) +
      (select count(*) from information_schema.referential_constraints where constraint_schema = database()) +
      (select count(*) from information_schema.triggers where trigger_schema = database()) as n`)
    return amount.parse(rows)
  }

  test('by kill -9 at random moments heals itself at the next start, also when that is killed again', async () => {
    let target = await emptyDatabase()
    const seed = newSeed()
    const random = randomFrom(seed)
    console.log(`SEED=${seed}`)
    // 23 tables, 33 foreign keys and 12 triggers.
    const whole = await made(fresh.db)
    expect(whole).toBeGreaterThan(60)
    let kills = 0
    const rounds = 6
    // A run that ended before its moment came leaves nothing to kill: it is taken back and tried again.
    for (let tries = 0; kills < rounds && tries < 40; tries++) {
      const { db, url } = target
      const round = kills
      const moment = 1 + Math.floor(((round + random()) / rounds) * (whole - 1))
      const child = spawn(process.execPath, ['--import', 'tsx', 'server/cli/migrate.ts'], {
        env: { PATH: process.env.PATH, DATABASE_URL: url },
        stdio: 'ignore',
      })
      const ended = once(child, 'exit')
      // It first drops what the one before left, so only a rise through the moment counts.
      let before = whole
      for (
        let now = await made(db);
        child.exitCode === null && !(before < moment && now >= moment);
        now = await made(db)
      ) {
        before = now
        await sleep(1)
      }
      child.kill('SIGKILL')
      const [, signal] = await ended
      if (signal === 'SIGKILL') kills++
      else {
        await target.close()
        target = await emptyDatabase()
      }
    }
    expect(kills).toBe(rounds)
    const { db, close } = target
    await migrate(db)
    expect(await isMigrated(db)).toBe(true)
    expect(await schemaOf(db)).toEqual(wanted)
    await close()
  })

  test('after the first one is run again from its beginning, and what people wrote stays', async () => {
    const { db, close } = await emptyDatabase()
    await migrate(db)
    await db.insert(people).values({ email: 'kept@example.org', name: 'Kept', createdAt: new Date(0) })
    await db.execute(sql`delete from __drizzle_migrations order by id desc limit 1`)
    await db.execute(sql`drop trigger log_kept`)
    expect(await isMigrated(db)).toBe(false)
    await migrate(db)
    expect(await isMigrated(db)).toBe(true)
    expect(await schemaOf(db)).toEqual(wanted)
    expect(await db.select({ name: people.name }).from(people)).toEqual([{ name: 'Kept' }])
    await close()
  })
})

describe('tables that this code did not make', () => {
  test('with other migrations, older or newer, are refused in words and left alone', async () => {
    const { db, close } = await emptyDatabase()
    await migrate(db)
    await db.execute(
      sql`insert into __drizzle_migrations (hash, created_at) values ('of a newer version', 9999999999999)`,
    )
    await expect(migrate(db)).rejects.toThrow(OtherTables)
    // A newer version's tables hold what this one needs: its processes go on while they are replaced.
    expect(await isMigrated(db)).toBe(true)
    await db.execute(sql`update __drizzle_migrations set hash = concat('another ', id)`)
    await expect(migrate(db)).rejects.toThrow('another version of Brinkbook')
    expect((await schemaOf(db)).length).toBe(wanted.length)
    await close()
  })

  test('of something else, or with rows in them, are never dropped', async () => {
    const { db, close } = await emptyDatabase()
    await db.execute(sql`create table invoices (id int)`)
    await expect(migrate(db)).rejects.toThrow('a table invoices that Brinkbook did not make')
    await db.execute(sql`drop table invoices`)
    await db.execute(sql`create table people (id int)`)
    await db.execute(sql`insert into people values (1)`)
    await expect(migrate(db)).rejects.toThrow(OtherTables)
    const [rows] = await db.execute(sql`select id from people`)
    expect(rows).toEqual([{ id: 1 }])
    await db.execute(sql`delete from people`)
    await migrate(db)
    expect(await schemaOf(db)).toEqual(wanted)
    await close()
  })
})
