import { useCallback, useEffect, useRef, useState } from 'react'

/** The address is written at most so often while a point is dragged: browsers refuse more than some hundred a minute. */
const writeEvery = 200

/**
 * The running point as it is shown: what is dragged moves at once, the page (and with it the address) follows. When the
 * page's own value changes by other means, that is shown.
 */
export function useShownPoint(at: number, onAt: (at: number) => void): [number, (at: number) => void] {
  const [moved, setMoved] = useState<number | null>(null)
  const tell = useRef(onAt)
  const timer = useRef<ReturnType<typeof setTimeout> | null>(null)
  const waiting = useRef<number | null>(null)
  useEffect(() => {
    tell.current = onAt
  })
  const flush = useCallback(() => {
    timer.current = null
    if (waiting.current !== null) tell.current(waiting.current)
    waiting.current = null
  }, [])
  useEffect(
    () => () => {
      if (timer.current !== null) clearTimeout(timer.current)
      flush()
    },
    [flush],
  )
  // biome-ignore lint/correctness/useExhaustiveDependencies: it is the page's answer that ends what was dragged
  useEffect(() => {
    if (timer.current === null) setMoved(null)
  }, [at])
  const move = useCallback(
    (to: number) => {
      setMoved(to)
      waiting.current = to
      timer.current ??= setTimeout(flush, writeEvery)
    },
    [flush],
  )
  return [moved ?? at, move]
}
