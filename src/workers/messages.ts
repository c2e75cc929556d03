import type { CardWarning, StabilityCard } from '#shared/model/card-document.ts'
import type { ModelDocument } from '#shared/model/document.ts'
import type { DraftContent } from '#shared/model/draft.ts'
import type { ModelError } from '#shared/model/errors.ts'
import type { CardStage } from '#shared/stability/messages.ts'

/**
 * What the co-edit view and its worker say to each other. The page sends one draft at a time; the worker answers each
 * with exactly one `checked` (what the text says, at once), any number of `progress`, and then, where the draft makes a
 * model, exactly one of `card` or `failed`; all carry the request's id.
 */
export interface DraftRequest {
  id: number
  draft: DraftContent
}

/** One statement as the typeset view shows it, and what stands at the right margin of its line. */
export interface DraftLine {
  line: number
  kind: 'helper' | 'equation' | 'comment' | 'unread'
  tex: string | null
  text: string
}

export interface CheckedReply {
  kind: 'checked'
  id: number
  /** Null where there are errors. */
  document: ModelDocument | null
  errors: ModelError[]
  warnings: CardWarning[]
  lines: DraftLine[]
  /** Names of the helper quantities, for completion and the choice of the observed quantity. */
  helpers: string[]
}

export interface CardReply {
  kind: 'card'
  id: number
  document: ModelDocument
  card: StabilityCard
  /** Values of the helpers at the steady state the card speaks of, by line; empty where there is none. */
  helperValues: { line: number; value: number }[]
}

export type WorkerReply =
  | CheckedReply
  | CardReply
  | { kind: 'progress'; id: number; stage: CardStage; share: number }
  /** A fault of the program or a budget that was spent, not a fault of the text. */
  | { kind: 'failed'; id: number; message: string }
  /** Sent once, when the worker is warm. */
  | { kind: 'ready' }
