import { chmodSync, mkdtempSync, rmSync } from 'node:fs'
import os from 'node:os'
import path from 'node:path'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { pages } from '#drizzle/seed/demonstration.ts'
import { findDemonstration } from '#server/services/demonstration.ts'
import { findLink } from '#server/services/links.ts'
import { freshDatabase } from '#tests/support/database.ts'
import { runScript, startScript } from '#tests/support/script.ts'

type Fresh = Awaited<ReturnType<typeof freshDatabase>>

const data = mkdtempSync(path.join(os.tmpdir(), 'brinkbook-cli-'))
chmodSync(data, 0o755)
afterAll(() => rmSync(data, { recursive: true }))

const prepareWith = (url: string, args: string[] = [], environment: Record<string, string> = {}) =>
  startScript('server/cli/prepare.ts', args, { DATABASE_URL: url, BRINKBOOK_DATA: data, PORT: '4711', ...environment })
async function prepared(...given: Parameters<typeof prepareWith>) {
  const script = prepareWith(...given)
  return { code: await script.ended, output: script.output() }
}

async function count(fresh: Fresh, table: string): Promise<number> {
  const [rows] = await fresh.pool.promise().query('SELECT COUNT(*) AS n FROM ??', [table])
  return Array.isArray(rows) && rows[0] && 'n' in rows[0] ? Number(rows[0].n) : Number.NaN
}

describe('preparing an empty database', () => {
  let fresh: Fresh
  beforeAll(async () => {
    fresh = await freshDatabase()
  })
  afterAll(() => fresh.close())

  test('a load that was killed in the middle is begun anew, and nothing is there twice', async () => {
    const killed = prepareWith(fresh.url)
    await killed.says(/\(3 of 12\)/)
    killed.child.kill('SIGKILL')
    expect(await killed.ended).toBeNull()
    expect(await findDemonstration(fresh.db)).toBeNull()
    expect(await count(fresh, 'pages')).toBeGreaterThan(2)

    const again = await prepared(fresh.url)
    expect(again.output).toMatch(/loaded only in part; it is begun anew/)
    expect(again.output).toMatch(/\(12 of 12\)/)
    expect(again.code).toBe(0)
    expect(await count(fresh, 'pages')).toBe(pages.length)
    expect(await count(fresh, 'people')).toBe(10)
    expect(await count(fresh, 'groups')).toBe(8)
  })

  test('a second start tells the accounts again and changes no row', async () => {
    const tables = ['people', 'memberships', 'pages', 'revisions', 'signatures', 'cards', 'log', 'one_time_links']
    const before = await Promise.all(tables.map((table) => count(fresh, table)))
    const second = await prepared(fresh.url, ['--empty'])
    expect(second.code).toBe(0)
    expect(second.output).not.toMatch(/Loading/)
    expect(second.output).toMatch(/--empty is for a new one/)
    expect(second.output).toMatch(/slow ramp to the brink/)
    expect(second.output).toMatch(/orla@skellbeck\.example +Orla Tindlemoor, administrator/)
    expect(second.output).not.toMatch(/setup/)
    expect(await Promise.all(tables.map((table) => count(fresh, table)))).toEqual(before)
  })

  test('the seed command leaves a loaded library as it is', async () => {
    const { code, output } = await runScript('server/cli/seed.ts', [], { DATABASE_URL: fresh.url })
    expect({ code, output }).toEqual({ code: 0, output: 'The demonstration library is there already.\n' })
  })

  test('the log of the loaded library is whole, and a changed row is found', async () => {
    const verify = () => runScript('server/cli/log-verify.ts', [], { DATABASE_URL: fresh.url })
    expect(await verify()).toEqual({ code: 0, output: `The log is whole: ${await count(fresh, 'log')} rows.\n` })
    // The database keeps the log by itself, until somebody who may change tables takes that away.
    await expect(fresh.pool.promise().query("UPDATE log SET target = ''")).rejects.toThrow('only ever added to')
    await fresh.pool.promise().query('DROP TRIGGER log_frozen')
    await fresh.pool.promise().query("UPDATE log SET target = 'page WNG-02' WHERE id = 60")
    const changed = await verify()
    expect(changed.code).toBe(1)
    expect(changed.output).toMatch(/row 60: Its content is not what was written/)
  })
})

