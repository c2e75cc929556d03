import type { TestProject } from 'vitest/node'
import { type RunningMariadb, startThrowawayMariadb } from '#server/cli/mariadb.mjs'

declare module 'vitest' {
  export interface ProvidedContext {
    /** A user that may make databases: tests take one each (support/database.ts). */
    databaseUrl: string
  }
}

// One server for all projects of a run: the setup runs once a project, so starts are counted on the process.
const shared = globalThis as typeof globalThis & {
  brinkbookDatabase?: { users: number; server: Promise<RunningMariadb> }
}

// npm test holds a channel to the run; when it closes, npm test was killed and nobody waits for the result any more.
// The database's own watcher then stops the database.
if (process.channel) {
  process.once('disconnect', () => process.exit(1))
  process.channel.unref()
}

export default async function setup(project: TestProject) {
  shared.brinkbookDatabase ??= { users: 0, server: startThrowawayMariadb() }
  const running = shared.brinkbookDatabase
  running.users++
  project.provide('databaseUrl', (await running.server).migrateUrl)
  return async () => {
    running.users--
    if (running.users > 0) return
    delete shared.brinkbookDatabase
    await (await running.server).stop()
  }
}
