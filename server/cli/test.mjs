// npm test: types, lint and format, the built client, unit, API and browser tests. Ends with "N passed, N failed" alone on a line.
import { existsSync, readFileSync, rmSync } from 'node:fs'
import path from 'node:path'
import { ensurePrograms } from './mariadb.mjs'
import { checkNode, cloneRoot, ensureClient, ensurePackages, run } from './setup.mjs'

const began = Date.now()
const say = (line) => console.log(`${`${((Date.now() - began) / 1000).toFixed(1)} s`.padStart(8)}  ${line}`)
const bin = (file) => path.join(cloneRoot, 'node_modules', file)
let passed = 0
let failed = 0

/** One step that either holds or does not; it counts as one test. */
async function step(name, act) {
  say(name)
  try {
    await act()
    passed++
  } catch (error) {
    failed++
    console.error(`\n${name}: failed\n${error instanceof Error ? error.message : error}\n`)
  }
}

/** Counts of the vitest run. A run that ends without a result, or with errors outside its tests, counts as failed. */
async function runVitest() {
  const file = path.join(cloneRoot, '.cache/vitest.json')
  rmSync(file, { force: true })
  let ended = true
  try {
    await run(process.execPath, [
      bin('vitest/vitest.mjs'),
      'run',
      '--reporter=default',
      '--reporter=json',
      `--outputFile.json=${file}`,
    ])
  } catch {
    ended = false
  }
  if (!existsSync(file)) {
    failed++
    return
  }
  const result = JSON.parse(readFileSync(file, 'utf8'))
  passed += result.numPassedTests
  // Files that could not even be loaded hold no failed test but are failures all the same.
  const brokenFiles = result.testResults.filter(
    (one) => one.status === 'failed' && one.assertionResults.length === 0,
  ).length
  const bad = result.numFailedTests + brokenFiles + result.numPendingTests + result.numTodoTests
  failed += bad === 0 && !ended ? 1 : bad
}

async function main() {
  checkNode()
  await ensurePackages(say)
  await ensurePrograms(
    {
      mariadbd: 'mariadb-server',
      'mariadb-install-db': 'mariadb-server',
      mariadb: 'mariadb-client',
      chromium: 'chromium',
    },
    say,
  )
  await step('Types', () => run(process.execPath, [bin('typescript/bin/tsc'), '-b'], { quiet: true }))
  await step('Lint and format', () =>
    run(process.execPath, [bin('@biomejs/biome/bin/biome'), 'ci', '.'], { quiet: true }),
  )
  await step('Client build', () => ensureClient(say))
  say('Tests')
  await runVitest()
}

try {
  await main()
} catch (error) {
  failed++
  console.error(error instanceof Error ? error.message : error)
}
process.exitCode = failed === 0 && passed > 0 ? 0 : 1
console.log(`${passed} passed, ${failed} failed`)
