import type { IncomingMessage } from 'node:http'
import type { RequestHandler } from 'express'
import type { Config } from '#server/config.ts'
import { AppError } from './app-error.ts'

const safeMethods = new Set(['GET', 'HEAD', 'OPTIONS'])

/** True where the request's Origin header names this library itself (the co-editing socket asks the same). */
export const originAllowed = (config: Config, request: IncomingMessage): boolean =>
  config.origins.includes(request.headers.origin ?? '')

/**
 * Refuses requests that change something but were not begun by the library's own pages. The cookie alone is no proof:
 * the browser adds it to requests of other sites as well. An Origin header must be ours; without one, Sec-Fetch-Site
 * must say same-origin; a request with neither is refused. Where both are there, both must agree.
 */
export function sameSite(config: Config): RequestHandler {
  return (request, _response, next) => {
    if (safeMethods.has(request.method)) return next()
    const site = request.get('sec-fetch-site')
    const origin = request.get('origin')
    const ours = origin === undefined ? site === 'same-origin' : originAllowed(config, request)
    if (ours && (site === undefined || site === 'same-origin')) return next()
    throw new AppError('not-same-site', 'This request did not come from the library’s own pages.')
  }
}
