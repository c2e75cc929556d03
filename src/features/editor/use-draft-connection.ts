import { useEffect, useRef, useState, useSyncExternalStore } from 'react'
import {
  attachToWindow,
  createDraftConnection,
  type DraftConnection,
  type DraftConnectionState,
} from './draft-connection.ts'

const collabAddress = () => `${window.location.protocol === 'https:' ? 'wss' : 'ws'}://${window.location.host}/collab`

/** The draft's connection while the screen stands; `renew` begins with a fresh document (a new generation). */
export function useDraftConnection(pageId: number): { connection: DraftConnection | null; renew: () => void } {
  const [connection, setConnection] = useState<DraftConnection | null>(null)
  const [turn, setTurn] = useState(0)
  // biome-ignore lint/correctness/useExhaustiveDependencies: a new turn means a new document
  useEffect(() => {
    const made = createDraftConnection({ url: collabAddress(), pageId })
    const detach = attachToWindow(made, window)
    setConnection(made)
    return () => {
      detach()
      made.close()
      setConnection(null)
    }
  }, [pageId, turn])
  return { connection, renew: () => setTurn((before) => before + 1) }
}

export function useConnectionState(connection: DraftConnection): DraftConnectionState {
  return useSyncExternalStore(connection.subscribe, connection.getState)
}

export interface PresentPerson {
  id: number
  name: string
  own: boolean
  editing: boolean
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
        const user: unknown = client === awareness.clientID ? me : state.user
        if (typeof user !== 'object' || user === null || !('id' in user) || !('name' in user)) continue
        if (typeof user.id !== 'number' || typeof user.name !== 'string') continue
        const before = people.get(user.id)
        people.set(user.id, {
          id: user.id,
          name: user.name,
          own: (before?.own ?? false) || client === awareness.clientID,
          editing: (before?.editing ?? false) || (state.cursor ?? null) !== null,
        })
      }
      const next = [...people.values()].sort((a, b) => a.name.localeCompare(b.name))
      // The same people give the same list, so that a moving caret redraws nothing here.
      if (JSON.stringify(next) !== JSON.stringify(last.current)) last.current = next
      return last.current
    },
  )
}
