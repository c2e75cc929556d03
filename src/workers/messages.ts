import { z } from 'zod'
import { cardWarning, type StabilityCard, steadyState } from '#shared/model/card-document.ts'
import type { ModelDocument } from '#shared/model/document.ts'
import { draftContent, modelError } from '#shared/model/schemas.ts'
import { cardStages } from '#shared/stability/messages.ts'

/**
 * What the co-edit view and its worker say to each other. The page sends one request at a time.
 *
 * `draft`: the worker answers with exactly one `checked` (what the text says, at once), any number of `progress`, and
 * then, where the draft makes a model, one or two `card` (the first without sensitivities) or one `failed`. `at` (a model that was computed before, at
 * another value of its control) is answered with exactly one of `at` or `failed`. All carry the request's id.
 *
 * Both sides read what comes in with these schemas. Documents and cards are made on the other side by our own code from
 * input it has checked, and they are large: of them only the format is looked at.
 */
const record = (value: unknown): value is Record<string, unknown> => typeof value === 'object' && value !== null
const document = z.custom<ModelDocument>((value) => record(value) && value.format === 'brinkbook-model')
const card = z.custom<StabilityCard>((value) => record(value) && value.format === 'brinkbook-card')

const request = z.discriminatedUnion('kind', [
  z.object({ kind: z.literal('draft'), id: z.number(), draft: draftContent }),
  z.object({ kind: z.literal('at'), id: z.number(), document, p: z.number() }),
])
export type WorkerRequest = z.infer<typeof request>

/** One statement as the typeset view shows it, and what stands at the right margin of its line. */
const draftLine = z.object({
  line: z.number(),
  kind: z.enum(['helper', 'equation', 'comment', 'unread']),
  tex: z.string().nullable(),
  text: z.string(),
})
export type DraftLine = z.infer<typeof draftLine>

const checkedReply = z.object({
  kind: z.literal('checked'),
  id: z.number(),
  /** Null where there are errors. */
  document: document.nullable(),
  errors: z.array(modelError),
  warnings: z.array(cardWarning),
  lines: z.array(draftLine),
  /** Names of the helper quantities, for completion and the choice of the observed quantity. */
  helpers: z.array(z.string()),
})
export type CheckedReply = z.infer<typeof checkedReply>

const cardReply = z.object({
  kind: z.literal('card'),
  id: z.number(),
  document,
  card,
  /** False where the sensitivities are still to come: another `card` with the same id follows. */
  complete: z.boolean(),
  /** Values of the helpers at the steady state the card speaks of, by line; empty where there is none. */
  helperValues: z.array(z.object({ line: z.number(), value: z.number() })),
})
export type CardReply = z.infer<typeof cardReply>

/** The steady states at one value of the control. `complete`: proved that the box holds no others. */
const atReply = z.object({
  kind: z.literal('at'),
  id: z.number(),
  p: z.number(),
  steadyStates: z.array(steadyState),
  complete: z.boolean(),
})
export type AtReply = z.infer<typeof atReply>

const reply = z.discriminatedUnion('kind', [
  checkedReply,
  cardReply,
  atReply,
  z.object({ kind: z.literal('progress'), id: z.number(), stage: z.enum(cardStages), share: z.number() }),
  /** A fault of the program or a budget that was spent, not a fault of the text. */
  z.object({ kind: z.literal('failed'), id: z.number(), message: z.string() }),
  /** Sent once, when the worker is warm. */
  z.object({ kind: z.literal('ready') }),
])
export type WorkerReply = z.infer<typeof reply>

/** What came from the page; null for anything else. */
export const readRequest = (data: unknown): WorkerRequest | null => request.safeParse(data).data ?? null
/** What came from the worker; null for anything else. */
export const readReply = (data: unknown): WorkerReply | null => reply.safeParse(data).data ?? null
