/** What other parts of the process may want to know once an act is committed. */
export type BusEvent =
  | { kind: 'page-changed'; pageId: number }
  | { kind: 'draft-changed'; pageId: number }
  | { kind: 'person-changed'; personId: number }
  | { kind: 'session-ended'; sessionHash: string }

export interface EventBus {
  /** The page's state, generation or read access, or somebody's role in its group, may have changed. */
  pageChanged(pageId: number): void
  /** The page's draft or what is attached to it changed: its card is due. */
  draftChanged(pageId: number): void
  /** The person's epoch, roles or disabled flag may have changed. */
  personChanged(personId: number): void
  /** One session ended: its sockets close. */
  sessionEnded(sessionHash: string): void
  /** @returns a function that ends the subscription. */
  subscribe(listener: (event: BusEvent) => void): () => void
}

/** A bus inside this process. A listener that throws is reported and keeps no other from hearing. */
export function createEventBus(report: (error: unknown) => void): EventBus {
  const listeners = new Set<(event: BusEvent) => void>()
  const tell = (event: BusEvent) => {
    for (const listener of [...listeners]) {
      try {
        listener(event)
      } catch (error) {
        report(error)
      }
    }
  }
  return {
    pageChanged: (pageId) => tell({ kind: 'page-changed', pageId }),
    draftChanged: (pageId) => tell({ kind: 'draft-changed', pageId }),
    personChanged: (personId) => tell({ kind: 'person-changed', personId }),
    sessionEnded: (sessionHash) => tell({ kind: 'session-ended', sessionHash }),
    subscribe(listener) {
      listeners.add(listener)
      return () => {
        listeners.delete(listener)
      }
    },
  }
}
