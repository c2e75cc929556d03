import { sql } from 'drizzle-orm'
import { type RequestHandler, Router } from 'express'
import { isMigrated } from '#drizzle/migrate.ts'
import type { Dependencies } from './context.ts'

/** Set to false when the process is about to end, so that nothing new is sent here. */
export interface Readiness {
  accepting: boolean
  /** Everything else that must hold (co-editing saves what is typed). */
  checks: (() => boolean)[]
}

async function databaseReady({ db, limits }: Dependencies): Promise<boolean> {
  const late = new Promise<false>((resolve) => setTimeout(resolve, limits.ready.ping, false).unref())
  const ping = async () => {
    await db.execute(sql`select 1`)
    return isMigrated(db)
  }
  return Promise.race([ping(), late]).catch(() => false)
}

/** /healthz: the process answers. /readyz: it may be sent requests (database there, tables up to date, not stopping). No details. */
export function health(dependencies: Dependencies, readiness: Readiness): Router {
  const router = Router()
  const answer = (ok: boolean, response: Parameters<RequestHandler>[1]) => {
    response.setHeader('Cache-Control', 'no-store')
    response
      .status(ok ? 200 : 503)
      .type('text/plain')
      .send(ok ? 'ok\n' : 'not ready\n')
  }
  router.get('/healthz', (_request, response) => answer(true, response))
  router.get('/readyz', async (_request, response) => {
    const well = readiness.accepting && readiness.checks.every((check) => check())
    answer(well && (await databaseReady(dependencies)), response)
  })
  return router
}
