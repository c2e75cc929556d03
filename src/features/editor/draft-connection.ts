import { diffArrays } from 'diff'
import * as decoding from 'lib0/decoding'
import type { Awareness } from 'y-protocols/awareness'
import { WebsocketProvider } from 'y-websocket'
import * as Y from 'yjs'
import type { DraftContent } from '#shared/model/draft.ts'
import {
  closeCodes,
  closeReasons,
  isFinalClose,
  messageAwareness,
  messageRoomState,
  messageSaved,
  messageSync,
  type RoomState,
  roomNews,
  syncStep2,
  syncUpdate,
} from '#shared/ydoc/rooms.ts'
import { prepareRoots, readDraft } from '#shared/ydoc/shape.ts'

/**
 * The browser's end of the co-editing socket (wire format: shared/ydoc/rooms.ts). It knows which edits of this tab are
 * committed: the server counts the messages with edits it committed, this side counts those it sent. An edit stays among
 * the unsaved until then; the document keeps it, and after a cut line it is sent again by itself. No React here.
 */

/**
 * connecting: never had the document yet. saved: everything is committed. saving: edits are on their way (or held back:
 * see `room`). offline: the line is cut; it is tried again by itself. refused: the server decided; not tried again.
 */
export type DraftPhase = 'connecting' | 'saved' | 'saving' | 'offline' | 'refused'

/** A new object with every change, so that it can be compared by identity. */
export interface DraftConnectionState {
  phase: DraftPhase
  /** What the room takes; null until it said so. */
  room: RoomState | null
  generation: number | null
  /** The document has come once: before that nothing may be typed. */
  synced: boolean
  /** Edits of this tab that are not committed. */
  unsaved: number
  /** Why the line was closed last, in words for the user; null where it is open. */
  closed: { code: number; text: string } | null
}

/** Edits that the server does not have: lines of the equation block, and cells of tables and settings. */
export interface UnsavedEdits {
  lines: string[]
  cells: { table: 'parameters' | 'states' | 'settings'; row: string; cell: string; value: string }[]
}

export interface DraftConnection {
  doc: Y.Doc
  /** Who is here. `user` ({ id, name, role }) is the server's word; setLocalStateField('cursor', …) is this side's. */
  awareness: Awareness
  /** Origin of changes that came from others. */
  origin: object
  getState(): DraftConnectionState
  subscribe(listener: () => void): () => void
  /** What this document has over what the server is known to have. */
  unsavedEdits(): UnsavedEdits
  /** Connects now instead of waiting, also after a refusal that may have ended (signed in again). */
  retryNow(): void
  close(): void
}

export interface DraftConnectionOptions {
  /** wss://host/collab */
  url: string
  pageId: number
  onState?: (state: DraftConnectionState) => void
  /** For tests outside a browser. */
  WebSocketPolyfill?: typeof WebSocket
  random?: () => number
}

const quickest = 100
const longestPause = { least: 10_000, most: 30_000 }

