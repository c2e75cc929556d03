import { useEffect, useEffectEvent } from 'react'
import { isTyping, singleKeysOn } from '#src/lib/single-keys.ts'

/**
 * Calls `onKey` for keys pressed without a modifier while nothing is being typed and single keys are switched on.
 * Return true where the key was used: the browser then does nothing of its own with it.
 */
export function useSingleKeys(onKey: (key: string) => boolean): void {
  const handle = useEffectEvent((event: KeyboardEvent) => {
    if (event.defaultPrevented || event.ctrlKey || event.metaKey || event.altKey || event.isComposing) return
    if (!singleKeysOn() || isTyping(event.target)) return
    if (onKey(event.key)) event.preventDefault()
  })
  useEffect(() => {
    const listen = (event: KeyboardEvent) => handle(event)
    document.addEventListener('keydown', listen)
    return () => document.removeEventListener('keydown', listen)
  }, [])
}
