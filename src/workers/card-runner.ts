import type { ModelDocument } from '#shared/model/document.ts'
import type { DraftContent } from '#shared/model/draft.ts'
import { type CardPort, type CardRunner, type CardRunnerOptions, type CardState, idleCard } from './card-state.ts'
import { readReply } from './messages.ts'

export { type CardPort, type CardRunner, type CardState, idleCard, type TimedCard } from './card-state.ts'

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
  let newest: Waiting | null = null
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
    const first = waiting
    waiting = null
    if (first) start(first)
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

  function analyse(draft: DraftContent, editedAt = 0): void {
    newest = { draft, editedAt }
    waiting = newest
    if (!running) {
      next()
      return
    }
    set({ computing: true, older: state.card !== null })
    const allowed = Math.min(5 * patience, Math.max(patience, 2.5 * lastRun))
    giveUp ??= setTimeout(onPatience, Math.max(0, allowed - (Date.now() - running.since)))
  }

  function stop(): void {
    if (!running?.draft && !waiting) return
    clearTimeout(giveUp)
    giveUp = undefined
    waiting = null
    if (running) {
      running = null
      clearTimeout(hangs)
      replace()
    }
    set({ computing: false, progress: null, failure: 'Stopped before its end. Ctrl+Enter runs it again.' })
  }

  return {
    analyse,
    again(editedAt = 0) {
      if (newest) analyse(newest.draft, editedAt)
    },
    stop,
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