describe('beginning without demonstration data', () => {
  let fresh: Fresh
  beforeAll(async () => {
    fresh = await freshDatabase()
  })
  afterAll(() => fresh.close())

  const tokenIn = (output: string) => /http:\/\/127\.0\.0\.1:4711\/setup\/([\w-]{43})\n/.exec(output)?.[1] ?? ''

  test('prints a set-up link; the next start replaces it and still loads nothing', async () => {
    const first = await prepared(fresh.url, ['--empty'])
    expect(first.code).toBe(0)
    await findLink(fresh.db, 'setup', tokenIn(first.output), new Date())

    const second = await prepared(fresh.url)
    expect(second.output).toMatch(/begun without demonstration data/)
    await findLink(fresh.db, 'setup', tokenIn(second.output), new Date())
    await expect(findLink(fresh.db, 'setup', tokenIn(first.output), new Date())).rejects.toMatchObject({
      code: 'link-used',
    })
    expect(await count(fresh, 'people')).toBe(0)
    const seed = await runScript('server/cli/seed.ts', [], { DATABASE_URL: fresh.url })
    expect(seed.code).toBe(1)
    expect(seed.output).toMatch(/nothing was changed/)
  })

  test('two at once wait for each other: one link is good in the end', async () => {
    const both = await Promise.all([prepared(fresh.url, ['--empty']), prepared(fresh.url, ['--empty'])])
    expect(both.map(({ code }) => code)).toEqual([0, 0])
    const good = await Promise.allSettled(
      both.map(({ output }) => findLink(fresh.db, 'setup', tokenIn(output), new Date())),
    )
    expect(good.map(({ status }) => status).sort()).toEqual(['fulfilled', 'rejected'])
  })
})

describe('what is refused', () => {
  test('demonstration accounts where other machines reach the library', async () => {
    const fresh = await freshDatabase()
    const open = { BRINKBOOK_PUBLIC_URL: 'https://library.example' }
    const refused = await prepared(fresh.url, [], open)
    expect(refused.code).toBe(78)
    expect(refused.output).toMatch(/BRINKBOOK_PUBLIC_URL/)
    expect(refused.output).toMatch(/npm start -- --empty/)
    expect(await count(fresh, 'people')).toBe(0)
    const allowed = await prepared(fresh.url, ['--empty'], open)
    expect(allowed.code).toBe(0)
    expect(allowed.output).toMatch(/https:\/\/library\.example\/setup\/[\w-]{43}/)
    await fresh.close()
  })

  test.each(['prepare', 'migrate', 'seed', 'log-verify'])('%s without DATABASE_URL, by its name', async (name) => {
    const { code, output } = await runScript(`server/cli/${name}.ts`, [], { BRINKBOOK_DATA: data })
    expect(code).toBe(78)
    expect(output).toMatch(/DATABASE_URL/)
  })

  test('a library that was loaded in part and used since is not cleared', async () => {
    const fresh = await freshDatabase()
    const connection = fresh.pool.promise()
    await connection.query("INSERT INTO settings (name, value) VALUES ('demonstration-loading', '{}')")
    await connection.query("INSERT INTO people (email, name, created_at) VALUES ('a@example.org', 'A', NOW())")
    await connection.query(
      "INSERT INTO sign_ins (person_id, session_hash, at, last_seen) VALUES (1, 'x', NOW(), NOW())",
    )
    const { code, output } = await prepared(fresh.url)
    expect(code).toBe(78)
    expect(output).toMatch(/has been used since/)
    expect(await count(fresh, 'people')).toBe(1)
    await fresh.close()
  })
})

test('two migrations at once leave one set of tables', async () => {
  const fresh = await freshDatabase()
  const both = [1, 2].map(() => runScript('server/cli/migrate.ts', [], { DATABASE_URL: fresh.url }))
  for (const { code, output } of await Promise.all(both)) {
    expect({ code, output }).toEqual({ code: 0, output: 'The tables are up to date.\n' })
  }
  await fresh.close()
})
