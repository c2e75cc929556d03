// npm test: types, lint and format, the built client, unit, API and browser tests. Ends with "N passed, N failed" alone on
// a line. Plain Node: it runs before node_modules exists.
import { existsSync, readFileSync, rmSync } from 'node:fs'
import path from 'node:path'
import { cloneRoot, createSay, ensurePrograms, run, stopRunning } from './programs.mjs'
import { checkNode, ensureClient, ensurePackages } from './setup.mjs'

const say = createSay()
const bin = (file) => path.join(cloneRoot, 'node_modules', file)
/** Folders below tests/ of which at least one file has to have run: a project left out by mistake is a failure. */
const expected = ['architecture', 'browser', 'collab', 'drizzle', 'reference', 'server', 'shared', 'src']
const programs = {
  mariadbd: 'mariadb-server',
  'mariadb-install-db': 'mariadb-server',
  mariadb: 'mariadb-client',
  chromium: 'chromium',
}
let passed = 0
let failed = 0
let interrupted = false

/** One step that either holds or does not; it counts as one test. */
async function step(name, act) {
  if (interrupted) return
  say(name)
  try {
    await act()
    passed++
  } catch (error) {
    failed++
    console.error(`\n${name}: failed\n${error instanceof Error ? error.message : error}\n`)
  }
}

/** Counts of the vitest run. A run that ends without a result, with errors outside its tests or with tests left out counts as failed. */
async function runVitest() {
  const file = path.join(cloneRoot, '.cache/vitest.json')
  rmSync(file, { force: true })
  const args = ['run', '--reporter=default', '--reporter=json', `--outputFile.json=${file}`]
  // The channel ends the run where this process is killed (tests/support/global-database.ts).
  const ended = await run(process.execPath, [bin('vitest/vitest.mjs'), ...args], { onMessage: () => {} }).then(
    () => null,
    (error) => error,
  )
  if (!existsSync(file)) throw ended ?? new Error('The tests left no result.')
  const result = JSON.parse(readFileSync(file, 'utf8'))
  // Files that could not even be loaded hold no failed test but are failures all the same; so is a test that did not run.
  const broken = result.testResults.filter((one) => one.status === 'failed' && one.assertionResults.length === 0)
  const ran = new Set(
    result.testResults.map((one) => path.relative(path.join(cloneRoot, 'tests'), one.name).split('/')[0]),
  )
  const missing = expected.filter((folder) => !ran.has(folder))
  for (const folder of missing) console.error(`No test of tests/${folder} ran.`)
  const left = result.numPendingTests + result.numTodoTests
  if (left > 0) console.error(`${left} tests did not run; they count as failed.`)
  passed += result.numPassedTests
  const bad = result.numFailedTests + broken.length + left + missing.length
  failed += bad === 0 && ended ? 1 : bad
}

async function main() {
  checkNode()
  await ensurePackages(say)
  await ensurePrograms(programs, say)
  await step('Types', () => run(process.execPath, [bin('typescript/bin/tsc'), '-b'], { quiet: true }))
  await step('Lint and format', () =>
    run(process.execPath, [bin('@biomejs/biome/bin/biome'), 'ci', '.'], { quiet: true }),
  )
  await step('Client build', () => ensureClient(say))
  if (interrupted) return
  say('Tests')
  await runVitest()
}

for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP']) {
  process.on(signal, () => {
    interrupted = true
    stopRunning()
  })
}
try {
  await main()
} catch (error) {
  failed++
  console.error(error instanceof Error ? error.message : error)
}
if (interrupted) {
  failed++
  console.error('The run was interrupted.')
}
process.exitCode = failed === 0 && passed > 0 ? 0 : 1
console.log(`${passed} passed, ${failed} failed`)
