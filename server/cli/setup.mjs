// What start and test both need before anything else can run: packages and the built client. Plain Node, no package.
import { spawn } from 'node:child_process'
import { createHash } from 'node:crypto'
import { existsSync, mkdirSync, readdirSync, readFileSync, statSync, writeFileSync } from 'node:fs'
import path from 'node:path'

export const cloneRoot = path.resolve(import.meta.dirname, '../..')
const cache = path.join(cloneRoot, '.cache')

/** Runs a program to its end. `quiet`: its output is kept and shown only if it fails. `toStderr`: nothing on standard output. */
export function run(command, args, { quiet = false, toStderr = false, env = process.env } = {}) {
  return new Promise((resolve, reject) => {
    const stdio = quiet ? ['ignore', 'pipe', 'pipe'] : ['ignore', toStderr ? 2 : 'inherit', 'inherit']
    const child = spawn(command, args, { cwd: cloneRoot, stdio, env })
    let kept = ''
    child.stdout?.on('data', (chunk) => {
      kept += chunk
    })
    child.stderr?.on('data', (chunk) => {
      kept += chunk
    })
    child.once('error', reject)
    child.once('exit', (code, signal) =>
      code === 0
        ? resolve(kept)
        : reject(new Error(`${command} ${args.join(' ')} ended with ${code ?? signal}\n${kept}`)),
    )
  })
}

const digestOf = (...parts) => {
  const hash = createHash('sha256')
  for (const part of parts) hash.update(part)
  return hash.digest('hex')
}

function storedDigest(name) {
  const file = path.join(cache, name)
  return existsSync(file) ? readFileSync(file, 'utf8') : null
}

function storeDigest(name, digest) {
  mkdirSync(cache, { recursive: true })
  writeFileSync(path.join(cache, name), digest)
}

export function checkNode() {
  const [major = 0, minor = 0] = process.versions.node.split('.').map(Number)
  if (major < 20 || (major === 20 && minor < 19)) {
    throw new Error(`Brinkbook needs Node 20.19 or newer; this is ${process.versions.node}.`)
  }
}

/** Installs the packages where they are missing or package-lock.json has changed since. */
export async function ensurePackages(say, options = {}) {
  const lock = digestOf(readFileSync(path.join(cloneRoot, 'package-lock.json')))
  const installed = path.join(cloneRoot, 'node_modules/.package-lock.json')
  if (existsSync(installed) && storedDigest('packages') === lock) return
  say('Installing the packages (npm ci)')
  // NODE_ENV=production would leave out what the build needs.
  await run('npm', ['ci', '--include=dev', '--no-audit', '--no-fund'], { quiet: true, ...options })
  storeDigest('packages', lock)
}

function filesBelow(folder) {
  return readdirSync(folder, { recursive: true, encoding: 'utf8' })
    .map((name) => path.join(folder, name))
    .filter((name) => statSync(name).isFile())
    .sort()
}

/** Builds the client unless its sources are those of the last build. */
export async function ensureClient(say) {
  const sources = [
    ...['src', 'shared'].flatMap((folder) => filesBelow(path.join(cloneRoot, folder))),
    ...['index.html', 'vite.config.ts', 'package-lock.json'].map((name) => path.join(cloneRoot, name)),
  ]
  const digest = digestOf(...sources.flatMap((file) => [path.relative(cloneRoot, file), readFileSync(file)]))
  if (existsSync(path.join(cloneRoot, 'dist/index.html')) && storedDigest('client') === digest) return
  say('Building the client')
  await run(process.execPath, [path.join(cloneRoot, 'node_modules/vite/bin/vite.js'), 'build', '--logLevel', 'warn'], {
    quiet: true,
  })
  storeDigest('client', digest)
}
