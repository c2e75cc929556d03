import { useEffect, useRef } from 'react'
import type { VerdictWords } from '#shared/stability/sentences.ts'
import { announce } from '#src/lib/announce.ts'

/** At most one announcement in this time; a change of kind is told at once. */
const pause = 3000

/** Tells screen readers of a verdict that changed. The first one is on the page already and is not told. */
export function useAnnouncedVerdict(words: VerdictWords | null, live: boolean): void {
  const told = useRef<{ text: string; kind: string; when: number } | null>(null)
  const timer = useRef<ReturnType<typeof setTimeout> | null>(null)
  const text = words?.live ?? ''
  const kind = words?.kind ?? ''
  useEffect(() => {
    if (!live || text === '') return
    if (told.current === null) {
      told.current = { text, kind, when: Date.now() }
      return
    }
    if (told.current.text === text) return
    const say = () => {
      told.current = { text, kind, when: Date.now() }
      announce(text)
    }
    const wait = told.current.kind === kind ? told.current.when + pause - Date.now() : 0
    if (wait <= 0) {
      say()
      return
    }
    timer.current = setTimeout(say, wait)
    return () => {
      if (timer.current !== null) clearTimeout(timer.current)
    }
  }, [text, kind, live])
}
