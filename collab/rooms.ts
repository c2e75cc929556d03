import * as Y from 'yjs'
import type { Database } from '#drizzle/client.ts'
import { utf8Length } from '#shared/model/utf8.ts'
import { type CloseCode, closeCodes } from '#shared/ydoc/rooms.ts'
import { equationsOf, rootNames } from '#shared/ydoc/shape.ts'
import { type Judgement, judgeUpdate } from './check-update.ts'
import { writeUpdate } from './frames.ts'
import type { CollabLimits } from './limits.ts'
import { type AppendRefusal, append, compact, type DraftOwner, DraftUnreadable, takeOver } from './persistence.ts'
import { Presence, type PresentSocket } from './presence.ts'
import { SaveQueue } from './save-queue.ts'

/**
 * A room is one page's draft in memory. Its states: loading, live, draining (nobody is left; it is written out and then
 * forgotten, unless somebody comes back), closed. Everything it does with the database runs in one chain, one thing after
 * another, and nothing is ever written that was not loaded first.
 */

/** What a room needs of a socket in it. */
export interface Member extends PresentSocket {
  /** Whether it has the document up to now and wants what follows. */
  readonly follows: boolean
  close(code: CloseCode): void
  /** Something about the room's state changed. */
  roomChanged(): void
}

/** Minimal logger; pino fits. */
export interface CollabLog {
  info(details: object, message: string): void
  warn(details: object, message: string): void
  error(details: object, message: string): void
}

/** What rooms share. */
export interface RoomDependencies {
  db: Database
  limits: CollabLimits
  now: () => Date
  log: CollabLog
  /** Edits of a page were committed; told at most every two seconds. */
  draftSaved?: ((pageId: number) => void) | undefined
}

/** What became of an update: see Judgement; full: the document is too large; closed: the room is. */
export type Outcome = Judgement | 'full' | 'closed'

const emptyStateVector = Uint8Array.of(0)
const savedPause = 2000

/** One page's draft in memory, its sockets, and its way into the database. */
export class Room {
  readonly pageId: number
  readonly members = new Set<Member>()
  readonly presence: Presence<Member>
  /** 'live', or the code to close with. Never rejects. */
  readonly loaded: Promise<'live' | CloseCode>
  private readonly dependencies: RoomDependencies
  private readonly forget: (room: Room, failed: boolean) => void
  private readonly queue: SaveQueue
  private stage: 'loading' | 'live' | 'draining' | 'closed' = 'loading'
  private owner: DraftOwner | null = null
  private doc: Y.Doc | null = null
  private chain: Promise<unknown> = Promise.resolve()
  private idleTimer: NodeJS.Timeout | null = null
  private savedTimer: NodeJS.Timeout | null = null
  private broadcastTimer: NodeJS.Timeout | null = null
  private outgoing: { update: Uint8Array; from: Member }[] = []
  private lastBroadcast = 0
  /** What the document itself said changed while an update was applied. */
  private captured: Uint8Array[] = []
  private textBytes: number | null = null
  private wholeState: Uint8Array | null = null
  /** At least the encoded size of the document. */
  private stateBytes = 0
  private sealed = false
  private failing = false
  private tooLarge = false
  private log = { rows: 0, bytes: 0, compactAt: 0, compacting: false }

  constructor(pageId: number, dependencies: RoomDependencies, forget: (room: Room, failed: boolean) => void) {
    this.pageId = pageId
    this.dependencies = dependencies
    this.forget = forget
    this.presence = new Presence<Member>(this.members, dependencies.limits.presence)
    this.log.compactAt = dependencies.limits.compaction.rows
    this.queue = new SaveQueue(
      {
        append: (rows) => append(dependencies.db, this.ownership, rows, dependencies.now()),
        inTurn: (work) => this.inTurn(work),
        saved: (rows, bytes) => this.onSaved(rows, bytes),
        notSaving: (failing) => this.onNotSaving(failing),
        refused: (reason) => this.onRefused(reason),
        report: (error) => dependencies.log.error({ err: error, pageId }, 'collab: edits could not be written'),
      },
      dependencies.limits.append,
    )
    this.loaded = this.inTurn(() => this.load())
  }

  /** The generation of the draft that is open here. */
  get generation(): number {
    return this.ownership.generation
  }

  /** True while the database does not take edits. */
  get notSaving(): boolean {
    return this.failing
  }

  /** True where the document with all its steps has reached its size limit: nothing is taken until a new generation. */
  get full(): boolean {
    return this.tooLarge
  }

  get closed(): boolean {
    return this.stage === 'closed'
  }

  /** Milliseconds since 1970 when the oldest edit that is not committed came, or null. */
  get unsavedSince(): number | null {
    return this.queue.unsavedSince
  }

  private get ownership(): DraftOwner {
    if (!this.owner) throw new Error('The room is not loaded.')
    return this.owner
  }

  private get document(): Y.Doc {
    if (!this.doc) throw new Error('The room is not loaded.')
    return this.doc
  }

  private inTurn<T>(work: () => Promise<T>): Promise<T> {
    const result = this.chain.then(work)
    this.chain = result.catch(() => undefined)
    return result
  }

