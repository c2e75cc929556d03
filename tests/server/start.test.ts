import { chmodSync, existsSync, mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import os from 'node:os'
import path from 'node:path'
import { setTimeout as sleep } from 'node:timers/promises'
import mysql from 'mysql2/promise'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { z } from 'zod'
import { freePort, holdPort, runScript, type Script, startScript, watchDatabase } from '#tests/support/script.ts'

const script = 'server/cli/start.mjs'
const isRoot = process.getuid?.() === 0

describe('npm start refuses', () => {
  test.each(['abc', '0', '65536', '22.5', '-1', '4180 '])('PORT=%s, by its name', async (PORT) => {
    const { code, output } = await runScript(script, [], { PORT })
    expect(code).toBe(1)
    expect(output).toContain(`PORT is "${PORT}"`)
  })

  test('a port that is taken, and proposes another', async () => {
    const held = await holdPort()
    const { code, output } = await runScript(script, [], { PORT: String(held.port) })
    await held.close()
    expect(code).toBe(1)
    expect(output).toContain(`PORT ${held.port} is taken`)
    expect(output).toMatch(/PORT=\d+ npm start/)
  })

  test('an option that it does not know', async () => {
    const { code, output } = await runScript(script, ['--emtpy'])
    expect(code).toBe(1)
    expect(output).toContain('There is no option --emtpy')
  })

  test('a data directory that cannot be made, or that the database cannot enter', async () => {
    const closed = mkdtempSync(path.join(os.tmpdir(), 'brinkbook-closed-'))
    const file = path.join(closed, 'file')
    writeFileSync(file, '')
    // Root starts the database as another user; anybody else as themselves, who may enter their own folder.
    const cases = { [file]: /cannot be made/, ...(isRoot ? { [closed]: /mysql, which cannot enter/ } : {}) }
    for (const [folder, reason] of Object.entries(cases)) {
      const environment = { PORT: String(await freePort()), BRINKBOOK_DATA: path.join(folder, 'data') }
      const { code, output } = await runScript(script, [], environment)
      expect(code).toBe(1)
      expect(output).toMatch(reason)
      expect(output).toContain(folder)
      expect(output).toContain('BRINKBOOK_DATA')
    }
    rmSync(closed, { recursive: true })
  })
})

const isThere = (pid: number): boolean => {
  try {
    process.kill(pid, 0)
    // A process that ended and was not taken note of yet is not there any more.
    return !/^\d+ \(.*\) Z/.test(readFileSync(`/proc/${pid}/stat`, 'utf8'))
  } catch {
    return false
  }
}
async function gone(pid: number): Promise<void> {
  for (let tries = 0; tries < 200 && isThere(pid); tries++) await sleep(100)
  expect(isThere(pid)).toBe(false)
}

describe('npm start', () => {
  const data = mkdtempSync(path.join(os.tmpdir(), 'brinkbook-start-'))
  chmodSync(data, 0o755)
  const started = new Set<Script>()
  let port = 0
  let running: Script
  const endWatch = watchDatabase(data)
  const start = () => {
    // Whatever the user's own NODE_ENV is, the product runs as itself.
    const environment = { PORT: String(port), BRINKBOOK_DATA: data, NODE_ENV: 'production' }
    const made = startScript(script, ['--empty'], environment, { channel: true })
    started.add(made)
    return made
  }
  const databaseProcess = () => Number(readFileSync(path.join(data, 'mariadbd.pid'), 'utf8'))
  const ask = (place: string) =>
    fetch(`http://127.0.0.1:${port}${place}`).then(
      (answer) => answer.status,
      () => null,
    )

  beforeAll(async () => {
    port = await freePort()
    running = start()
    await running.says(/Ctrl-C stops it/)
  })
  afterAll(async () => {
    for (const one of started) {
      if (one.child.exitCode === null) one.child.kill('SIGTERM')
      await one.ended
    }
    if (existsSync(path.join(data, 'mariadbd.pid'))) {
      const pid = databaseProcess()
      if (isThere(pid)) process.kill(pid, 'SIGTERM')
      await gone(pid)
    }
    endWatch()
    rmSync(data, { recursive: true })
  })

  test('ends with the address, after a set-up link that works, and answers there', async () => {
    expect(running.output()).toContain(`Brinkbook is at http://127.0.0.1:${port}\n`)
    const link = /\/setup\/([\w-]{43})\n/.exec(running.output())?.[1] ?? ''
    expect(await ask(`/api/v1/setup/${link}`)).toBe(200)
    expect(await ask('/healthz')).toBe(200)
    expect(await ask('/readyz')).toBe(200)
    expect(await ask('/')).toBe(200)
    expect(running.output()).not.toContain('slow ramp')
  })

  test('gives the server a database user that may not change tables, and one for migrations', async () => {
    const { app, migrate } = z
      .object({ app: z.string(), migrate: z.string() })
      .parse(JSON.parse(readFileSync(path.join(data, 'credentials.json'), 'utf8')))
    const database = { host: '127.0.0.1', port: Number(readFileSync(path.join(data, 'port'), 'utf8')) }
    const server = await mysql.createConnection({
      ...database,
      user: 'brinkbook',
      password: app,
      database: 'brinkbook',
    })
    const [grants] = await server.query('SHOW GRANTS')
    const lines = z
      .array(z.record(z.string(), z.string()))
      .parse(grants)
      .flatMap((row) => Object.values(row))
    expect(lines.map((line) => line.replace(/ IDENTIFIED BY PASSWORD '.*'/, ''))).toEqual([
      'GRANT USAGE ON *.* TO `brinkbook`@`127.0.0.1`',
      'GRANT SELECT, INSERT, UPDATE, DELETE ON `brinkbook`.* TO `brinkbook`@`127.0.0.1`',
    ])
    await expect(server.query('CREATE TABLE t (a INT)')).rejects.toMatchObject({ errno: 1142 })
    await expect(server.query('DROP TABLE log')).rejects.toMatchObject({ errno: 1142 })
    await server.end()
    const owner = await mysql.createConnection({ ...database, user: 'brinkbook_migrate', password: migrate })
    await owner.query('CREATE TABLE brinkbook.t (a INT)')
    await owner.query('DROP TABLE brinkbook.t')
    await owner.end()
  })

  test('a second start on the same data is refused and names the first', async () => {
    const { code, output } = await runScript(script, [], { PORT: String(await freePort()), BRINKBOOK_DATA: data })
    expect(code).toBe(1)
    expect(output).toContain(`Brinkbook runs already on these data: http://127.0.0.1:${port}`)
    expect(await ask('/readyz')).toBe(200)
  })

  test('killed, it leaves no server behind; the next start takes the database over as it is', async () => {
    const before = databaseProcess()
    running.child.kill('SIGKILL')
    await running.ended
    for (let tries = 0; tries < 200 && (await ask('/healthz')) !== null; tries++) await sleep(100)
    expect(await ask('/healthz')).toBeNull()
    expect(isThere(before)).toBe(true)
    running = start()
    await running.says(/Ctrl-C stops it/)
    expect(running.output()).toMatch(/running still, left by a start that was killed/)
    expect(databaseProcess()).toBe(before)
    expect(await ask('/readyz')).toBe(200)
  })

  test('a server that was killed is started again', async () => {
    const child = /server\/index\.ts/
    const [server] = childrenOf(running.child.pid ?? 0).filter((pid) => child.test(commandOf(pid)))
    if (server === undefined) throw new Error('No server is below npm start')
    process.kill(server, 'SIGKILL')
    await running.says(/The server ended \(SIGKILL\); starting it again/)
    for (let tries = 0; tries < 300 && (await ask('/readyz')) !== 200; tries++) await sleep(100)
    expect(await ask('/readyz')).toBe(200)
  })

  test.each(['SIGINT', 'SIGTERM'] as const)(
    '%s stops the server and the database, and all data stay',
    async (signal) => {
      if (running.child.exitCode !== null) {
        running = start()
        await running.says(/Ctrl-C stops it/)
        expect(running.output()).not.toMatch(/Preparing the database/)
      }
      const pid = databaseProcess()
      running.child.kill(signal)
      expect(await running.ended).toBe(0)
      expect(running.output()).toMatch(/Stopped; all data are kept/)
      expect(isThere(pid)).toBe(false)
      expect(await ask('/healthz')).toBeNull()
    },
  )

  test('a stop while it is still starting leaves nothing behind', async () => {
    const early = start()
    await early.says(/Starting the database/)
    early.child.kill('SIGHUP')
    expect(await early.ended).toBe(0)
    expect(early.output()).not.toMatch(/did not start/)
    await gone(databaseProcessOr(0))
  })

  function databaseProcessOr(other: number): number {
    return existsSync(path.join(data, 'mariadbd.pid')) ? databaseProcess() : other
  }
})

const commandOf = (pid: number): string => {
  try {
    return readFileSync(`/proc/${pid}/cmdline`, 'utf8')
  } catch {
    return ''
  }
}
const childrenOf = (pid: number): number[] =>
  readFileSync(`/proc/${pid}/task/${pid}/children`, 'utf8').trim().split(' ').map(Number)

describe('programs that are missing', () => {
  const folder = mkdtempSync(path.join(os.tmpdir(), 'brinkbook-programs-'))
  afterAll(() => rmSync(folder, { recursive: true }))

  test('are installed by root without a question; anybody else is told the package', async () => {
    // Stands in for Debian's apt-get: notes what it was asked, and brings the program.
    mkdirSync(path.join(folder, 'bin'))
    const aptGet = path.join(folder, 'bin/apt-get')
    const brings = `printf '#!/bin/sh\n' > ${folder}/bin/oddprogram`
    writeFileSync(
      aptGet,
      `#!/bin/sh\necho "$DEBIAN_FRONTEND $*" >> ${folder}/asked\ncase "$*" in *install*) ${brings};; esac\n`,
    )
    chmodSync(aptGet, 0o755)
    const caller = path.join(folder, 'caller.mjs')
    const programs = path.resolve(import.meta.dirname, '../../server/cli/programs.mjs')
    const ask = "await ensurePrograms({ oddprogram: 'odd-package', sh: 'dash' }, console.log)"
    writeFileSync(caller, `import { ensurePrograms } from ${JSON.stringify(programs)}\n${ask}\n`)
    const environment = { PATH: `${folder}/bin:${process.env.PATH}` }
    const { code, output } = await runScript(caller, [], environment)
    if (!isRoot) {
      expect(code).toBe(1)
      expect(output).toMatch(/oddprogram is missing\. Install Debian's odd-package first/)
      return
    }
    expect({ code, output }).toEqual({ code: 0, output: "Installing Debian's odd-package (apt-get)\n" })
    expect(readFileSync(path.join(folder, 'asked'), 'utf8')).toBe(
      'noninteractive -o DPkg::Lock::Timeout=590 update\n' +
        'noninteractive -o DPkg::Lock::Timeout=590 install -y --no-install-recommends odd-package\n',
    )
    // There now: nothing is asked for again.
    expect(await runScript(caller, [], environment)).toEqual({ code: 0, output: '' })
  })
})
