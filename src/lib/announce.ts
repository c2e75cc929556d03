type Listener = (text: string) => void
const listeners = new Set<Listener>()

/** Says something politely to screen readers: acts done ("Sent for review"), results that changed. Nothing is shown. */
export function announce(text: string): void {
  for (const tell of listeners) tell(text)
}

/** The one live region of the page listens here. Returns the way to stop. */
export function onAnnounce(listener: Listener): () => void {
  listeners.add(listener)
  return () => listeners.delete(listener)
}
