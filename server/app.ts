import express, { type Express } from 'express'
import { type ClientSource, clientFiles } from './http/client-files.ts'
import type { Dependencies } from './http/context.ts'
import { health, type Readiness } from './http/health.ts'
import { requestLog } from './http/logging.ts'
import { type Api, createApi, refuseOtherMethods } from './http/mount.ts'
import { nothingHere, problems } from './http/problems.ts'
import { apiLimit, createLimiter } from './http/rate-limits.ts'
import { requestId } from './http/request-id.ts'
import { sameSite } from './http/same-site.ts'
import { securityHeaders } from './http/security-headers.ts'
import { createSessionGate, type SessionGate } from './http/session.ts'
import { cardRoutes } from './routes/cards.ts'
import { draftRoutes } from './routes/drafts.ts'
import { groupRoutes } from './routes/groups.ts'
import { linkRoutes } from './routes/links.ts'
import { pageRoutes } from './routes/pages.ts'
import { peopleRoutes } from './routes/people.ts'
import { reviewRoutes } from './routes/reviews.ts'
import { revisionRoutes } from './routes/revisions.ts'
import { sessionRoutes } from './routes/session.ts'
import { sourceRoutes } from './routes/sources.ts'

export interface App {
  express: Express
  api: Api
  gate: SessionGate
  /** Set `accepting` to false before the process ends. */
  readiness: Readiness
  close(): Promise<void>
}

/** Every route of the API. A resource's file is added here and nowhere else. */
function mountAll(api: Api): void {
  sessionRoutes(api)
  sourceRoutes(api)
  reviewRoutes(api)
  revisionRoutes(api)
  pageRoutes(api)
  draftRoutes(api)
  cardRoutes(api)
  linkRoutes(api)
  peopleRoutes(api)
  groupRoutes(api)
}

/** The whole of Brinkbook's HTTP without a port. `client` is left out where only the API is wanted. */
export function createApp(dependencies: Dependencies & { client?: ClientSource }): App {
  const { config, limits, logger, client } = dependencies
  const limiter = createLimiter(limits, dependencies.now)
  const gate = createSessionGate(dependencies, limiter)
  const api = createApi({ ...dependencies, limiter, gate })
  mountAll(api)
  refuseOtherMethods(api)

  const app = express()
  app.disable('x-powered-by')
  app.disable('etag')
  app.set('trust proxy', config.trustProxy)
  app.set('query parser', false)
  app.use(requestId(config), requestLog(logger), securityHeaders(config))
  const readiness: Readiness = { accepting: true, checks: [] }
  app.use(health(dependencies, readiness))
  app.use('/api/v1', (_request, response, next) => {
    response.setHeader('Cache-Control', 'no-store')
    next()
  })
  app.use('/api/v1', sameSite(config), gate.middleware, apiLimit(limits), api.router)
  app.use(['/api', '/collab'], nothingHere)
  if (client) app.use(clientFiles(config, client))
  app.use(nothingHere)
  app.use(problems(logger))
  return { express: app, api, gate, readiness, close: () => gate.close() }
}
