// The card command: makes sure the packages are there, then runs card.ts. Plain Node, no package, and nothing of its own on
// standard output, which carries the card alone. It never starts the database or the server.
import { spawn } from 'node:child_process'
import { existsSync } from 'node:fs'
import path from 'node:path'
import { pathToFileURL } from 'node:url'

const root = path.resolve(import.meta.dirname, '../..')
const loader = path.join(root, 'node_modules/tsx/dist/loader.mjs')
const internal = (message) => {
  process.stderr.write(`${JSON.stringify({ errors: [{ code: 'internal', message }] })}\n`)
  return 1
}

/** Runs a program to its end; resolves with its exit code (1 where a signal ended it). */
function run(command, args, options) {
  return new Promise((resolve) => {
    const child = spawn(command, args, options)
    child.once('error', (error) => resolve(internal(`The command could not be started: ${error.message}`)))
    child.once('exit', (code) => resolve(code ?? 137))
  })
}

async function main() {
  if (!existsSync(loader)) {
    // NODE_ENV=production would leave out what runs TypeScript; npm's own output belongs on standard error here
    const npm = process.platform === 'win32' ? 'npm.cmd' : 'npm'
    const code = await run(npm, ['ci', '--include=dev'], { cwd: root, stdio: ['ignore', 2, 2] })
    if (code !== 0) return internal('The packages could not be installed (npm ci).')
  }
  const script = path.join(root, 'server/cli/card.ts')
  const args = ['--import', pathToFileURL(loader).href, script, ...process.argv.slice(2)]
  const code = await run(process.execPath, args, { stdio: 'inherit' })
  // the script itself ends with 0, 1 or 2; anything else is the engine running out of memory or stack
  return code <= 2 ? code : internal('The analysis ended unexpectedly.')
}

process.exitCode = await main()
