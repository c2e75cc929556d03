import type { RawData, WebSocket } from 'ws'
import { type CloseCode, closeCodes, closeReasons, type PresenceUser, type RoomState } from '#shared/ydoc/rooms.ts'
import { readFrame, readPresence, writeNews, writeSaved, writeSyncStep1, writeSyncStep2 } from './frames.ts'
import type { CollabLimits } from './limits.ts'
import { maySend, type PageAccess, stateByPolicy } from './policy.ts'
import { TokenBucket } from './rate.ts'
import type { CollabLog, Member, Room } from './rooms.ts'

/**
 * One socket of the co-editing server.
 *
 * Address: /collab/:pageId?generation=G. G is the draft's generation that the browser's document belongs to; it is left
 * out as long as the document is empty. Another generation than the present one closes with 4410, so that two documents
 * of different origin are never merged.
 *
 * Every message is binary: varUint type, then
 *
 *     0 sync       varUint 0, varUint8Array state vector     sync step 1, both ways: send me what I lack
 *                  varUint 1, varUint8Array update           sync step 2, both ways: that is what you lack
 *                  varUint 2, varUint8Array update           update, both ways: an edit
 *     1 presence   varUint8Array { varUint count, count x { varUint clientId, varUint clock, varString JSON } }
 *     100 saved    varUint n, varUint epoch                  server to browser
 *     101 room     varString JSON { state, generation }      server to browser
 *
 * (varUint, varString and varUint8Array as in lib0; sync and presence as in y-protocols.) Anything else, text frames and
 * surplus bytes included, is a bad frame; after three of them the socket is closed.
 *
 * Course of a connection: the server sends 101, to those who may write its sync step 1, then 100 with n = 0, then
 * presence. The browser sends its sync step 1 and gets step 2; from then on it gets the others' updates. n counts the
 * browser's sync step 2 and update messages in the order they were sent; "100 n" means that the first n are committed, or
 * need not be because a later one among them repeats them.
 *
 * Held back: a socket is *behind* from its beginning, and whenever an edit of it could not be taken (a review is under
 * way, the database does not answer, the document is full). While it is behind its updates are counted and dropped, and
 * only a sync step 2, which holds all it has that the server lacks, is looked at. As soon as edits can be taken the
 * server asks for that with a sync step 1. Thus nothing that was refused is lost, and nothing arrives without what it
 * depends on.
 */

/** Who is at the other end. */
export interface CollabPerson {
  personId: number
  name: string
  /** The person's epoch that the session began with. */
  epoch: number
  sessionHash: string
}

/** What a connection needs of the server around it. */
export interface ConnectionDependencies {
  limits: CollabLimits
  log: CollabLog
  /** An edit came: the session is in use. */
  active(connection: Connection): void
  gone(connection: Connection): void
}

/** One socket, from its handshake to its end; see the top of this file. */
export class Connection implements Member {
  readonly person: CollabPerson
  readonly pageId: number
  readonly epoch: number
  /** When session, role and page were looked up last, milliseconds since 1970. */
  checkedAt = Date.now()
  /** When its edits were last noted as activity of the session. */
  notedAt = 0
  private readonly socket: WebSocket
  private readonly dependencies: ConnectionDependencies
  private readonly frames: TokenBucket
  private readonly bytes: TokenBucket
  private access: PageAccess | null = null
  private room: Room | null = null
  private inbox: (Uint8Array | null)[] = []
  private inboxBytes = 0
  private pausedUntil: NodeJS.Timeout | null = null
  private overRateSince: number | null = null
  private open = true
  private heardAt = Date.now()
  private following = false
  private behind = true
  private full = false
  private askTimer: NodeJS.Timeout | null = null
  private told: RoomState | null = null
  /** When the right to edit was last taken away while connected. */
  private heldSince = Number.NEGATIVE_INFINITY
  private received = 0
  private saved = 0
  private acknowledging = false
  private badFrames = 0
  private forbidden = 0

  constructor(
    socket: WebSocket,
    of: { person: CollabPerson; pageId: number; epoch: number },
    dependencies: ConnectionDependencies,
  ) {
    this.socket = socket
    this.person = of.person
    this.pageId = of.pageId
    this.epoch = of.epoch
    this.dependencies = dependencies
    const { rate } = dependencies.limits
    this.frames = new TokenBucket(rate.frames, Date.now())
    this.bytes = new TokenBucket(rate.bytes, Date.now())
    // Before anything is awaited: the browser speaks at once.
    socket.on('message', (data, isBinary) => this.receive(data, isBinary))
    socket.on('pong', () => {
      this.heardAt = Date.now()
    })
    socket.on('close', () => this.ended())
    socket.on('error', (error) => {
      dependencies.log.info({ err: error, ...this.where }, 'collab: socket error')
      // ws answers the protocol's own violations with their codes; whatever it does not close is cut.
      setTimeout(() => socket.terminate(), dependencies.limits.socket.close).unref()
    })
  }

