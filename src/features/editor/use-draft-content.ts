import { useSyncExternalStore } from 'react'
import type * as Y from 'yjs'
import type { DraftContent } from '#shared/model/draft.ts'
import { readDraft } from '#shared/ydoc/shape.ts'

/** One reader a document: the whole draft as plain strings, made anew at most once an update. */
export interface DraftContentStore {
  subscribe(listener: () => void): () => void
  get(): DraftContent
}

const stores = new WeakMap<Y.Doc, DraftContentStore>()

export function draftContentStore(doc: Y.Doc): DraftContentStore {
  const known = stores.get(doc)
  if (known) return known
  let content: DraftContent | null = null
  const listeners = new Set<() => void>()
  const onUpdate = () => {
    content = null
    for (const listener of listeners) listener()
  }
  const store: DraftContentStore = {
    subscribe(listener) {
      if (listeners.size === 0) doc.on('afterTransaction', onUpdate)
      listeners.add(listener)
      return () => {
        listeners.delete(listener)
        if (listeners.size === 0) doc.off('afterTransaction', onUpdate)
      }
    },
    get() {
      content ??= readDraft(doc)
      return content
    },
  }
  stores.set(doc, store)
  return store
}

/** The co-edited draft as it stands; a new object only after a change. */
export function useDraftContent(doc: Y.Doc): DraftContent {
  const store = draftContentStore(doc)
  return useSyncExternalStore(store.subscribe, store.get)
}
