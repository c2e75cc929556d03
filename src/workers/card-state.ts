import type { DraftContent } from '#shared/model/draft.ts'
import type { CardStage } from '#shared/stability/messages.ts'
import type { AtReply, CardReply, CheckedReply, WorkerRequest } from './messages.ts'

/** What a worker looks like from the page; tests hand in one of their own. */
export interface CardPort {
  postMessage(request: WorkerRequest): void
  onmessage: ((event: { data: unknown }) => void) | null
  onerror: ((event: unknown) => void) | null
  terminate(): void
}

/** A card with the time it came and the time of the edit it answers (as handed to `analyse`). */
export type TimedCard = CardReply & { at: Date; editedAt: number }

export interface CardState {
  /** What the newest checked text says. */
  checked: CheckedReply | null
  /** The last card that could be computed; it stays while a newer text is computed or cannot be read. */
  card: TimedCard | null
  /** A text newer than the card is being computed. */
  computing: boolean
  /** The card is not of the newest text. */
  older: boolean
  progress: { stage: CardStage; share: number } | null
  /** The analysis of the newest text ended without a card, and why. */
  failure: string | null
  /** The steady states at the viewer's running point, computed for the card's own model; null until they are. */
  exact: Pick<AtReply, 'p' | 'steadyStates' | 'complete'> | null
}

export interface CardRunner {
  /** The newest text. `editedAt` is the page's clock at the edit, for the measure from edit to card. */
  analyse(draft: DraftContent, editedAt?: number): void
  /** Asks for the steady states of the card's model at another value of its control; null: no longer wanted. */
  refine(p: number | null): void
  /** Runs the newest text again, as if it had just been typed. */
  again(editedAt?: number): void
  /** Gives the run up; the card stays as it is. */
  stop(): void
  subscribe(listener: () => void): () => void
  getState(): CardState
  close(): void
}

export interface CardRunnerOptions {
  spawn: () => CardPort
  now?: () => Date
  /**
   * A run that has taken this long is given up for a newer text, in ms. A model whose last run took long is given two and
   * a half times that, up to five times as long as this: else somebody who types on would never see a card.
   */
  patience?: number
  /** A run that has taken this long without an answer is taken to hang, in ms. */
  longest?: number
}

export const idleCard: CardState = {
  checked: null,
  card: null,
  computing: false,
  older: false,
  progress: null,
  failure: null,
  exact: null,
}
