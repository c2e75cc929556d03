import { checkDraft } from '#shared/model/draft.ts'
import { checkModel } from '#shared/model/system.ts'
import { analyse } from '#shared/stability/card.ts'
import { summarise } from '#shared/stability/summary.ts'
import { type CardAnswer, type CheckAnswer, cardJob, cardParts } from './card-job.ts'
import { serveJobs } from './serve-jobs.ts'

function cardOf(input: unknown): CardAnswer {
  const checked = checkModel(input)
  if (!checked.ok) return checked
  const { document } = checked
  const result = analyse(document, { parts: [...cardParts] })
  return result.ok ? { ok: true, document, card: result.card, summary: summarise(document, result.card) } : result
}

serveJobs((received): CardAnswer | CheckAnswer => {
  const job = cardJob.parse(received)
  if (job.kind === 'card') return cardOf(job.document)
  const checked = checkDraft(job.draft)
  return checked.ok ? { ok: true } : checked
})