export function createDraftConnection(options: DraftConnectionOptions): DraftConnection {
  const random = options.random ?? Math.random
  const doc = new Y.Doc()
  prepareRoots(doc)
  /** What the server is known to have. */
  const known = new Y.Doc()
  const pending: { update: Uint8Array; index: number | null }[] = []
  const listeners = new Set<() => void>()
  let sent = 0
  let assigned = 0
  let connected = false
  let tried = false
  let state: DraftConnectionState = {
    phase: 'connecting',
    room: null,
    generation: null,
    synced: false,
    unsaved: 0,
    closed: null,
  }

  function set(change: Partial<DraftConnectionState>): void {
    const next = { ...state, ...change, unsaved: pending.length }
    next.phase = phaseOf(next)
    const same = Object.entries(next).every(([key, value]) => state[key as keyof DraftConnectionState] === value)
    if (same) return
    state = next
    options.onState?.(state)
    for (const listener of [...listeners]) listener()
  }

  function phaseOf(next: DraftConnectionState): DraftPhase {
    if (next.closed && isFinalClose(next.closed.code)) return 'refused'
    if (connected && provider.synced) return pending.length > 0 ? 'saving' : 'saved'
    return next.synced || tried ? 'offline' : 'connecting'
  }

  /** Sees every message before it leaves. @returns false where it is not worth sending. */
  function onSend(bytes: Uint8Array): boolean {
    if (bytes[0] === messageAwareness) return speaksFor(bytes, doc.clientID)
    if (bytes[0] !== messageSync || (bytes[1] !== syncStep2 && bytes[1] !== syncUpdate)) return true
    sent++
    if (bytes[1] === syncStep2) {
      // It holds everything the server lacks, so it stands for all that was sent or kept before.
      for (const edit of pending) edit.index = sent
      assigned = sent
    }
    return true
  }

  const provider = new WebsocketProvider(options.url, String(options.pageId), doc, {
    connect: false,
    disableBc: true,
    maxBackoffTime: longestPause.least,
    shouldReconnect: (event) => !isFinalClose(event.code),
    WebSocketPolyfill: watched(options.WebSocketPolyfill ?? WebSocket, onSend),
  })

  provider.messageHandlers[messageSaved] = (_encoder, decoder) => {
    const committed = decoding.readVarUint(decoder)
    const done = pending.filter(({ index }) => index !== null && index <= committed)
    for (const { update } of done) Y.applyUpdate(known, update)
    if (done.length === 0) return
    pending.splice(0, pending.length, ...pending.filter((edit) => !done.includes(edit)))
    set({})
  }
  provider.messageHandlers[messageRoomState] = (_encoder, decoder) => {
    const news = roomNews.safeParse(JSON.parse(decoding.readVarString(decoder)))
    if (!news.success) return
    // From now on this document belongs to that generation and is never merged into another.
    provider.params = { generation: String(news.data.generation) }
    set({ room: news.data.state, generation: news.data.generation })
  }

  // Registered after the provider's own listener, which has sent the edit by now where the line is open.
  doc.on('update', (update: Uint8Array, origin: unknown) => {
    if (origin === provider) {
      Y.applyUpdate(known, update)
      return
    }
    pending.push({ update, index: sent > assigned ? sent : null })
    assigned = sent
    set({})
  })

  provider.on('status', ({ status }) => {
    connected = status === 'connected'
    if (connected) {
      sent = 0
      assigned = 0
    } else for (const edit of pending) edit.index = null
    set({})
  })
  provider.on('sync', (synced: boolean) => set(synced ? { synced, closed: null } : {}))
  provider.on('connection-close', (event) => {
    tried = true
    // The pause that now begins: doubled each time up to 10 to 30 s, and never the same for two browsers.
    const cap = longestPause.least + random() * (longestPause.most - longestPause.least)
    const next = Math.min(cap, quickest * 2 ** (provider.wsUnsuccessfulReconnects + 1))
    provider.maxBackoffTime = next * (0.5 + random() / 2)
    if (event) set({ closed: { code: event.code, text: reasonOf(event) } })
    else set({})
  })
  provider.connect()

  return {
    doc,
    awareness: provider.awareness,
    origin: provider,
    getState: () => state,
    subscribe(listener) {
      listeners.add(listener)
      return () => {
        listeners.delete(listener)
      }
    },
    unsavedEdits: () => editsBetween(readDraft(known), readDraft(doc)),
    retryNow() {
      if (provider.wsconnected) return
      provider.disconnect()
      provider.wsUnsuccessfulReconnects = 0
      tried = true
      set({ closed: null })
      provider.connect()
    },
    close() {
      listeners.clear()
      provider.destroy()
      provider.awareness.destroy()
      known.destroy()
      doc.destroy()
    },
  }
}

/**
 * For the page around the editor: asks before a tab with unsaved edits is closed, and connects as soon as the browser
 * says that it is online again. @returns a function that undoes it.
 */
export function attachToWindow(connection: DraftConnection, target: Window): () => void {
  const ask = (event: BeforeUnloadEvent) => {
    if (connection.getState().unsaved > 0) event.preventDefault()
  }
  const online = () => {
    if (connection.getState().phase === 'offline') connection.retryNow()
  }
  target.addEventListener('beforeunload', ask)
  target.addEventListener('online', online)
  return () => {
    target.removeEventListener('beforeunload', ask)
    target.removeEventListener('online', online)
  }
}

function watched(Base: typeof WebSocket, onSend: (bytes: Uint8Array) => boolean): typeof WebSocket {
  return class extends Base {
    override send(data: Parameters<WebSocket['send']>[0]): void {
      if (!(data instanceof Uint8Array) || onSend(data)) super.send(data)
    }
  }
}

/** The provider repeats to the server what it hears of others; only messages about this tab are worth sending. */
function speaksFor(bytes: Uint8Array, clientId: number): boolean {
  const decoder = decoding.createDecoder(bytes)
  decoding.readVarUint(decoder)
  const states = decoding.createDecoder(decoding.readVarUint8Array(decoder))
  for (let count = decoding.readVarUint(states); count > 0; count--) {
    if (decoding.readVarUint(states) === clientId) return true
    decoding.readVarUint(states)
    decoding.readVarString(states)
  }
  return false
}

function reasonOf(event: CloseEvent): string {
  if (event.reason !== '') return event.reason
  const known = Object.values(closeCodes).find((code) => code === event.code)
  return known ? closeReasons[known] : 'The line to the library is cut. Your edits are kept here and sent again.'
}

function editsBetween(before: DraftContent, after: DraftContent): UnsavedEdits {
  const lines = diffArrays(before.equations.split('\n'), after.equations.split('\n'))
    .filter((part) => part.added)
    .flatMap((part) => part.value)
    .filter((line) => line.trim() !== '')
  const cells: UnsavedEdits['cells'] = []
  for (const table of ['parameters', 'states'] as const) {
    const known = new Map<string, object>(before[table].map((row) => [row.id, row]))
    for (const row of after[table]) {
      const old: Record<string, unknown> = { ...known.get(row.id) }
      for (const [cell, value] of Object.entries(row)) {
        if (cell !== 'id' && value !== (old[cell] ?? '')) cells.push({ table, row: row.symbol, cell, value })
      }
    }
  }
  for (const [cell, value] of Object.entries(after.settings)) {
    if (value !== (before.settings[cell] ?? '')) cells.push({ table: 'settings', row: '', cell, value })
  }
  return { lines, cells }
}
