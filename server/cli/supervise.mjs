// Keeps the server running below npm start: starts it, answers a crash by a new start, stops it in order. Plain Node.
import { spawn } from 'node:child_process'
import { closeSync, copyFileSync, openSync, readdirSync, statSync, truncateSync, watch } from 'node:fs'
import path from 'node:path'
import { cloneRoot } from './programs.mjs'

/** Exit code for what another start would not change (server/index.ts). */
const wrongConfiguration = 78
const crashesAMinute = 5
const patience = 15_000
const largestLog = 20 * 1024 * 1024

/** The log is kept in two files; the older one is replaced once the newer has grown large. */
function turnLog(file) {
  if ((statSync(file, { throwIfNoEntry: false })?.size ?? 0) < largestLog) return
  copyFileSync(file, `${file}.1`)
  truncateSync(file)
}

/**
 * @param options.env       the server's environment
 * @param options.logFile   gets its log; null: the terminal
 * @param options.reload    development: a changed file of the server starts it again, and a crash waits for the next change
 * @param options.onGivenUp told why, where it keeps ending
 * @returns { stop }: ends the server after its last edits are committed; called again it does not wait
 */
export function superviseServer({ env, logFile, reload, say, onGivenUp }) {
  const args = ['--import', 'tsx', path.join(cloneRoot, 'server/index.ts')]
  let child = null
  let stopping = false
  let restart = null
  let crashes = []

  const begin = () => {
    restart = null
    const log = logFile === null ? 'inherit' : openSync(logFile, 'a', 0o600)
    // A group of its own: Ctrl-C in the terminal reaches only npm start, which then stops things in order. The channel
    // tells the server when npm start is gone.
    child = spawn(process.execPath, args, {
      cwd: cloneRoot,
      env: { ...env, BRINKBOOK_SUPERVISED: '1' },
      detached: true,
      stdio: ['ignore', log, 'inherit', 'ipc'],
    })
    if (typeof log === 'number') closeSync(log)
    child.once('exit', ended)
  }

  const ended = (code, signal) => {
    child = null
    if (stopping) return
    if (reload) {
      if (code !== 0) say(`The server ended (${code ?? signal}); it starts again when a file is saved`)
      return
    }
    const now = Date.now()
    crashes = [...crashes.filter((at) => now - at < 60_000), now]
    if (code === wrongConfiguration) return onGivenUp('See the message above.')
    if (crashes.length > crashesAMinute) return onGivenUp(`The server keeps ending; its log is ${logFile}.`)
    say(`The server ended (${code ?? signal}); starting it again. Its log is ${logFile}`)
    restart = setTimeout(begin, 500)
  }

  /** Resolves once the server has ended. */
  const end = async () => {
    if (!child) return
    const done = new Promise((resolve) => child.once('exit', resolve))
    child.kill('SIGTERM')
    const forced = setTimeout(() => child?.kill('SIGKILL'), patience)
    await done
    clearTimeout(forced)
  }

  const startAgain = async () => {
    await end()
    if (!stopping) begin()
  }

  const watchers = reload ? watchFolders(say, startAgain) : []
  const turning = logFile === null ? null : setInterval(() => turnLog(logFile), 60 * 60 * 1000)
  if (logFile !== null) turnLog(logFile)
  begin()

  return {
    async stop() {
      if (stopping) return void child?.kill('SIGKILL')
      stopping = true
      clearInterval(turning)
      clearTimeout(restart)
      for (const watcher of watchers) watcher.close()
      await end()
    },
  }
}

/** The server's own files; the client's are the bundler's, which reloads the page by itself. */
function watchFolders(say, onChange) {
  let timer = null
  let running = Promise.resolve()
  const changed = (_event, name) => {
    if (!name || !/\.(ts|json|txt)$/.test(name)) return
    clearTimeout(timer)
    timer = setTimeout(() => {
      say(`${name} changed; starting the server again`)
      running = running.then(onChange)
    }, 200)
  }
  // Each folder by itself: editors save by renaming, which a watch of a single file does not survive.
  const foldersBelow = (folder) =>
    readdirSync(folder, { recursive: true, withFileTypes: true })
      .filter((entry) => entry.isDirectory())
      .map((entry) => path.join(entry.parentPath, entry.name))
  return ['server', 'collab', 'drizzle', 'shared']
    .map((name) => path.join(cloneRoot, name))
    .flatMap((folder) => [folder, ...foldersBelow(folder)])
    .filter((folder) => path.basename(folder) !== 'cli')
    .map((folder) => watch(folder, changed))
}
