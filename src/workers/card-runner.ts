import type { DraftContent } from '#shared/model/draft.ts'
import type { CardStage } from '#shared/stability/messages.ts'
import type { CardReply, CheckedReply, DraftRequest, WorkerReply } from './messages.ts'

/** What a worker looks like from the page; tests hand in one of their own. */
export interface CardPort {
  postMessage(request: DraftRequest): void
  onmessage: ((event: { data: WorkerReply }) => void) | null
  onerror: ((event: unknown) => void) | null
  terminate(): void
}

export interface CardState {
  /** What the newest checked text says. */
  checked: CheckedReply | null
  /** The last card that could be computed; it stays while a newer text is computed or cannot be read. */
  card: (CardReply & { at: Date }) | null
  /** A text newer than the card is being computed. */
  computing: boolean
  /** The card is not of the newest text. */
  older: boolean
  progress: { stage: CardStage; share: number } | null
  /** The analysis of the newest text ended without a card. */
  failure: string | null
}

export interface CardRunner {
  analyse(draft: DraftContent): void
  subscribe(listener: () => void): () => void
  getState(): CardState
  close(): void
}

export interface CardRunnerOptions {
  spawn: () => CardPort
  now?: () => Date
  /** A run that has taken this long is given up for a newer text, in ms. */
  patience?: number
  /** Told with each card, for the page's own performance marks. */
  onCard?: () => void
}

/**
 * Runs one analysis at a time; while it runs only the newest text waits, so a burst of edits costs two runs. A run that
 * takes longer than `patience` is given up as soon as a newer text waits: its worker ends and a warm spare takes over.
 */
export function createCardRunner({
  spawn,
  now = () => new Date(),
  patience = 400,
  onCard,
}: CardRunnerOptions): CardRunner {
  let state: CardState = { checked: null, card: null, computing: false, older: false, progress: null, failure: null }
  const listeners = new Set<() => void>()
  let active = listen(spawn())
  let spare: CardPort | null = null
  let running: { id: number; since: number } | null = null
  let waiting: DraftContent | null = null
  let giveUp: ReturnType<typeof setTimeout> | undefined
  let id = 0
  let crashes = 0

  function set(change: Partial<CardState>): void {
    state = { ...state, ...change }
    for (const listener of [...listeners]) listener()
  }

  function listen(port: CardPort): CardPort {
    port.onmessage = ({ data }) => {
      if (port === active) take(data)
    }
    port.onerror = () => {
      if (port === active) onCrash()
      else if (port === spare) spare = null
    }
    return port
  }

  function take(reply: WorkerReply): void {
    if (reply.kind === 'ready') return
    if (!running || reply.id !== running.id) return
    if (reply.kind === 'checked') {
      const done = reply.document === null
      if (done) running = null
      // Text that cannot be read leaves the card as it was.
      set({ checked: reply, computing: !done || waiting !== null, older: state.card !== null, failure: null })
      if (done) next()
    } else if (reply.kind === 'progress') {
      set({ progress: { stage: reply.stage, share: reply.share } })
    } else if (reply.kind === 'card') {
      running = null
      crashes = 0
      onCard?.()
      set({
        card: { ...reply, at: now() },
        computing: waiting !== null,
        older: waiting !== null,
        progress: null,
        failure: null,
      })
      next()
    } else {
      running = null
      set({ computing: waiting !== null, progress: null, failure: reply.message })
      next()
    }
  }

  function onCrash(): void {
    crashes++
    running = null
    replace()
    // The same text would end the same way: it is said, and the next edit tries again.
    set({
      computing: waiting !== null,
      progress: null,
      failure: 'The analysis ended unexpectedly. Change the text or load the page again.',
    })
    if (crashes < 4) next()
  }

  function replace(): void {
    active.terminate()
    active = spare ?? listen(spawn())
    spare = null
  }

  function start(draft: DraftContent): void {
    running = { id: ++id, since: Date.now() }
    set({ computing: true, older: state.card !== null, progress: null })
    active.postMessage({ id, draft })
    // A spare is made once the first run is on its way, so that it delays nobody.
    spare ??= listen(spawn())
  }

  function next(): void {
    clearTimeout(giveUp)
    giveUp = undefined
    const draft = waiting
    waiting = null
    if (draft) start(draft)
  }

  return {
    analyse(draft) {
      if (!running) {
        start(draft)
        return
      }
      waiting = draft
      set({ computing: true, older: state.card !== null })
      giveUp ??= setTimeout(
        () => {
          giveUp = undefined
          if (!running || !waiting) return
          running = null
          replace()
          next()
        },
        Math.max(0, patience - (Date.now() - running.since)),
      )
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
      listeners.clear()
      active.terminate()
      spare?.terminate()
    },
  }
}
