// What start and test both need before anything else can run: packages and the built client. Plain Node, no package.
import { createHash } from 'node:crypto'
import { existsSync, mkdirSync, readdirSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs'
import path from 'node:path'
import { cloneRoot, run } from './programs.mjs'

export function checkNode() {
  const [major = 0, minor = 0] = process.versions.node.split('.').map(Number)
  if (major < 20 || (major === 20 && minor < 19)) {
    throw new Error(`Brinkbook needs Node 20.19 or newer; this is ${process.versions.node}.`)
  }
}

const readJson = (file) => JSON.parse(readFileSync(path.join(cloneRoot, file), 'utf8'))

/**
 * True where node_modules holds exactly what package-lock.json asks for. npm writes its own list last, so an installation
 * that was cut off has none. Packages for other machines are optional and may be missing.
 */
function packagesAreThere() {
  if (!existsSync(path.join(cloneRoot, 'node_modules/.package-lock.json'))) return false
  const wanted = readJson('package-lock.json').packages
  const there = readJson('node_modules/.package-lock.json').packages
  return (
    Object.keys(there).every((name) => name in wanted) &&
    Object.entries(wanted).every(([name, { version, integrity, optional }]) => {
      if (name === '' || (!(name in there) && optional)) return true
      return there[name]?.version === version && there[name].integrity === integrity
    })
  )
}

/** Installs the packages where they are missing or others than package-lock.json asks for. */
export async function ensurePackages(say) {
  if (packagesAreThere()) return
  say('Installing the packages (npm ci)')
  // NODE_ENV=production would leave out what the build needs.
  await run('npm', ['ci', '--include=dev', '--no-audit', '--no-fund'], {
    quiet: true,
    beat: (seconds) => say(`  still installing the packages (${seconds} s)`),
  })
}

function filesBelow(folder) {
  return readdirSync(folder, { recursive: true, encoding: 'utf8' })
    .map((name) => path.join(folder, name))
    .filter((name) => statSync(name).isFile())
    .sort()
}

function digestOfClient() {
  const names = [
    ...['src', 'shared', 'public'].flatMap((folder) => filesBelow(path.join(cloneRoot, folder))),
    ...['index.html', 'vite.config.ts', 'package.json', 'package-lock.json'].map((name) => path.join(cloneRoot, name)),
  ]
  const hash = createHash('sha256')
  for (const name of names) {
    const content = readFileSync(name)
    hash.update(`${path.relative(cloneRoot, name)}\0${content.length}\0`).update(content)
  }
  return hash.digest('hex')
}

/** Builds the client unless its sources are those of the last build. */
export async function ensureClient(say) {
  const cache = path.join(cloneRoot, '.cache')
  const digestFile = path.join(cache, 'client')
  const digest = digestOfClient()
  const built = existsSync(path.join(cloneRoot, 'dist/index.html')) && existsSync(digestFile)
  if (built && readFileSync(digestFile, 'utf8') === digest) return
  say('Building the client')
  rmSync(digestFile, { force: true })
  const vite = path.join(cloneRoot, 'node_modules/vite/bin/vite.js')
  await run(process.execPath, [vite, 'build', '--logLevel', 'warn'], {
    quiet: true,
    beat: (seconds) => say(`  still building the client (${seconds} s)`),
    env: { ...process.env, NODE_ENV: 'production' },
  })
  mkdirSync(cache, { recursive: true })
  writeFileSync(digestFile, digest)
}