  get personId(): number {
    return this.person.personId
  }

  get follows(): boolean {
    return this.following
  }

  get isOpen(): boolean {
    return this.open
  }

  get user(): PresenceUser {
    const role = this.access?.role
    const { personId, name } = this.person
    return { id: personId, name, role: role === 'contributor' || role === 'maintainer' ? role : 'reader' }
  }

  private get where() {
    return { pageId: this.pageId, personId: this.personId, connection: this.epoch }
  }

  /** The room is loaded: what waited is handled, in the order it came. */
  enter(room: Room, access: PageAccess): void {
    if (!this.open) return
    this.room = room
    this.access = access
    this.roomChanged()
    this.send(writeSaved(0, this.epoch))
    const others = room.presence.everybodyBut(this)
    if (others) this.send(others)
    this.work()
  }

  /** Rights or the page's state were looked up again. */
  accessChanged(access: PageAccess): void {
    const roleChanged = this.access?.role !== access.role
    this.access = access
    this.roomChanged()
    if (roleChanged) this.room?.presence.refresh(this)
  }

  roomChanged(): void {
    const { room, access } = this
    if (!room || !access || !this.open) return
    const byPolicy = stateByPolicy(access)
    const byRoom = room.notSaving ? 'not-saving' : room.full ? 'no-room' : this.full ? 'full' : 'live'
    const state = byPolicy === 'live' ? byRoom : byPolicy
    if (state === this.told) return
    const could = this.takesEdits
    this.told = state
    this.send(writeNews({ state, generation: room.generation }))
    if (this.takesEdits && !could) this.askForAll(room)
    if (!this.takesEdits && could) {
      this.behind = true
      this.heldSince = Date.now()
    }
  }

  private get takesEdits(): boolean {
    return this.told === 'live' || this.told === 'full'
  }

  private askForAll(room: Room): void {
    if (this.askTimer) clearTimeout(this.askTimer)
    this.askTimer = null
    this.behind = true
    this.send(writeSyncStep1(room.stateVector()))
  }

  private askLater(): void {
    this.askTimer ??= setTimeout(() => {
      this.askTimer = null
      if (this.open && this.room && this.behind && this.takesEdits) this.askForAll(this.room)
    }, this.dependencies.limits.room.askAgain)
  }

  private receive(data: RawData, isBinary: boolean): void {
    if (!this.open) return
    this.heardAt = Date.now()
    const { waitingFrames, waitingBytes } = this.dependencies.limits.rate
    const bytes = isBinary && Buffer.isBuffer(data) ? data : null
    this.inbox.push(bytes)
    this.inboxBytes += bytes?.byteLength ?? 0
    if (this.inbox.length > waitingFrames || this.inboxBytes > waitingBytes) this.close(closeCodes.tooMany)
    else this.work()
  }

  /** Handles what waits, as fast as the socket's rate allows. */
  private work(): void {
    while (this.open && this.room && !this.pausedUntil) {
      const now = Date.now()
      const next = this.inbox[0]
      if (next === undefined) {
        this.overRateSince = null
        return
      }
      const wait = Math.max(this.frames.wait(now), this.bytes.wait(now))
      if (wait > 0) {
        this.slowDown(now, wait)
        return
      }
      this.inbox.shift()
      this.inboxBytes -= next?.byteLength ?? 0
      this.frames.take(1, now)
      this.bytes.take(next?.byteLength ?? 0, now)
      try {
        this.handle(this.room, next)
      } catch (error) {
        this.dependencies.log.warn({ err: error, ...this.where }, 'collab: frame not handled')
        this.strike()
      }
    }
  }

  private slowDown(now: number, wait: number): void {
    this.overRateSince ??= now
    if (now - this.overRateSince > this.dependencies.limits.rate.patience) {
      this.close(closeCodes.tooMany)
      return
    }
    this.socket.pause()
    this.pausedUntil = setTimeout(() => {
      this.pausedUntil = null
      this.socket.resume()
      this.work()
    }, Math.ceil(wait))
  }

