// npm start: everything from a bare machine to a running Brinkbook. Plain Node: it runs before node_modules exists.
// Usage: npm start [-- --empty], npm run dev. Environment: PORT, BRINKBOOK_DATA (README.md).
import { rmSync } from 'node:fs'
import { createServer } from 'node:net'
import path from 'node:path'
import { setTimeout as sleep } from 'node:timers/promises'
import { databaseOwner, dataDirectory, makeDataDirectory, makeSocketFolder } from './data-directory.mjs'
import { startMariadb } from './mariadb.mjs'
import { claimDataDirectory } from './only-start.mjs'
import { createSay, ensurePrograms, ProgramFailed, run, stopRunning } from './programs.mjs'
import { checkNode, ensureClient, ensurePackages } from './setup.mjs'
import { superviseServer } from './supervise.mjs'

const say = createSay()
const host = process.env.BRINKBOOK_HOST || '127.0.0.1'
const originOf = (port) => `http://${host.includes(':') ? `[${host}]` : host}:${port}`

function readFlags() {
  const flags = process.argv.slice(2)
  const unknown = flags.find((flag) => !['--empty', '--dev'].includes(flag))
  if (unknown !== undefined)
    throw new Error(`There is no option ${unknown}. The one option of npm start is -- --empty.`)
  // `npm start --empty` without the two hyphens before it: npm takes the option for its own and hands it on like this.
  return { dev: flags.includes('--dev'), empty: flags.includes('--empty') || process.env.npm_config_empty === 'true' }
}

function readPort() {
  const text = process.env.PORT || '4180'
  const port = Number(text)
  if (/^\d{1,5}$/.test(text) && port >= 1 && port <= 65535) return port
  throw new Error(`PORT is "${text}"; it must be a number from 1 to 65535.`)
}

/** null where the port can be had, else the error's code. */
const tryPort = (port) =>
  new Promise((resolve) => {
    const probe = createServer()
    probe.once('error', (error) => resolve(error.code ?? 'EADDRINUSE'))
    probe.listen(port, host, () => probe.close(() => resolve(null)))
  })

/** A server whose npm start was killed needs a moment to end; anybody else keeps the port. */
async function checkPort(port) {
  const deadline = Date.now() + 4000
  let fault = await tryPort(port)
  while (fault === 'EADDRINUSE' && Date.now() < deadline && !stopping) {
    await sleep(200)
    fault = await tryPort(port)
  }
  if (fault === null) return
  if (fault === 'EACCES') throw new Error(`PORT is ${port}: this user may not listen there. Choose one above 1023.`)
  if (fault !== 'EADDRINUSE') throw new Error(`BRINKBOOK_HOST is ${host}: the server cannot listen there (${fault}).`)
  const other = port < 65535 ? port + 1 : port - 1
  throw new Error(`PORT ${port} is taken. Stop what uses it, or choose another one: PORT=${other} npm start`)
}

let stopping = false
let ready = false
let askStop = () => {}
const stopAsked = new Promise((resolve) => {
  askStop = resolve
})
let supervisor = null
/** Folder of the database's socket and of this start's own. */
let sockets = null

/** First: what is under way ends, then everything in order. Again: the server is not waited for. */
function onSignal() {
  if (stopping) return void supervisor?.stop()
  stopping = true
  console.log('')
  say('Stopping')
  stopRunning()
  askStop()
}

const database = {
  running: null,
  stop: async () => database.running?.stop(),
}

/** Thrown by a step that found the stop asked for; says nothing. */
class Stopped extends Error {}
const proceed = () => {
  if (stopping) throw new Stopped()
}

async function prepare(env, empty) {
  let closing = []
  const args = ['--import', 'tsx', 'server/cli/prepare.ts', ...(empty ? ['--empty'] : [])]
  await run(process.execPath, args, {
    env: { ...env, DATABASE_URL: database.running.migrateUrl },
    onLine: (line) => say(line),
    onMessage: (message) => {
      closing = message.closing
    },
  }).catch((error) => {
    // It has said what is wrong.
    if (error instanceof ProgramFailed && error.code !== null) throw new Error('See the message above.')
    throw error
  })
  return closing
}

async function untilReady(port) {
  const deadline = Date.now() + 60_000
  while (!stopping) {
    const answer = await fetch(`${originOf(port)}/readyz`).catch(() => null)
    if (answer?.ok) return
    if (Date.now() > deadline) throw new Error('The server did not become ready within a minute.')
    await sleep(100)
  }
}

async function bringUp() {
  checkNode()
  const { dev, empty } = readFlags()
  const port = readPort()
  const address = process.env.BRINKBOOK_PUBLIC_URL || originOf(port)
  await checkPort(port)
  proceed()
  await ensurePackages(say)
  proceed()
  const mariadb = { mariadbd: 'mariadb-server', 'mariadb-install-db': 'mariadb-server', mariadb: 'mariadb-client' }
  await ensurePrograms(mariadb, say)
  proceed()
  const directory = dataDirectory()
  makeDataDirectory(directory)
  sockets = makeSocketFolder(directory, databaseOwner())
  await claimDataDirectory(sockets, address)
  if (!dev) await ensureClient(say)
  proceed()
  database.running = await startMariadb({ directory, say })
  proceed()
  const env = {
    ...process.env,
    NODE_ENV: dev ? 'development' : 'production',
    PORT: String(port),
    DATABASE_URL: database.running.url,
    BRINKBOOK_DATA: directory,
  }
  say('Bringing the tables up to date')
  const closing = await prepare(env, empty)
  proceed()
  say('Starting the server')
  const givenUp = new Promise((_, reject) => {
    const logFile = dev ? null : path.join(directory, 'server.log')
    const onGivenUp = (reason) => reject(new Error(reason))
    supervisor = superviseServer({ env, logFile, reload: dev, say, onGivenUp })
  })
  await Promise.race([untilReady(port), givenUp])
  proceed()
  ready = true
  say('Ready')
  for (const line of [
    ...closing,
    '',
    `Brinkbook is at ${address}`,
    `(Ctrl-C stops it; all data stay in ${directory})`,
  ]) {
    console.log(line === '' ? '' : `  ${line}`)
  }
  console.log('')
  await Promise.race([stopAsked, givenUp])
}

/** Server first, so that its last edits are committed; the database after it. */
async function bringDown() {
  const wasUp = database.running !== null
  stopping = true
  await supervisor?.stop()
  await database.stop()
  if (!wasUp) return
  rmSync(sockets, { recursive: true, force: true })
  say('Stopped; all data are kept')
}

// A closed terminal must not keep the database from being stopped.
for (const stream of [process.stdout, process.stderr]) stream.on('error', () => {})
for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP']) process.on(signal, onSignal)
// Whoever started this over a channel (tests) may be killed; then it is not wanted any more.
if (process.channel) {
  process.once('disconnect', onSignal)
  process.channel.unref()
}
try {
  await bringUp()
} catch (error) {
  if (!stopping) {
    console.error(
      `\nBrinkbook ${ready ? 'has ended' : 'did not start'}. ${error instanceof Error ? error.message : error}`,
    )
    process.exitCode = 1
  }
} finally {
  await bringDown()
}
