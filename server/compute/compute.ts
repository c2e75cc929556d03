import type { DraftContent } from '#shared/model/draft.ts'
import type { ModelError } from '#shared/model/errors.ts'
import { type CardAnswer, type CheckAnswer, cardAnswer, checkAnswer } from './card-job.ts'
import { type Citations, createCitations } from './citations.ts'
import { type ChildPool, type ChildPoolOptions, createChildPool } from './pool.ts'

/** Why there is no answer: the work took too long or too much memory (`budget`), or too many wait or the server ends. */
export type ComputeFailure = { ok: false; reason: 'budget' | 'busy' | 'aborted' }
export type Refused = { ok: false; reason: 'refused'; errors: ModelError[] }
export type CardOutcome = Extract<CardAnswer, { ok: true }> | Refused | ComputeFailure
export type CheckOutcome = Extract<CheckAnswer, { ok: true }> | Refused | ComputeFailure

export interface ComputeOptions {
  signal?: AbortSignal
  /** Waits behind everything a person is waiting for. */
  background?: boolean
}

/** Everything that is computed away from this process. Rejects only where the computation itself has a bug. */
export interface Compute {
  /** Checks a model document (anything) and computes its card. */
  card(document: unknown, options?: ComputeOptions): Promise<CardOutcome>
  /** Every fault of a draft. */
  check(draft: DraftContent, options?: ComputeOptions): Promise<CheckOutcome>
  citations: Pick<Citations, 'read' | 'format'>
  close(): Promise<void>
}

export interface ComputeLimits {
  /** Card children kept warm. */
  children: number
  /** Milliseconds for one card, and for reading or formatting sources. */
  cardDeadline: number
  citationDeadline: number
  /** Jobs that may wait for a card child. */
  waiting: number
}

export function createCompute(limits: ComputeLimits, log?: ChildPoolOptions['log']): Compute {
  const pool = createChildPool({
    script: new URL('./child.ts', import.meta.url),
    size: limits.children,
    deadline: limits.cardDeadline,
    queueLimit: limits.waiting,
    log,
  })
  const citations = createCitations({ deadline: limits.citationDeadline, log })
  return {
    async card(document, options) {
      const outcome = await run(pool, { kind: 'card', document }, options)
      return outcome.ok ? withReason(cardAnswer.parse(outcome.answer)) : outcome
    },
    async check(draft, options) {
      const outcome = await run(pool, { kind: 'check', draft }, options)
      return outcome.ok ? withReason(checkAnswer.parse(outcome.answer)) : outcome
    },
    citations,
    close: async () => {
      await Promise.all([pool.close(), citations.close()])
    },
  }
}

function withReason<Good extends { ok: true }>(
  answer: Good | { ok: false; errors: ModelError[] },
): Good | Refused | ComputeFailure {
  if (answer.ok) return answer
  if (answer.errors.some((error) => error.code === 'budget-exceeded')) return { ok: false, reason: 'budget' }
  return { ...answer, reason: 'refused' }
}

async function run(
  pool: ChildPool,
  job: unknown,
  options?: ComputeOptions,
): Promise<{ ok: true; answer: unknown } | ComputeFailure> {
  const outcome = await pool.run(job, options)
  if (outcome.ok) return outcome
  switch (outcome.reason) {
    case 'failed':
      throw new Error(`A card could not be computed: ${outcome.message}`)
    case 'aborted':
      return { ok: false, reason: 'aborted' }
    case 'queue-full':
    case 'not-started':
    case 'closed':
      return { ok: false, reason: 'busy' }
    default:
      return { ok: false, reason: 'budget' }
  }
}
