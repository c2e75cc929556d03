import { z } from 'zod'
import { cardSummary } from '#shared/api/pages.ts'
import { type CardPart, stabilityCard } from '#shared/model/card-document.ts'
import { modelDocument } from '#shared/model/document.ts'
import { draftContent, modelError } from '#shared/model/schemas.ts'

/** What a card on the server holds: cycles are not computed yet, the map is asked for by itself. */
export const cardParts: readonly CardPart[] = ['steady', 'hopf']

/** What a card child is asked: a model document's card, or only what is wrong with a draft. */
export const cardJob = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('card'), document: z.unknown() }),
  z.strictObject({
    kind: z.literal('check'),
    draft: draftContent,
  }),
])

const refused = z.object({ ok: z.literal(false), errors: z.array(modelError).min(1) })

/** A card with the document as it was read. What a child says is checked like anything from outside. */
export const cardAnswer = z.discriminatedUnion('ok', [
  z.object({ ok: z.literal(true), document: modelDocument, card: stabilityCard, summary: cardSummary }),
  refused,
])
export type CardAnswer = z.infer<typeof cardAnswer>
export const checkAnswer = z.discriminatedUnion('ok', [z.object({ ok: z.literal(true) }), refused])
export type CheckAnswer = z.infer<typeof checkAnswer>
