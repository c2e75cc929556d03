import { useEffect, useEffectEvent } from 'react'

/** Ctrl+Enter runs the analysis again, Ctrl+Shift+Enter sends for review (Command on a Mac). */
export type Command = 'again' | 'send'

export function commandOf(event: Pick<KeyboardEvent, 'key' | 'ctrlKey' | 'metaKey' | 'shiftKey'>): Command | null {
  if (event.key !== 'Enter' || !(event.ctrlKey || event.metaKey)) return null
  return event.shiftKey ? 'send' : 'again'
}

/** Calls `act` for the command's keys, from anywhere on the page but a sheet over it. */
export function useCommandKey(command: Command, act: () => void): void {
  const onKey = useEffectEvent((event: KeyboardEvent) => {
    if (commandOf(event) !== command || (event.target instanceof Element && event.target.closest('dialog'))) return
    event.preventDefault()
    act()
  })
  useEffect(() => {
    const listen = (event: KeyboardEvent) => onKey(event)
    window.addEventListener('keydown', listen)
    return () => window.removeEventListener('keydown', listen)
  }, [])
}
