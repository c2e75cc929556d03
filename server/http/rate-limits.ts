import type { Request, RequestHandler } from 'express'
import { ipKeyGenerator, rateLimit } from 'express-rate-limit'
import { z } from 'zod'
import type { Limits } from '#server/limits.ts'
import { AppError } from './app-error.ts'

export type LimitName = 'signInByAccount' | 'signInByAddress' | 'cards' | 'imports'

export interface Limiter {
  /** Counts one; throws 429 where it was one too many within the window. */
  take(name: LimitName, key: string): void
  /** Takes one back: what was counted turned out to be welcome. */
  giveBack(name: LimitName, key: string): void
}

const tooMany = (milliseconds: number) => {
  const seconds = Math.max(1, Math.ceil(milliseconds / 1000))
  return new AppError('too-many', `Too many requests. Try again in ${seconds} seconds.`, { retryAfter: seconds })
}

/** What express-rate-limit leaves on a request that it counted. */
const countedRequest = z.object({ rateLimit: z.object({ resetTime: z.date() }) })

/** Key of the address a request comes from (an IPv6 network counts as one). */
export const addressKey = (request: Request): string => ipKeyGenerator(request.ip ?? '')

/** Counters for single acts, in this process's memory; the window begins with the first count. */
export function createLimiter(limits: Limits, now: () => Date): Limiter {
  const windowOf = (name: LimitName) => (name === 'imports' ? limits.rate.importsWindow : limits.rate.window)
  const counters = new Map<string, { count: number; until: number }>()
  const forgetOld = (time: number) => {
    for (const [key, counter] of counters) if (counter.until <= time) counters.delete(key)
  }
  return {
    take(name, key) {
      const time = now().getTime()
      if (counters.size > 10_000) forgetOld(time)
      const id = `${name} ${key}`
      const known = counters.get(id)
      const counter = known && known.until > time ? known : { count: 0, until: time + windowOf(name) }
      counters.set(id, counter)
      if (counter.count >= limits.rate[name]) throw tooMany(counter.until - time)
      counter.count++
    },
    giveBack(name, key) {
      const counter = counters.get(`${name} ${key}`)
      if (counter && counter.count > 0) counter.count--
    },
  }
}

/** The limit over the whole API: by person, or by address where nobody is signed in. */
export function apiLimit(limits: Limits): RequestHandler {
  return rateLimit({
    windowMs: limits.rate.window,
    limit: limits.rate.api,
    standardHeaders: false,
    legacyHeaders: false,
    keyGenerator: (request) => (request.user ? `person ${request.user.personId}` : `address ${addressKey(request)}`),
    handler: (request, _response, next) => {
      const counted = countedRequest.safeParse(request)
      next(tooMany(counted.success ? counted.data.rateLimit.resetTime.getTime() - Date.now() : limits.rate.window))
    },
  })
}