  private async load(): Promise<'live' | CloseCode> {
    const { db, limits, log } = this.dependencies
    try {
      const loaded = await takeOver(db, this.pageId)
      if (this.closed) loaded?.doc.destroy()
      if (this.closed) return closeCodes.restart
      if (!loaded) return this.fail(closeCodes.noSuchRoom)
      this.owner = loaded
      this.doc = loaded.doc
      this.log = { ...this.log, rows: loaded.rows, bytes: loaded.bytes }
      loaded.doc.on('update', (update: Uint8Array) => this.captured.push(update))
      equationsOf(loaded.doc).observe(() => {
        this.textBytes = null
      })
      this.wholeState = Y.encodeStateAsUpdate(loaded.doc)
      this.stateBytes = this.wholeState.byteLength
      this.tooLarge = this.stateBytes > limits.document.state - limits.document.stateMargin
      this.stage = 'live'
      this.compactIfLong()
      return 'live'
    } catch (error) {
      const damaged = error instanceof DraftUnreadable
      log.error({ err: error, pageId: this.pageId }, damaged ? 'collab: damaged draft' : 'collab: draft not loaded')
      return this.fail(closeCodes.loadFailed)
    }
  }

  private fail(code: CloseCode): CloseCode {
    this.stage = 'closed'
    this.forget(this, code === closeCodes.loadFailed)
    return code
  }

  /** A socket is here, or waits for the room to load. */
  join(member: Member): void {
    if (this.idleTimer) clearTimeout(this.idleTimer)
    this.idleTimer = null
    if (this.stage === 'draining') this.stage = 'live'
    this.members.add(member)
  }

  leave(member: Member): void {
    if (this.closed) return
    this.presence.leave(member)
    if (!this.members.delete(member) || this.members.size > 0 || this.idleTimer) return
    this.idleTimer = setTimeout(() => void this.retire(), this.dependencies.limits.room.idle)
  }

  private async retire(): Promise<void> {
    this.idleTimer = null
    if (this.members.size > 0 || this.closed) return
    this.stage = 'draining'
    await this.queue.flush()
    await this.chain
    if (this.stage === 'draining') this.drop(closeCodes.restart)
  }

  /** The state vector, for a sync step 1. */
  stateVector(): Uint8Array {
    return Y.encodeStateVector(this.document)
  }

  /**
   * What a client with this state vector lacks.
   *
   * @throws where the state vector cannot be read.
   */
  missingFrom(stateVector: Uint8Array): Uint8Array {
    const nothing = stateVector.byteLength === emptyStateVector.byteLength && stateVector[0] === 0
    if (!nothing) return Y.encodeStateAsUpdate(this.document, stateVector)
    this.wholeState ??= Y.encodeStateAsUpdate(this.document)
    return this.wholeState
  }

  /**
   * Applies an update, shows it to the others, and queues it. `saved` is called once it is committed, also where it
   * changed nothing. With any other outcome than 'ok' the document is as it was (or the room is closed).
   */
  submit(from: Member, update: Uint8Array, saved: () => void): Outcome {
    if (this.stage !== 'live' || this.sealed) return 'closed'
    const { limits, now, log } = this.dependencies
    const doc = this.document
    this.textBytes ??= utf8Length(equationsOf(doc).toString())
    const judgement = judgeUpdate(doc, update, this.textBytes, limits.document)
    if (judgement !== 'ok') return judgement
    if (!this.hasRoomFor(update.byteLength)) return 'full'
    this.captured = []
    try {
      Y.applyUpdate(doc, update, from)
    } catch (error) {
      return this.spoiled({ err: error })
    }
    const { pendingStructs, pendingDs } = doc.store
    if (pendingStructs !== null || pendingDs !== null || doc.share.size > rootNames.length) return this.spoiled({})
    const [changed, more] = this.captured
    this.captured = []
    if (more) {
      log.warn({ pageId: this.pageId }, 'collab: one update told as two')
      return this.spoiled({})
    }
    const at = now()
    if (changed) {
      this.wholeState = null
      this.stateBytes += changed.byteLength
      this.broadcast(changed, from)
    }
    const row = changed ? { personId: from.personId, data: changed, at } : null
    this.queue.push({ row, at: at.getTime(), saved })
    return 'ok'
  }

  /** An update passed judgement and still did not go in whole: the document is loaded afresh, the browsers send again. */
  private spoiled(details: object): Outcome {
    this.dependencies.log.error({ ...details, pageId: this.pageId }, 'collab: the document in memory was spoiled')
    this.drop(closeCodes.restart)
    return 'closed'
  }

  private hasRoomFor(bytes: number): boolean {
    const { state, stateMargin } = this.dependencies.limits.document
    const most = state - stateMargin
    if (this.tooLarge) return false
    if (this.stateBytes + bytes <= most) return true
    this.wholeState = Y.encodeStateAsUpdate(this.document)
    this.stateBytes = this.wholeState.byteLength
    if (this.stateBytes + bytes <= most) return true
    this.tooLarge = true
    for (const member of this.members) member.roomChanged()
    return false
  }

