import { useCallback, useEffect, useRef, useState, useSyncExternalStore } from 'react'
import {
  attachToWindow,
  createDraftConnection,
  type DraftConnection,
  type DraftConnectionState,
} from './draft-connection.ts'
import { keepEdits } from './kept-edits.ts'
import { readPresence } from './presence-state.ts'

const collabAddress = () => `${window.location.protocol === 'https:' ? 'wss' : 'ws'}://${window.location.host}/collab`

/**
 * The draft's connection while the screen stands; `renew` begins with a fresh document (a new generation). Whatever ends
 * it, edits that were not committed by then are kept as lines for the person (kept-edits.ts).
 */
export function useDraftConnection(
  pageId: number,
  person: number,
): { connection: DraftConnection | null; renew: () => void } {
  const [connection, setConnection] = useState<DraftConnection | null>(null)
  const [turn, setTurn] = useState(0)
  // biome-ignore lint/correctness/useExhaustiveDependencies: a new turn means a new document
  useEffect(() => {
    const made = createDraftConnection({ url: collabAddress(), pageId })
    const detach = attachToWindow(made, window)
    setConnection(made)
    return () => {
      detach()
      if (made.getState().unsaved > 0) keepEdits(person, pageId, made.unsavedEdits())
      made.close()
      setConnection(null)
    }
  }, [pageId, person, turn])
  const renew = useCallback(() => setTurn((before) => before + 1), [])
  return { connection, renew }
}

export function useConnectionState(connection: DraftConnection): DraftConnectionState {
  return useSyncExternalStore(connection.subscribe, connection.getState)
}

export interface PresentPerson {
  id: number
  name: string
  own: boolean
}

/** Who is here, by the server's word; one entry a person, however many tabs. `me`: the server tells the others of this tab, not this one. */
export function usePresence(connection: DraftConnection, me: { id: number; name: string } | null): PresentPerson[] {
  const { awareness } = connection
  const last = useRef<PresentPerson[]>([])
  return useSyncExternalStore(
    (listener) => {
      awareness.on('change', listener)
      return () => awareness.off('change', listener)
    },
    () => {
      const people = new Map<number, PresentPerson>()
      for (const [client, state] of awareness.getStates()) {
        const own = client === awareness.clientID
        const user = own ? me : readPresence(state).user
        if (!user) continue
        const before = people.get(user.id)
        people.set(user.id, { id: user.id, name: user.name, own: (before?.own ?? false) || own })
      }
      const next = [...people.values()].sort((a, b) => a.name.localeCompare(b.name))
      // The same people give the same list, so that a moving caret redraws nothing here.
      if (JSON.stringify(next) !== JSON.stringify(last.current)) last.current = next
      return last.current
    },
  )
}
