import type { CardPart, StabilityCard } from '#shared/model/card-document.ts'
import type { ModelError } from '#shared/model/errors.ts'

/**
 * What page and worker say to each other about cards. The page sends one request at a time; the worker answers each with
 * any number of `progress` and then exactly one of `card`, `errors`, `stopped` or `failed`, all with the request's id.
 */
export interface CardRequest {
  kind: 'analyse'
  id: number
  /** A model document as text or as a parsed value; it is checked in the worker. */
  document: unknown
  /** Default: everything but the map. */
  parts?: CardPart[]
}

/** What is being computed, in this order. */
export const cardStages = ['steady-states', 'branches', 'onsets', 'window', 'sensitivity'] as const
export type CardStage = (typeof cardStages)[number]

export type CardReply =
  /** `share` of the stage that is done, 0 to 1. */
  | { kind: 'progress'; id: number; stage: CardStage; share: number }
  | { kind: 'card'; id: number; card: StabilityCard }
  /** The document cannot be computed; every fault found. */
  | { kind: 'errors'; id: number; errors: ModelError[] }
  /** Given up because it was asked to. */
  | { kind: 'stopped'; id: number }
  /** A fault of the program, not of the document. */
  | { kind: 'failed'; id: number; message: string }
