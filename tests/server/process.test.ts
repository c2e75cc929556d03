import { type ChildProcess, spawn } from 'node:child_process'
import { once } from 'node:events'
import { mkdtempSync, rmSync } from 'node:fs'
import { connect, createServer } from 'node:net'
import os from 'node:os'
import path from 'node:path'
import { setTimeout as sleep } from 'node:timers/promises'
import { afterAll, afterEach, beforeAll, describe, expect, test } from 'vitest'
import { z } from 'zod'
import { settings } from '#drizzle/schema/index.ts'
import { freshDatabase } from '#tests/support/database.ts'

const root = path.resolve(import.meta.dirname, '../..')
const data = mkdtempSync(path.join(os.tmpdir(), 'brinkbook-process-'))
const running = new Set<ChildProcess>()
let database: Awaited<ReturnType<typeof freshDatabase>>
beforeAll(async () => {
  database = await freshDatabase()
})
afterEach(() => {
  for (const child of running) child.kill('SIGKILL')
  running.clear()
})
afterAll(async () => {
  await database.close()
  rmSync(data, { recursive: true })
})

const portOf = z.object({ port: z.number() })
async function freePort(): Promise<number> {
  const probe = createServer().listen(0, '127.0.0.1')
  await once(probe, 'listening')
  const { port } = portOf.parse(probe.address())
  probe.close()
  await once(probe, 'close')
  return port
}

interface Running {
  child: ChildProcess
  port: number
  address: string
  output: () => string
  ended: Promise<number | null>
}

/** The real server in a process of its own. */
async function start(script: string, environment: Record<string, string> = {}): Promise<Running> {
  const port = await freePort()
  const env = {
    PATH: process.env.PATH,
    NODE_ENV: 'production',
    PORT: String(port),
    DATABASE_URL: database.url,
    BRINKBOOK_DATA: data,
    ...environment,
  }
  const child = spawn(process.execPath, ['--import', 'tsx', script], { cwd: root, env, stdio: 'pipe' })
  running.add(child)
  let text = ''
  child.stdout?.on('data', (chunk) => {
    text += String(chunk)
  })
  child.stderr?.on('data', (chunk) => {
    text += String(chunk)
  })
  const ended = once(child, 'exit').then(([code]) => (typeof code === 'number' ? code : null))
  return { child, port, address: `http://127.0.0.1:${port}`, output: () => text, ended }
}

async function startServer(environment: Record<string, string> = {}): Promise<Running> {
  const server = await start('server/index.ts', environment)
  for (let i = 0; i < 400 && !server.output().includes('"listening"'); i++) {
    if (server.child.exitCode !== null) throw new Error(server.output())
    await sleep(50)
  }
  return server
}

describe('the server process', () => {
  test('listens on loopback only, is ready, and ends with 0 on SIGTERM and SIGINT', async () => {
    for (const signal of ['SIGTERM', 'SIGINT'] as const) {
      const server = await startServer()
      expect((await fetch(`${server.address}/healthz`)).status).toBe(200)
      expect((await fetch(`${server.address}/readyz`)).status).toBe(200)
      const elsewhere = connect(server.port, '127.0.0.2')
      const [error] = await once(elsewhere, 'error')
      expect(error).toMatchObject({ code: 'ECONNREFUSED' })
      server.child.kill(signal)
      expect(await server.ended).toBe(0)
      expect(server.output()).toContain('"clean":true')
    }
  })

  test('answers what is under way before it ends, and takes nothing new', async () => {
    const server = await startServer()
    const slow = connect(server.port, '127.0.0.1')
    await once(slow, 'connect')
    const body = '{"email":"nobody@example.org","password":"x"}'
    slow.write(
      `POST /api/v1/session HTTP/1.1\r\nHost: x\r\nOrigin: ${server.address}\r\nContent-Type: application/json\r\n`,
    )
    slow.write(`Content-Length: ${body.length}\r\n\r\n{`)
    await sleep(300)
    server.child.kill('SIGTERM')
    await sleep(300)
    await expect(fetch(`${server.address}/healthz`)).rejects.toThrow()
    slow.write(body.slice(1))
    const [answer] = await once(slow, 'data')
    expect(String(answer)).toMatch(/^HTTP\/1\.1 401 /)
    expect(await server.ended).toBe(0)
  })

  test('a second signal does not wait', async () => {
    const server = await startServer()
    const open = connect(server.port, '127.0.0.1')
    open.on('error', () => undefined)
    await once(open, 'connect')
    open.write('POST /api/v1/session HTTP/1.1\r\nHost: x\r\nContent-Length: 10\r\n\r\n')
    await sleep(300)
    server.child.kill('SIGTERM')
    await sleep(200)
    expect(server.child.exitCode).toBeNull()
    server.child.kill('SIGTERM')
    expect(await server.ended).toBe(1)
  })

  test('a port that is taken: names PORT and stops with 78, which is not tried again', async () => {
    const first = await startServer()
    const second = await start('server/index.ts', { PORT: String(first.port) })
    expect(await second.ended).toBe(78)
    expect(second.output()).toContain(`PORT: ${first.port} is taken`)
  })

  test('a bad configuration: names every variable and stops with 78', async () => {
    const server = await start('server/index.ts', { PORT: 'http', DATABASE_URL: 'none', SESSION_SECRET: 'short' })
    expect(await server.ended).toBe(78)
    expect(server.output()).toMatch(/PORT must be[\s\S]*DATABASE_URL must look/)
  })

  test('is not ready on tables that are behind, and says no more than that', async () => {
    const server = await startServer()
    await database.db.execute('update __drizzle_migrations set hash = reverse(hash)')
    const answer = await fetch(`${server.address}/readyz`)
    await database.db.execute('update __drizzle_migrations set hash = reverse(hash)')
    expect(answer.status).toBe(503)
    expect(await answer.text()).toBe('not ready\n')
    expect((await fetch(`${server.address}/readyz`)).status).toBe(200)
  })

  test('demonstration accounts never leave this machine', async () => {
    const value = { password: 'public', people: [{ name: 'Demo', email: 'demo@example.org', role: 'reader' }] }
    await database.db.insert(settings).values({ name: 'demonstration', value })
    const open = await start('server/index.ts', { BRINKBOOK_PUBLIC_URL: 'https://library.example.org' })
    expect(await open.ended).toBe(78)
    expect(open.output()).toContain('BRINKBOOK_PUBLIC_URL')
    const local = await startServer()
    const answer: unknown = await (await fetch(`${local.address}/api/v1/session`)).json()
    expect(answer).toEqual({ me: null, demonstration: value })
    await database.db.delete(settings)
  })
})

describe('the thin commands', () => {
  test('db:migrate may be run on tables that are up to date', async () => {
    const command = await start('server/cli/migrate.ts')
    expect(await command.ended).toBe(0)
    expect(command.output()).toBe('The tables are up to date.\n')
  })

  test('log:verify says that the log is whole, or where it is not', async () => {
    const whole = await start('server/cli/log-verify.ts')
    expect(await whole.ended).toBe(0)
    expect(whole.output()).toMatch(/^The log is whole: \d+ rows\.\n$/)
    await database.db.execute(
      "insert into log (at, act, target, previous_hash, hash) values (now(3), 'forged', 'x', 'x', 'x')",
    )
    const forged = await start('server/cli/log-verify.ts')
    expect(await forged.ended).toBe(1)
    expect(forged.output()).toMatch(/^The log was changed\. After \d+ good rows, row \d+: /)
  })
})
