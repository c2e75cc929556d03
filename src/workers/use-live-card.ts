import { useCallback, useEffect, useLayoutEffect, useState, useSyncExternalStore } from 'react'
import type { DraftContent } from '#shared/model/draft.ts'
import { type CardPort, type CardRunner, type CardState, createCardRunner, idleCard } from './card-runner.ts'

function spawn(): CardPort {
  const worker = new Worker(new URL('./stability.worker.ts', import.meta.url), { type: 'module' })
  const port: CardPort = {
    onmessage: null,
    onerror: null,
    postMessage: (request) => worker.postMessage(request),
    terminate: () => worker.terminate(),
  }
  worker.onmessage = (event: MessageEvent<unknown>) => port.onmessage?.(event)
  worker.onerror = (event) => port.onerror?.(event)
  return port
}

const first: CardState = { ...idleCard, computing: true }
const never = () => () => undefined
/** The running point has to rest this long before its steady states are computed and not only read off the branches. */
const rest = 150

/**
 * The live card of a draft, recomputed in a worker with every edit; the newest edit wins. Null: nothing to compute yet.
 * `at` is the viewer's running point: where it is not the model's own value, the steady states there are computed as well.
 * `again` runs the text as it stands once more, `stop` gives a run up.
 *
 * Leaves one performance measure, `card-update`, for each card: from the edit to the moment the page holds the card.
 */
export function useLiveCard(
  draft: DraftContent | null,
  at: number | null = null,
): { live: CardState; again: () => void; stop: () => void } {
  const [runner, setRunner] = useState<CardRunner | null>(null)
  useEffect(() => {
    const made = createCardRunner({ spawn })
    setRunner(made)
    return () => {
      made.close()
      setRunner(null)
    }
  }, [])
  useLayoutEffect(() => {
    if (runner && draft) runner.analyse(draft, performance.now())
  }, [runner, draft])
  const state = useSyncExternalStore(runner?.subscribe ?? never, runner?.getState ?? (() => first))
  const { card } = state
  const cardId = card?.id ?? null
  const editedAt = card?.editedAt ?? 0
  useLayoutEffect(() => {
    if (cardId === null) return
    performance.clearMeasures('card-update')
    performance.measure('card-update', { start: editedAt, end: performance.now() })
  }, [cardId, editedAt])
  useEffect(() => {
    if (!runner || !card) return
    if (at === null) {
      runner.refine(null)
      return
    }
    const timer = setTimeout(() => runner.refine(at), rest)
    return () => clearTimeout(timer)
  }, [runner, card, at])
  const again = useCallback(() => runner?.again(performance.now()), [runner])
  const stop = useCallback(() => runner?.stop(), [runner])
  return { live: state, again, stop }
}
