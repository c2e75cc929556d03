// npm start: everything from a bare machine to a running Brinkbook. Plain Node: it runs before node_modules exists.
import { spawn } from 'node:child_process'
import { createServer } from 'node:net'
import path from 'node:path'
import { setTimeout as sleep } from 'node:timers/promises'
import { dataDirectory, ensurePrograms, startMariadb } from './mariadb.mjs'
import { checkNode, cloneRoot, ensureClient, ensurePackages, run } from './setup.mjs'

const flags = new Set(process.argv.slice(2))
const dev = flags.has('--dev')
const empty = flags.has('--empty')
const began = Date.now()
const say = (line) => console.log(`${`${((Date.now() - began) / 1000).toFixed(1)} s`.padStart(8)}  ${line}`)

function fail(error) {
  console.error(`\nBrinkbook did not start. ${error instanceof Error ? error.message : error}`)
  process.exitCode = 1
}

function readPort() {
  const text = process.env.PORT ?? '4180'
  const port = Number(text)
  if (!/^\d{1,5}$/.test(text) || port < 1 || port > 65535)
    throw new Error(`PORT is "${text}"; it must be a number from 1 to 65535.`)
  return port
}

const portIsFree = (port) =>
  new Promise((resolve) => {
    const probe = createServer()
    probe.once('error', () => resolve(false))
    probe.listen(port, '127.0.0.1', () => probe.close(() => resolve(true)))
  })

const tsx = (file, ...args) => ['--import', 'tsx', path.join(cloneRoot, file), ...args]

let stopping = false
let server = null
let database = null

/** Server first, so that its last edits are committed; the database after it. A second signal does not wait. */
async function stop() {
  if (stopping) {
    server?.kill('SIGKILL')
    return
  }
  stopping = true
  console.log('')
  say('Stopping')
  if (server && server.exitCode === null && server.signalCode === null) {
    const ended = new Promise((resolve) => server.once('exit', resolve))
    server.kill('SIGTERM')
    const forced = setTimeout(() => server.kill('SIGKILL'), 15_000)
    await ended
    clearTimeout(forced)
  }
  await database?.stop()
  say('Stopped; all data are kept')
}

/** Starts the server and keeps it running: a crash is said and answered by a new start, up to five in a minute. */
function runServer(env) {
  const crashes = []
  const begin = () => {
    // A group of its own: Ctrl-C in the terminal reaches only this process, which then stops things in order.
    server = spawn(process.execPath, tsx('server/index.ts'), {
      cwd: cloneRoot,
      env,
      detached: true,
      stdio: ['ignore', 'inherit', 'inherit', 'ipc'],
    })
    server.once('exit', async (code, signal) => {
      if (stopping) return
      const now = Date.now()
      crashes.push(now)
      if (crashes.filter((at) => now - at < 60_000).length > 5 || code === 78) {
        fail(code === 78 ? 'See the message above.' : 'The server keeps ending; see the messages above.')
        stopping = true
        await database?.stop()
        return
      }
      console.error(`The server ended (${code ?? signal}); starting it again.`)
      await sleep(500)
      if (!stopping) begin()
    })
  }
  begin()
}

async function waitUntilReady(port) {
  const deadline = Date.now() + 60_000
  while (Date.now() < deadline && !stopping) {
    const ok = await fetch(`http://127.0.0.1:${port}/readyz`).then(
      (answer) => answer.ok,
      () => false,
    )
    if (ok) return true
    await sleep(150)
  }
  return false
}

async function main() {
  checkNode()
  const port = readPort()
  if (!(await portIsFree(port)))
    throw new Error(`Port ${port} is taken. Choose another one: PORT=${port + 1} npm start`)
  await ensurePackages(say)
  await ensurePrograms(
    { mariadbd: 'mariadb-server', 'mariadb-install-db': 'mariadb-server', mariadb: 'mariadb-client' },
    say,
  )
  if (!dev) await ensureClient(say)
  const directory = dataDirectory(cloneRoot)
  database = await startMariadb({ directory, say })
  if (stopping) return
  say(
    empty
      ? 'Bringing the tables up to date'
      : 'Bringing the tables up to date; an empty library gets the demonstration models',
  )
  const env = {
    ...process.env,
    NODE_ENV: dev ? 'development' : 'production',
    PORT: String(port),
    DATABASE_URL: database.url,
    BRINKBOOK_DATA: directory,
  }
  await run(process.execPath, tsx('server/cli/prepare.ts', ...(empty ? ['--empty'] : [])), {
    env: { ...env, DATABASE_URL: database.migrateUrl },
  })
  if (stopping) return
  runServer(env)
  if (!(await waitUntilReady(port))) return
  say('Ready')
  console.log(`\n  Brinkbook is at http://127.0.0.1:${port}   (Ctrl-C stops it)\n`)
}

process.on('SIGINT', stop)
process.on('SIGTERM', stop)
main().catch(async (error) => {
  fail(error)
  stopping = true
  await database?.stop()
})
