import { AppError } from '#server/http/app-error.ts'
import { type Api, mount } from '#server/http/mount.ts'
import * as cards from '#server/services/cards.ts'
import { computeCard } from '#shared/api/cards.ts'

export function cardRoutes(api: Api): void {
  /** Cards being computed for one person. */
  const running = new Map<number, number>()

  mount(api, computeCard, async ({ body, person, limiter, limits, compute, request }) => {
    const others = running.get(person.id) ?? 0
    if (others >= limits.rate.cardsAtOnce) {
      throw new AppError('too-many', `At most ${limits.rate.cardsAtOnce} cards at once.`, { retryAfter: 2 })
    }
    limiter.take('cards', String(person.id))
    running.set(person.id, others + 1)
    const left = new AbortController()
    request.res?.once('close', () => left.abort())
    try {
      return (await cards.compute(compute, body.document, { signal: left.signal })).card
    } finally {
      const now = (running.get(person.id) ?? 1) - 1
      if (now > 0) running.set(person.id, now)
      else running.delete(person.id)
    }
  })
}
