import { createDatabase } from '#drizzle/client.ts'
import { OtherTables } from '#drizzle/migrate.ts'
import { createCompute } from '#server/compute/compute.ts'
import { ConfigError, readConfig } from '#server/config.ts'
import { limits } from '#server/limits.ts'
import { NotPrepared, type Prepared, prepareLibrary } from '#server/services/prepare-library.ts'

/**
 * `tsx server/cli/prepare.ts [--empty]`: migrates DATABASE_URL (a user who may change tables), loads the demonstration
 * library into an empty database, and says how to sign in. Progress goes to standard output; where npm start called it,
 * what belongs at the very end goes to it as one message { closing: lines }. Exit code 78 for a wrong configuration.
 */
const wrongConfiguration = 78
const empty = process.argv.includes('--empty')

function accountLines({ demonstration }: Prepared): string[] {
  if (!demonstration) return []
  const width = Math.max(...demonstration.people.map((person) => person.email.length))
  return [
    'Demonstration accounts (they exist on this machine only). The password of each is:',
    '',
    `    ${demonstration.password}`,
    '',
    ...demonstration.people.map(({ email, name, role }) => `    ${email.padEnd(width)}   ${name}, ${role}`),
  ]
}

function setupLines({ setupPath }: Prepared, origin: string): string[] {
  if (setupPath === null) return []
  return [
    'Nobody is administrator yet. Whoever opens this address first becomes it; it works once, for seven days,',
    'and the next start replaces it:',
    '',
    `    ${origin}${setupPath}`,
  ]
}

function emptyLines({ library, demonstration }: Prepared): string[] {
  if (empty && library === 'used') {
    const what = demonstration ? 'This library holds the demonstration models' : 'This library is in use'
    return [`${what} already: --empty is for a new one. Name another folder with BRINKBOOK_DATA to begin one.`]
  }
  if (!empty && library === 'empty') {
    return ['This library was begun without demonstration data. Name another folder with BRINKBOOK_DATA to see them.']
  }
  return []
}

async function main(): Promise<void> {
  const config = readConfig(process.env)
  const database = createDatabase(config.databaseUrl, 4)
  try {
    const prepared = await prepareLibrary(database.db, {
      empty,
      loopback: config.loopback,
      now: new Date(),
      say: console.log,
      startCompute: () => createCompute(limits.loading),
    })
    const closing = [emptyLines(prepared), accountLines(prepared), setupLines(prepared, config.publicOrigin)]
      .filter((lines) => lines.length > 0)
      .flatMap((lines) => ['', ...lines])
    if (process.send) process.send({ closing })
    else console.log(closing.join('\n'))
  } finally {
    await database.close()
  }
  if (process.channel) process.disconnect()
}

try {
  await main()
} catch (error) {
  const expected = error instanceof ConfigError || error instanceof NotPrepared || error instanceof OtherTables
  console.error(expected ? error.message : error)
  process.exit(expected ? wrongConfiguration : 1)
}
