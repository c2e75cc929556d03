import { randomUUID } from 'node:crypto'
import type { RequestHandler } from 'express'
import type { Config } from '#server/config.ts'

/** Gives every request an id, echoed in the answer and in problems. Only our own proxy may bring one along. */
export function requestId(config: Config): RequestHandler {
  return (request, response, next) => {
    const given = config.trustProxy > 0 ? request.get('x-request-id') : undefined
    request.id = given !== undefined && /^[\w-]{8,64}$/.test(given) ? given : randomUUID()
    response.setHeader('X-Request-Id', request.id)
    next()
  }
}
