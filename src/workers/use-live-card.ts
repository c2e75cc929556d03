import { useEffect, useState, useSyncExternalStore } from 'react'
import type { DraftContent } from '#shared/model/draft.ts'
import { type CardPort, type CardRunner, type CardState, createCardRunner } from './card-runner.ts'
import type { WorkerReply } from './messages.ts'

function spawn(): CardPort {
  const worker = new Worker(new URL('./stability.worker.ts', import.meta.url), { type: 'module' })
  const port: CardPort = {
    onmessage: null,
    onerror: null,
    postMessage: (request) => worker.postMessage(request),
    terminate: () => worker.terminate(),
  }
  worker.onmessage = (event: MessageEvent<WorkerReply>) => port.onmessage?.(event)
  worker.onerror = (event) => port.onerror?.(event)
  return port
}

const idle: CardState = { checked: null, card: null, computing: true, older: false, progress: null, failure: null }
const never = () => () => undefined

/** The live card of a draft, recomputed in a worker with every edit; the newest edit wins. Null: nothing to compute yet. */
export function useLiveCard(draft: DraftContent | null): CardState {
  const [runner, setRunner] = useState<CardRunner | null>(null)
  useEffect(() => {
    const made = createCardRunner({
      spawn,
      // From the edit to its card, as the page itself measures it (performance entries of this name).
      onCard: () => performance.measure('card-update', { start: lastEdit.at, end: performance.now() }),
    })
    setRunner(made)
    return () => {
      made.close()
      setRunner(null)
    }
  }, [])
  useEffect(() => {
    if (!runner || !draft) return
    lastEdit.at = performance.now()
    runner.analyse(draft)
  }, [runner, draft])
  return useSyncExternalStore(runner?.subscribe ?? never, runner?.getState ?? (() => idle))
}

const lastEdit = { at: 0 }
