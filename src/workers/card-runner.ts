import type { ModelDocument } from '#shared/model/document.ts'
import type { DraftContent } from '#shared/model/draft.ts'
import type { CardStage } from '#shared/stability/messages.ts'
import { type AtReply, type CardReply, type CheckedReply, readReply, type WorkerRequest } from './messages.ts'

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

interface Waiting {
  draft: DraftContent
  editedAt: number
}

/** Progress is told once a run has taken so long, and then so often, in ms. */
const progressAfter = 300
const progressEvery = 100

/** So many faults in a row and the runner waits for an edit before it tries again. */
const mostCrashes = 3

/**
 * Runs one analysis at a time; while it runs only the newest text waits, so a burst of edits costs two runs. A worker
 * computes without listening, so a run cannot be asked to stop: one that takes longer than `patience` is given up as
 * soon as a newer text waits (its worker ends, a warm spare takes over), and one that gives no answer for `longest` is
 * taken to hang. A worker that crashed or hung is replaced, and it is said. Steady states at the running point are
 * computed only when nothing else is to do.
 */
export function createCardRunner(options: CardRunnerOptions): CardRunner {
  const { spawn, now = () => new Date(), patience = 400, longest = 45_000 } = options
  let state = idleCard
  const listeners = new Set<() => void>()
  let active = listen(spawn())
  let spare: CardPort | null = null
  let running: { id: number; since: number; told: number; editedAt: number; draft: boolean } | null = null
  let waiting: Waiting | null = null
  let wanted: number | null = null
  let giveUp: ReturnType<typeof setTimeout> | undefined
  let hangs: ReturnType<typeof setTimeout> | undefined
  let id = 0
  let crashes = 0
  let lastRun = 0

  function set(change: Partial<CardState>): void {
    state = { ...state, ...change }
    for (const listener of [...listeners]) listener()
  }

  function listen(port: CardPort): CardPort {
    port.onmessage = ({ data }) => {
      if (port === active) take(data)
    }
    port.onerror = () => {
      if (port === active) onCrash('The calculation ended unexpectedly and was started anew.')
      else if (port === spare) spare = null
    }
    return port
  }

  function take(data: unknown): void {
    const reply = readReply(data)
    if (!reply || reply.kind === 'ready' || !running || reply.id !== running.id) return
    if (reply.kind === 'progress') {
      // Most runs are over before a person could read how far they are, and each change draws the page anew.
      const time = Date.now()
      if (time - running.since < progressAfter || time - running.told < progressEvery) return
      running.told = time
      set({ progress: { stage: reply.stage, share: reply.share } })
    } else if (reply.kind === 'checked') {
      const ends = reply.document === null
      // Text that cannot be read leaves the card as it was.
      set({ checked: reply, computing: !ends || waiting !== null, older: state.card !== null, failure: null })
      if (ends) finish()
    } else if (reply.kind === 'card') {
      const { editedAt } = running
      lastRun = Date.now() - running.since
      crashes = 0
      const busy = waiting !== null
      const same = state.card?.id === reply.id
      const timed = { ...reply, at: same && state.card ? state.card.at : now(), editedAt }
      const exact = same ? state.exact : null
      set({ card: timed, computing: busy, older: busy, progress: null, failure: null, exact })
      if (reply.complete) finish()
    } else if (reply.kind === 'at') {
      const { p, steadyStates, complete } = reply
      set({ exact: { p, steadyStates, complete } })
      finish()
    } else {
      // That the running point could not be refined is no fault of the card.
      if (running.draft) set({ computing: waiting !== null, progress: null, failure: reply.message })
      else wanted = null
      finish()
    }
  }

  function finish(): void {
    running = null
    clearTimeout(hangs)
    next()
  }

  function onCrash(message: string): void {
    const ofDraft = running?.draft ?? false
    crashes++
    running = null
    wanted = null
    clearTimeout(hangs)
    replace()
    // The same text would end the same way: it is said, and the next edit tries again.
    if (ofDraft) set({ computing: waiting !== null, progress: null, failure: message })
    if (crashes <= mostCrashes) next()
  }

  function replace(): void {
    active.terminate()
    active = spare ?? listen(spawn())
    spare = null
  }

  function begin(draft: boolean, editedAt: number): number {
    running = { id: ++id, since: Date.now(), told: 0, editedAt, draft }
    hangs = setTimeout(() => onCrash('The calculation gave no answer and was started anew.'), longest)
    return id
  }

  function start({ draft, editedAt }: Waiting): void {
    const request = { kind: 'draft' as const, id: begin(true, editedAt), draft }
    set({ computing: true, older: state.card !== null, progress: null })
    active.postMessage(request)
    // A spare is made once the first run is on its way, so that it delays nobody.
    spare ??= listen(spawn())
  }

  function startAt(document: ModelDocument, p: number): void {
    active.postMessage({ kind: 'at', id: begin(false, 0), document, p })
  }

  function next(): void {
    clearTimeout(giveUp)
    giveUp = undefined
    const newest = waiting
    waiting = null
    if (newest) start(newest)
    else if (wanted !== null && state.card && !state.older && state.exact?.p !== wanted)
      startAt(state.card.document, wanted)
  }

  function onPatience(): void {
    giveUp = undefined
    if (!running || !waiting) return
    running = null
    clearTimeout(hangs)
    replace()
    next()
  }

  return {
    analyse(draft, editedAt = 0) {
      waiting = { draft, editedAt }
      if (!running) {
        next()
        return
      }
      set({ computing: true, older: state.card !== null })
      const allowed = Math.min(5 * patience, Math.max(patience, 2.5 * lastRun))
      giveUp ??= setTimeout(onPatience, Math.max(0, allowed - (Date.now() - running.since)))
    },
    refine(p) {
      wanted = p
      if (!running) next()
    },
    subscribe(listener) {
      listeners.add(listener)
      return () => {
        listeners.delete(listener)
      }
    },
    getState: () => state,
    close() {
      clearTimeout(giveUp)
      clearTimeout(hangs)
      listeners.clear()
      active.terminate()
      spare?.terminate()
    },
  }
}
