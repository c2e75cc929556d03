import type { Queryable } from '#drizzle/client.ts'
import { cardParts } from '#server/compute/card-job.ts'
import type { CardOutcome, Compute, ComputeFailure, ComputeOptions, Refused } from '#server/compute/compute.ts'
import { AppError, type ProblemDetail } from '#server/http/app-error.ts'
import * as queries from '#server/queries/cards.ts'
import { type StabilityCard, stabilityCard } from '#shared/model/card-document.ts'
import type { ModelError } from '#shared/model/errors.ts'

export type ComputedCard = Extract<CardOutcome, { ok: true }>

/** Faults of a model as a problem tells them. */
export const detailsOfModel = (errors: readonly ModelError[]): ProblemDetail[] =>
  errors.map(({ code, message, path, line, column }) => ({ code, message, path, line, column }))

/** The refusal that fits a card that could not be had. */
export function refusalOf(outcome: Refused | ComputeFailure): AppError {
  switch (outcome.reason) {
    case 'refused': {
      const { length } = outcome.errors
      const detail = length === 1 ? 'The model has one fault.' : `The model has ${length} faults.`
      return new AppError('model-refused', detail, { errors: detailsOfModel(outcome.errors) })
    }
    case 'budget':
      return new AppError(
        'analysis-budget',
        'The card could not be computed in the time and memory that one model gets. Narrow the ranges or simplify the model.',
      )
    case 'aborted':
      return new AppError('bad-request', 'The request was given up.')
    default:
      return new AppError('not-ready', 'Too many cards are being computed at this moment. Try again.', {
        retryAfter: 5,
      })
  }
}

/**
 * A model document's card, computed in a child process.
 *
 * @throws {AppError} `model-refused` with every fault, `analysis-budget`, or `not-ready` where too many wait.
 */
export async function compute(compute: Compute, document: unknown, options?: ComputeOptions): Promise<ComputedCard> {
  const outcome = await compute.card(document, options)
  if (!outcome.ok) throw refusalOf(outcome)
  return outcome
}

/** Stores a card unless it is there already; its id. */
export async function keep(db: Queryable, card: StabilityCard, now: Date): Promise<number> {
  return queries.keepCard(db, {
    fingerprint: card.fingerprint,
    engine: card.engine,
    parts: cardParts.join(','),
    card,
    at: now,
  })
}

/** A stored card. */
export async function read(db: Queryable, id: number): Promise<StabilityCard> {
  return stabilityCard.parse(await queries.findCard(db, id))
}
