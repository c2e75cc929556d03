import { z } from 'zod'
import type { PresenceUser } from '#shared/ydoc/rooms.ts'
import { type PresenceEntry, writePresence } from './frames.ts'
import type { CollabLimits } from './limits.ts'

/** What presence needs of a socket. */
export interface PresentSocket {
  readonly personId: number
  /** What is said of the person whatever the browser says. */
  readonly user: PresenceUser
  send(frame: Uint8Array): void
}

interface Held<Socket> {
  owner: Socket
  clientId: number
  clock: number
  state: Record<string, unknown>
}

const anyObject = z.record(z.string(), z.unknown())

/**
 * Who is in a room and where their carets are. A socket speaks for one Yjs client id, the first it names, and for no
 * other; states of others that a browser sends are not looked at (the browser's provider repeats what it hears). The
 * clocks sent out are the server's own, so that a browser that comes back after a cut line is seen again at once.
 */
export class Presence<Socket extends PresentSocket> {
  private readonly limits: CollabLimits['presence']
  private readonly sockets: Iterable<Socket>
  private readonly held = new Map<number, Held<Socket>>()
  private readonly owned = new Map<Socket, number>()
  private readonly changed = new Set<number>()
  private readonly left = new Map<number, number>()
  private timer: NodeJS.Timeout | null = null
  private lastSent = 0
  /** Starts at the time, so that clocks grow also from one process to the next. */
  private clock = Date.now()

  constructor(sockets: Iterable<Socket>, limits: CollabLimits['presence']) {
    this.sockets = sockets
    this.limits = limits
  }

  /**
   * Takes the states a socket sent.
   *
   * @returns false where its own state is too large or no object, or it claims a client id that another person's socket
   * speaks for.
   */
  take(socket: Socket, entries: readonly PresenceEntry[]): boolean {
    const clientId = this.owned.get(socket) ?? (entries.length === 1 ? entries[0]?.clientId : undefined)
    const own = entries.find((entry) => entry.clientId === clientId)
    if (clientId === undefined || !own) return true
    const before = this.held.get(clientId)
    if (before && before.owner !== socket) {
      // The same browser tab after a cut line, while its old socket is not known to be dead.
      if (before.owner.personId !== socket.personId) return false
      this.owned.delete(before.owner)
    }
    if (own.json.length > this.limits.state) return false
    const state = parseState(own.json)
    if (state === undefined) return false
    this.owned.set(socket, clientId)
    if (state === null) this.forget(clientId)
    else {
      this.held.set(clientId, { owner: socket, clientId, clock: ++this.clock, state })
      this.left.delete(clientId)
      this.changed.add(clientId)
    }
    this.schedule()
    return true
  }

  /** The socket's role or name changed: what others see of it follows. */
  refresh(socket: Socket): void {
    const held = this.held.get(this.owned.get(socket) ?? -1)
    if (held?.owner !== socket) return
    held.clock = ++this.clock
    this.changed.add(held.clientId)
    this.schedule()
  }

  leave(socket: Socket): void {
    const clientId = this.owned.get(socket)
    this.owned.delete(socket)
    if (clientId === undefined || this.held.get(clientId)?.owner !== socket) return
    this.forget(clientId)
    this.schedule()
  }

  /** Everybody else's state, for a socket that has just joined; null where it is alone. */
  everybodyBut(socket: Socket): Uint8Array | null {
    const entries = [...this.held.values()].filter((held) => held.owner !== socket).map(entryOf)
    return entries.length > 0 ? writePresence(entries) : null
  }

  stop(): void {
    if (this.timer) clearTimeout(this.timer)
    this.timer = null
  }

  private forget(clientId: number): void {
    this.held.delete(clientId)
    this.changed.delete(clientId)
    this.left.set(clientId, ++this.clock)
  }

  private schedule(): void {
    if (this.timer) return
    const pause = 1000 / this.limits.perSecond
    this.timer = setTimeout(() => this.flush(), Math.max(0, this.lastSent + pause - Date.now()))
  }

  private flush(): void {
    this.timer = null
    this.lastSent = Date.now()
    const entries: PresenceEntry[] = [...this.left].map(([clientId, clock]) => ({ clientId, clock, json: 'null' }))
    for (const clientId of this.changed) {
      const held = this.held.get(clientId)
      if (held) entries.push(entryOf(held))
    }
    this.left.clear()
    this.changed.clear()
    const common = entries.length > 0 ? writePresence(entries) : null
    for (const socket of this.sockets) {
      // Nobody is told of oneself: a browser's own state is newer than its echo.
      const own = this.owned.get(socket)
      const others = entries.filter((entry) => entry.clientId !== own)
      if (others.length === entries.length) {
        if (common) socket.send(common)
      } else if (others.length > 0) socket.send(writePresence(others))
    }
  }
}

const entryOf = ({ clientId, clock, owner, state }: Held<PresentSocket>): PresenceEntry => ({
  clientId,
  clock,
  json: JSON.stringify({ ...state, user: owner.user }),
})

/** The state, null where the person says they left, undefined where it is neither an object nor null. */
function parseState(json: string): Record<string, unknown> | null | undefined {
  try {
    const value: unknown = JSON.parse(json)
    if (value === null) return null
    const read = anyObject.safeParse(value)
    return read.success && !Object.hasOwn(Object(value), '__proto__') ? read.data : undefined
  } catch {
    return undefined
  }
}
