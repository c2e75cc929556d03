import { z } from 'zod'
import { cardSummary } from '#shared/api/pages.ts'
import { type CardPart, stabilityCard } from '#shared/model/card-document.ts'
import { modelDocument } from '#shared/model/document.ts'
import { errorCodes } from '#shared/model/errors.ts'

/** What a card on the server holds: cycles are not computed yet, the map is asked for by itself. */
export const cardParts: readonly CardPart[] = ['steady', 'hopf']

const cells = z.record(z.string(), z.string())
const draftParameter = z.looseObject({
  id: z.string(),
  symbol: z.string(),
  value: z.string(),
  low: z.string(),
  high: z.string(),
  unit: z.string(),
  meaning: z.string(),
  uncertainty: z.string().optional(),
})
const draftState = z.looseObject({
  id: z.string(),
  symbol: z.string(),
  low: z.string(),
  high: z.string(),
  start: z.string(),
  unit: z.string(),
  meaning: z.string(),
})

/** What a card child is asked: a model document's card, or only what is wrong with a draft. */
export const cardJob = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('card'), document: z.unknown() }),
  z.strictObject({
    kind: z.literal('check'),
    draft: z.strictObject({
      equations: z.string(),
      parameters: z.array(draftParameter),
      states: z.array(draftState),
      settings: cells,
    }),
  }),
])

const modelError = z.object({
  code: z.enum(errorCodes),
  message: z.string(),
  line: z.number().optional(),
  column: z.number().optional(),
  length: z.number().optional(),
  path: z.string().optional(),
  cures: z.array(z.object({ label: z.string(), replacement: z.string() })).optional(),
})
const refused = z.object({ ok: z.literal(false), errors: z.array(modelError).min(1) })

/** A card with the document as it was read. What a child says is checked like anything from outside. */
export const cardAnswer = z.discriminatedUnion('ok', [
  z.object({ ok: z.literal(true), document: modelDocument, card: stabilityCard, summary: cardSummary }),
  refused,
])
export type CardAnswer = z.infer<typeof cardAnswer>
export const checkAnswer = z.discriminatedUnion('ok', [z.object({ ok: z.literal(true) }), refused])
export type CheckAnswer = z.infer<typeof checkAnswer>
