import { useRef } from 'react'
import { newIdempotencyKey } from '#src/lib/idempotency-key.ts'

/**
 * Keys for an act that must be done once: the same body sent again (after a lost answer) has the same key, a changed
 * body is another act and gets a new one.
 */
export function useActKey(): (body: unknown) => string {
  const last = useRef<{ text: string; key: string } | null>(null)
  return (body) => {
    const text = JSON.stringify(body) ?? ''
    if (last.current?.text !== text) last.current = { text, key: newIdempotencyKey() }
    return last.current.key
  }
}
