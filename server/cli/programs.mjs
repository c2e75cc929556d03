// Running other programs, and installing Debian's where they are missing. Plain Node without packages: it runs before
// node_modules exists.
import { spawn } from 'node:child_process'
import { existsSync } from 'node:fs'
import path from 'node:path'

export const cloneRoot = path.resolve(import.meta.dirname, '../..')
export const isRoot = process.getuid?.() === 0
const searchPath = `${process.env.PATH ?? ''}:/usr/sbin:/usr/local/sbin:/sbin`

/** Full path of a program, or null. Debian keeps mariadbd in /usr/sbin, which is not on everybody's PATH. */
export function findProgram(name) {
  for (const folder of searchPath.split(':')) {
    if (folder && existsSync(path.join(folder, name))) return path.join(folder, name)
  }
  return null
}

/** Lines of progress, each with the seconds since the command began. */
export function createSay(began = Date.now()) {
  return (line) => console.log(`${`${((Date.now() - began) / 1000).toFixed(1)} s`.padStart(8)}  ${line}`)
}

const running = new Set()

/** Asks every program that run() waits for to end. */
export function stopRunning() {
  for (const child of running) child.kill('SIGTERM')
}

/**
 * Runs a program in the clone to its end. It never gets the terminal's input, so it cannot ask anything.
 *
 * @param options.quiet    its output is kept and shown only if it fails
 * @param options.beat     told every ten seconds that it is still at work
 * @param options.onLine   gets each line of its standard output
 * @param options.onMessage  opens a channel and gets what the program sends
 */
export function run(command, args, { quiet = false, env = process.env, beat, onLine, onMessage } = {}) {
  return new Promise((resolve, reject) => {
    const out = quiet || onLine ? 'pipe' : 'inherit'
    const stdio = ['ignore', out, quiet ? 'pipe' : 'inherit', ...(onMessage ? ['ipc'] : [])]
    const child = spawn(command, args, { cwd: cloneRoot, stdio, env })
    running.add(child)
    const began = Date.now()
    const timer = beat && setInterval(() => beat(Math.round((Date.now() - began) / 1000)), 10_000)
    let kept = ''
    const keep = (chunk) => {
      kept += chunk
    }
    if (quiet) child.stdout.setEncoding('utf8').on('data', keep)
    if (quiet) child.stderr.setEncoding('utf8').on('data', keep)
    let rest = ''
    if (onLine) {
      child.stdout.setEncoding('utf8').on('data', (chunk) => {
        const lines = `${rest}${chunk}`.split('\n')
        rest = lines.pop() ?? ''
        for (const line of lines) onLine(line)
      })
    }
    if (onMessage) child.on('message', onMessage)
    const end = (settle) => {
      running.delete(child)
      clearInterval(timer)
      settle()
    }
    child.once('error', (error) => end(() => reject(error)))
    child.once('close', (code, signal) =>
      end(() => {
        if (onLine && rest !== '') onLine(rest)
        if (code === 0) return resolve(kept)
        const what = `${path.basename(command)} ${args.map((arg) => path.basename(arg)).join(' ')}`
        reject(new ProgramFailed(`${what} ended with ${code ?? signal}.${kept && `\n${kept}`}`, code))
      }),
    )
  })
}

/** A program that ended with another code than 0 (null: a signal ended it). */
export class ProgramFailed extends Error {
  constructor(message, code) {
    super(message)
    this.code = code
  }
}

/**
 * Installs Debian packages where a program is missing. Without root it stops with the name of the package; nothing is
 * ever asked. `programs` maps a program to the package that brings it.
 */
export async function ensurePrograms(programs, say) {
  const missing = Object.entries(programs).filter(([program]) => findProgram(program) === null)
  if (missing.length === 0) return
  const packages = [...new Set(missing.map(([, name]) => name))].join(' ')
  if (!isRoot || findProgram('apt-get') === null) {
    const names = missing.map(([program]) => program).join(', ')
    throw new Error(
      `${names} is missing. Install Debian's ${packages} first, for instance: sudo apt-get install ${packages}`,
    )
  }
  const env = { ...process.env, DEBIAN_FRONTEND: 'noninteractive' }
  const aptGet = (...args) => run('apt-get', ['-o', 'DPkg::Lock::Timeout=590', ...args], { quiet: true, env, beat })
  const beat = (seconds) => say(`  still installing ${packages} (${seconds} s)`)
  say(`Installing Debian's ${packages} (apt-get)`)
  await aptGet('update')
  await aptGet('install', '-y', '--no-install-recommends', ...packages.split(' '))
}
