import { statfs } from 'node:fs/promises'
import { sql } from 'drizzle-orm'
import { type RequestHandler, Router } from 'express'
import { within } from '#collab/within.ts'
import { isMigrated } from '#drizzle/migrate.ts'
import type { Dependencies } from './context.ts'

/** Set to false when the process is about to end, so that nothing new is sent here. */
export interface Readiness {
  accepting: boolean
  /** Everything else that must hold (co-editing saves what is typed). */
  checks: (() => boolean)[]
}

async function databaseReady({ db, limits }: Dependencies): Promise<boolean> {
  const ping = async () => {
    await db.execute(sql`select 1`)
    return isMigrated(db)
  }
  return within(limits.ready.ping, ping()).catch(() => false)
}

/** Enough of the data directory's disk is free; true where there is no such directory here (a database elsewhere). */
async function diskReady({ config, limits }: Dependencies): Promise<boolean> {
  const disk = await statfs(config.dataDirectory).catch(() => null)
  if (!disk || disk.blocks === 0) return true
  // As df counts it: blocks kept for root are neither free nor used.
  const usable = disk.blocks - disk.bfree + disk.bavail
  return disk.bavail > limits.ready.diskFree * usable
}

/**
 * /healthz: the process answers. /readyz: it may be sent requests (database there, tables up to date, edits saved, disk not
 * full, not stopping). No figures: whoever asks need not be known. The disk is named, since only people can mend it.
 */
export function health(dependencies: Dependencies, readiness: Readiness): Router {
  const router = Router()
  const answer = (word: 'ok' | 'not ready' | 'not ready: disk', response: Parameters<RequestHandler>[1]) => {
    response.setHeader('Cache-Control', 'no-store')
    response
      .status(word === 'ok' ? 200 : 503)
      .type('text/plain')
      .send(`${word}\n`)
  }
  router.get('/healthz', (_request, response) => answer('ok', response))
  router.get('/readyz', async (_request, response) => {
    const well = readiness.accepting && readiness.checks.every((check) => check())
    if (!well || !(await databaseReady(dependencies))) answer('not ready', response)
    else answer((await diskReady(dependencies)) ? 'ok' : 'not ready: disk', response)
  })
  return router
}