  private broadcast(update: Uint8Array, from: Member): void {
    this.outgoing.push({ update, from })
    if (this.broadcastTimer) return
    const { merge } = this.dependencies.limits.broadcast
    const wait = this.lastBroadcast + merge - performance.now()
    if (wait <= 0) this.sendOutgoing()
    else this.broadcastTimer = setTimeout(() => this.sendOutgoing(), wait)
  }

  private sendOutgoing(): void {
    this.broadcastTimer = null
    const [first, ...others] = this.outgoing
    if (!first) return
    this.outgoing = []
    this.lastBroadcast = performance.now()
    const update = others.length === 0 ? first.update : Y.mergeUpdates([first, ...others].map((each) => each.update))
    const frame = writeUpdate(update)
    const only = others.every(({ from }) => from === first.from) ? first.from : null
    for (const member of this.members) if (member.follows && member !== only) member.send(frame)
  }

  private onSaved(rows: number, bytes: number): void {
    this.log.rows += rows
    this.log.bytes += bytes
    this.compactIfLong()
    const { draftSaved } = this.dependencies
    if (!draftSaved || this.savedTimer) return
    this.savedTimer = setTimeout(() => {
      this.savedTimer = null
      draftSaved(this.pageId)
    }, savedPause)
    this.savedTimer.unref()
  }

  private compactIfLong(): void {
    const { db, limits, now, log } = this.dependencies
    const long = this.log.rows >= this.log.compactAt || this.log.bytes >= limits.compaction.bytes
    if (!long || this.log.compacting || this.closed) return
    this.log.compacting = true
    this.inTurn(async () => {
      const left = await compact(db, this.ownership, now())
      // Not the owner any more: the next append will be told so.
      if (left) this.log = { ...left, compactAt: limits.compaction.rows, compacting: false }
    }).catch((error: unknown) => {
      log.error({ err: error, pageId: this.pageId }, 'collab: the log could not be compacted')
      this.log = { rows: 0, bytes: 0, compactAt: limits.compaction.rows, compacting: false }
    })
  }

  private onNotSaving(failing: boolean): void {
    this.failing = failing
    for (const member of this.members) member.roomChanged()
  }

  private onRefused(reason: AppendRefusal): void {
    this.dependencies.log.warn({ pageId: this.pageId, reason }, 'collab: edits refused by the database')
    const codes = {
      // The next load finds the truth; what was not committed comes again from the browsers.
      fenced: closeCodes.restart,
      locked: closeCodes.restart,
      'generation-closed': closeCodes.generationClosed,
      removed: closeCodes.noSuchRoom,
    } as const satisfies Record<AppendRefusal, CloseCode>
    this.drop(codes[reason])
  }

  /** Takes no more edits and writes what is queued; resolves when that is done or cannot be done. */
  async finish(): Promise<void> {
    this.sealed = true
    if (this.broadcastTimer) clearTimeout(this.broadcastTimer)
    this.sendOutgoing()
    await this.queue.flush()
  }

  /** Ends the room at once: sockets are closed, nothing more is written. */
  drop(code: CloseCode): void {
    if (this.closed) return
    this.stage = 'closed'
    this.queue.stop()
    this.presence.stop()
    for (const timer of [this.idleTimer, this.broadcastTimer, this.savedTimer]) if (timer) clearTimeout(timer)
    if (this.savedTimer) this.dependencies.draftSaved?.(this.pageId)
    this.forget(this, false)
    for (const member of [...this.members]) member.close(code)
    this.members.clear()
    this.doc?.destroy()
  }
}

/** The rooms of this process. */
export class Rooms {
  private readonly dependencies: RoomDependencies
  private readonly rooms = new Map<number, Room>()
  private readonly failedAt = new Map<number, number>()

  constructor(dependencies: RoomDependencies) {
    this.dependencies = dependencies
  }

  get all(): Iterable<Room> {
    return this.rooms.values()
  }

  find(pageId: number): Room | undefined {
    return this.rooms.get(pageId)
  }

  /** The page's room, begun to load where there is none; null where a load has just failed. */
  enter(pageId: number): Room | null {
    const known = this.rooms.get(pageId)
    if (known) return known
    const failed = this.failedAt.get(pageId)
    if (failed !== undefined && Date.now() - failed < this.dependencies.limits.room.loadPause) return null
    this.failedAt.delete(pageId)
    const room = new Room(pageId, this.dependencies, (gone, loadFailed) => {
      if (this.rooms.get(pageId) === gone) this.rooms.delete(pageId)
      if (loadFailed) this.failedAt.set(pageId, Date.now())
    })
    this.rooms.set(pageId, room)
    return room
  }

  /** Writes everything out, within the time given, and ends all rooms. */
  async close(time: number): Promise<void> {
    const all = [...this.rooms.values()]
    let timer: NodeJS.Timeout | undefined
    const late = new Promise<void>((resolve) => {
      timer = setTimeout(resolve, time)
    })
    await Promise.race([late, Promise.all(all.map((room) => room.loaded.then(() => room.finish())))])
    clearTimeout(timer)
    for (const room of all) room.drop(closeCodes.restart)
  }
}
