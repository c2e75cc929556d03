import { useEffect, useEffectEvent, useMemo } from 'react'
import * as Y from 'yjs'
import { equationsOf, parametersOf, settingsOf, statesOf } from '#shared/ydoc/shape.ts'
import { announce } from '#src/lib/announce.ts'
import { tableOrigin } from './draft-tables.ts'

/**
 * One history of this tab's own edits, of the equation block and of the tables alike: steps are undone in the order they
 * were made. What others wrote is never undone, and never written over: where they changed a cell since, it stays theirs,
 * and a row somebody added stays once another person has written in it.
 */
export function createDraftHistory(doc: Y.Doc): Y.UndoManager {
  const roots = [equationsOf(doc), parametersOf(doc), statesOf(doc), settingsOf(doc)]
  // The editor adds its own origin to these; what comes from the server has the connection's.
  const history = new Y.UndoManager(roots, {
    trackedOrigins: new Set([tableOrigin]),
    deleteFilter: (item) => !holdsRowOfOthers(item, doc.clientID),
  })
  let last: unknown = null
  doc.on('beforeTransaction', ({ origin }: Y.Transaction) => {
    if (!history.trackedOrigins.has(origin) || origin === last) return
    // A step holds text or cells, never both, however quickly they follow.
    history.stopCapturing()
    last = origin
  })
  return history
}

/** A row that others wrote in, or a cell as that row was made with: taken away, what they wrote would go with it. */
function holdsRowOfOthers(item: Y.Item, own: number): boolean {
  const first = item.parentSub !== null && item.left === null
  const row = item.content instanceof Y.ContentType ? item.content.type : first ? item.parent : null
  if (!(row instanceof Y.Map) || row.parent === null) return false
  return [...row._map.values()].some((cell) => !cell.deleted && cell.id.client !== own)
}

export function useDraftHistory(doc: Y.Doc): Y.UndoManager {
  // It ends with its document, which the connection ends.
  const history = useMemo(() => createDraftHistory(doc), [doc])
  useEffect(() => {
    const text = equationsOf(doc)
    const tell = ({
      type,
      changedParentTypes,
    }: {
      type: 'undo' | 'redo'
      changedParentTypes: ReadonlyMap<unknown, unknown>
    }) => {
      // In the block it is seen; a cell may be far from where the key was pressed.
      if (!changedParentTypes.has(text)) announce(type === 'undo' ? 'Undone in the tables' : 'Done again in the tables')
    }
    history.on('stack-item-popped', tell)
    return () => history.off('stack-item-popped', tell)
  }, [doc, history])
  return history
}

/** What a key means to the history: Ctrl+Z, and Ctrl+Y or Ctrl+Shift+Z (Command on a Mac). */
export function historyKey(event: Pick<KeyboardEvent, 'key' | 'ctrlKey' | 'metaKey' | 'shiftKey' | 'altKey'>) {
  if (!(event.ctrlKey || event.metaKey) || event.altKey) return null
  const key = event.key.toLowerCase()
  if (key === 'z') return event.shiftKey ? 'redo' : 'undo'
  return key === 'y' && !event.shiftKey ? 'redo' : null
}

/** The history's keys in the cells and settings of the column; the block has them in its own keymap. */
export function useHistoryKeys(column: React.RefObject<HTMLElement | null>, history: Y.UndoManager, active: boolean) {
  const onKey = useEffectEvent((event: KeyboardEvent) => {
    const act = active && !event.defaultPrevented ? historyKey(event) : null
    if (!act || (event.target instanceof Element && event.target.closest('.cm-editor'))) return
    // The browser's own undo of a field knows nothing of what others typed into it.
    event.preventDefault()
    history[act]()
  })
  useEffect(() => {
    const element = column.current
    if (!element) return
    const listen = (event: KeyboardEvent) => onKey(event)
    element.addEventListener('keydown', listen)
    return () => element.removeEventListener('keydown', listen)
  }, [column])
}
