import type { Database } from '#drizzle/client.ts'
import { dropTables } from '#drizzle/drop-tables.ts'
import { migrate } from '#drizzle/migrate.ts'
import { withNamedLock } from '#drizzle/named-lock.ts'
import type { Compute } from '#server/compute/compute.ts'
import { findUse } from '#server/queries/installation.ts'
import * as settings from '#server/queries/settings.ts'
import { type Demonstration, findDemonstration } from './demonstration.ts'
import { makeSetupLink } from './links.ts'
import { type LoadInput, loadDemonstration, loadingSetting } from './load-demonstration.ts'

/** Stands where a library was begun without demonstration data, so that no later start puts any in. */
const emptySetting = 'begun-empty'
/** Another process may be loading the demonstration library; that long it is waited for, in seconds. */
const patience = 600

export interface PrepareInput extends LoadInput {
  empty: boolean
  /** Only a library that no other machine reaches may hold accounts whose password is public. */
  loopback: boolean
  /** Starts what computes cards; only called where there is something to compute. */
  startCompute: () => Compute
}

export interface Prepared {
  /** `used`: there was something already. */
  library: 'loaded' | 'empty' | 'used'
  demonstration: Demonstration | null
  /** Where the first administrator makes their account; null where there is one. */
  setupPath: string | null
}

/** A start that the configuration does not allow. */
export class NotPrepared extends Error {}

/**
 * Brings tables and library to where the server can start: once for an empty database, within seconds for any other, and
 * safely after a start that was cut off. Needs a user who may change tables. Two at once wait for each other.
 */
export async function prepareLibrary(db: Database, input: PrepareInput): Promise<Prepared> {
  return withNamedLock(db, 'prepare', patience, async () => {
    await migrate(db)
    if ((await settings.readSetting(db, loadingSetting)) !== null) await beginAnew(db, input)
    const library = await fill(db, input)
    return {
      library,
      demonstration: await findDemonstration(db),
      setupPath: (await makeSetupLink(db, input.now))?.path ?? null,
    }
  })
}

/** Clears a demonstration library that was loaded only in part. Nobody can have used it: the server never started on it. */
async function beginAnew(db: Database, { say }: PrepareInput): Promise<void> {
  if ((await findUse(db)).signIns) {
    throw new NotPrepared(
      'The demonstration library in this database was loaded only in part and has been used since. Keep what is of worth and choose another database or BRINKBOOK_DATA.',
    )
  }
  say('The demonstration library was loaded only in part; it is begun anew')
  await dropTables(db)
  await migrate(db)
}

async function fill(db: Database, input: PrepareInput): Promise<Prepared['library']> {
  const use = await findUse(db)
  if (use.people || use.groups) return 'used'
  if (input.empty || (await settings.readSetting(db, emptySetting)) !== null) {
    await settings.writeSetting(db, emptySetting, { since: input.now.toISOString() })
    return 'empty'
  }
  if (!input.loopback) {
    throw new NotPrepared(
      'BRINKBOOK_PUBLIC_URL or BRINKBOOK_HOST opens this library to other machines, and the demonstration accounts have a public password. Start it without them: npm start -- --empty',
    )
  }
  input.say('Loading the demonstration library; each card is computed')
  const compute = input.startCompute()
  try {
    await loadDemonstration(db, compute, input)
  } finally {
    await compute.close()
  }
  return 'loaded'
}