  private handle(room: Room, bytes: Uint8Array | null): void {
    const frame = bytes ? readFrame(bytes) : null
    switch (frame?.kind) {
      case 'sync-step-1':
        this.answer(room, frame.payload)
        break
      case 'sync-step-2':
      case 'update':
        this.edit(room, frame.kind, frame.payload)
        break
      case 'awareness':
        this.present(room, frame.payload)
        break
      default:
        this.strike()
    }
  }

  private answer(room: Room, stateVector: Uint8Array): void {
    if (!this.access || !maySend('sync-step-1', this.access)) {
      this.notAllowed()
      return
    }
    this.frames.take(this.dependencies.limits.rate.syncStep1Frames - 1, Date.now())
    this.send(writeSyncStep2(room.missingFrom(stateVector)))
    this.following = true
  }

  private present(room: Room, states: Uint8Array): void {
    const entries = readPresence(states)
    if (!this.access || !maySend('awareness', this.access)) this.notAllowed()
    else if (!entries || !room.presence.take(this, entries)) this.strike()
  }

  private edit(room: Room, kind: 'sync-step-2' | 'update', update: Uint8Array): void {
    const index = ++this.received
    if (!this.access || !maySend(kind, this.access)) {
      this.behind = true
      // While a review locks the draft, and just after a change of rights, edits may still be on their way.
      const onItsWay = Date.now() - this.heldSince < this.dependencies.limits.grace
      if (this.told !== 'locked' && !onItsWay) this.notAllowed()
      return
    }
    if (kind === 'update') this.dependencies.active(this)
    if (!this.takesEdits || room.notSaving) {
      this.behind = true
      return
    }
    if (kind === 'update' && this.behind) {
      this.askLater()
      return
    }
    const outcome = room.submit(this, update, () => this.acknowledge(index))
    switch (outcome) {
      case 'ok':
        this.behind = false
        this.setFull(false)
        return
      case 'full':
        // The room has told everybody.
        this.behind = true
        return
      case 'text-full':
        this.behind = true
        this.setFull(true)
        return
      case 'orphaned':
        this.dependencies.log.warn(this.where, 'collab: orphaned edits')
        this.close(closeCodes.orphaned)
        return
      case 'malformed':
      case 'foreign':
        this.behind = true
        this.strike()
        return
      case 'closed':
        return
    }
  }

  private setFull(full: boolean): void {
    if (this.full === full) return
    this.full = full
    this.roomChanged()
  }

  /** Edits up to the index are committed; told once for all that one batch committed. */
  private acknowledge(index: number): void {
    this.saved = Math.max(this.saved, index)
    if (this.acknowledging) return
    this.acknowledging = true
    queueMicrotask(() => {
      this.acknowledging = false
      this.send(writeSaved(this.saved, this.epoch))
    })
  }

  private strike(): void {
    this.badFrames++
    if (this.badFrames >= this.dependencies.limits.strikes) this.close(closeCodes.badFrame)
  }

  private notAllowed(): void {
    this.forbidden++
    if (this.forbidden >= this.dependencies.limits.strikes) this.close(closeCodes.mayNot)
  }

  send(frame: Uint8Array): void {
    const { socket } = this
    if (socket.readyState !== socket.OPEN) return
    if (socket.bufferedAmount > this.dependencies.limits.socket.unsent) {
      this.dependencies.log.warn(this.where, 'collab: reader too slow')
      socket.terminate()
      return
    }
    socket.send(frame)
  }

  /** Regular sign of life in both directions; a socket that did not answer the last one is cut. */
  beat(): void {
    const silent = this.silentFor(Date.now())
    if (silent > 2 * this.dependencies.limits.socket.heartbeat && !this.pausedUntil) {
      this.socket.terminate()
      return
    }
    if (this.socket.readyState === this.socket.OPEN) this.socket.ping()
    if (this.room) this.send(writeSaved(this.saved, this.epoch))
  }

  /** Milliseconds since anything was heard of it. */
  silentFor(now: number): number {
    return now - this.heardAt
  }

  close(code: CloseCode): void {
    if (!this.open) return
    this.leave()
    this.dependencies.log.info({ ...this.where, code }, 'collab: closed')
    this.socket.resume()
    this.socket.close(code, closeReasons[code])
    setTimeout(() => this.socket.terminate(), this.dependencies.limits.socket.close).unref()
  }

  private ended(): void {
    this.leave()
    this.dependencies.gone(this)
  }

  private leave(): void {
    this.open = false
    this.inbox = []
    for (const timer of [this.pausedUntil, this.askTimer]) if (timer) clearTimeout(timer)
    this.pausedUntil = null
    this.askTimer = null
    this.room?.leave(this)
    this.room = null
  }
}
