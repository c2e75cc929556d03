import { type IncomingMessage, type Server, STATUS_CODES } from 'node:http'
import type { Duplex } from 'node:stream'
import { type WebSocket, WebSocketServer } from 'ws'
import type { Database } from '#drizzle/client.ts'
import { type CloseCode, closeCodes, closeReasons, collabPath } from '#shared/ydoc/rooms.ts'
import { type CollabPerson, Connection } from './connection.ts'
import { type CollabLimits, collabLimits } from './limits.ts'
import { joinRefusal, type PageAccess } from './policy.ts'
import { TokenBucket } from './rate.ts'
import { type CollabLog, type Room, Rooms } from './rooms.ts'
import { within } from './within.ts'

/** What the server around tells the sockets, once it is committed (server/event-bus.ts). */
export type CollabEvent =
  | { kind: 'page-changed'; pageId: number }
  | { kind: 'person-changed'; personId: number }
  | { kind: 'session-ended'; sessionHash: string }

/** What the co-editing server is handed: it knows neither sessions nor the policy's data by itself. */
export interface CollabOptions {
  db: Database
  /** Who holds the session of this request; null where nobody is signed in. Asked once, before the socket is accepted. */
  authenticate(request: IncomingMessage): Promise<CollabPerson | null>
  /** Whether that session still stands (not ended, epoch, not disabled). Asked every 30 s and after events. */
  stillSignedIn(person: CollabPerson): Promise<boolean>
  /** What the person is to the page now; null where there is no such page. */
  access(person: CollabPerson, pageId: number): Promise<PageAccess | null>
  /** The Origin header is this site's own (a browser always sends one). */
  originAllowed(request: IncomingMessage): boolean
  subscribe(listener: (event: CollabEvent) => void): () => void
  log: CollabLog
  limits?: CollabLimits
  now?: () => Date
  /** Answer upgrades of other addresses with 404; false where another listener (Vite's in development) wants them. */
  answerUnknown?: boolean
  /** Edits came over this person's socket; told at most once a minute a socket. */
  noteActivity?: (person: CollabPerson) => Promise<void>
  /** Edits of the page were committed; told at most every two seconds. */
  draftSaved?: (pageId: number) => void
}

/** How the co-editing server is doing. */
export interface CollabStats {
  rooms: number
  sockets: number
  /** Age in milliseconds of the oldest edit that is not committed; 0 where there is none. */
  unsavedAge: number
  /** Rooms whose edits the database does not take. */
  notSaving: number
}

/** A running co-editing server. */
export interface Collab {
  /** For /readyz and metrics. */
  stats(): CollabStats
  /** Writes and acknowledges what came, closes every socket with 1012, and takes no more. For SIGTERM. */
  close(): Promise<void>
}

/** Serves the co-editing socket on an http server's upgrades. */
export function attachCollab(server: Server, options: CollabOptions): Collab {
  const collab = new CollabServer(options)
  const onUpgrade = (request: IncomingMessage, socket: Duplex, head: Buffer) => collab.upgrade(request, socket, head)
  server.on('upgrade', onUpgrade)
  return {
    stats: () => collab.stats(),
    close: () => collab.close(),
  }
}

const address = new RegExp(`^${collabPath}/([1-9][0-9]{0,14})$`)

class CollabServer {
  private readonly options: CollabOptions
  private readonly limits: CollabLimits
  private readonly rooms: Rooms
  private readonly sockets: WebSocketServer
  private readonly connections = new Set<Connection>()
  private readonly handshakes: TokenBucket
  private readonly timers: NodeJS.Timeout[]
  private readonly unsubscribe: () => void
  private readonly changedPages = new Set<number>()
  /** Handshakes that passed the first look and are not connections yet. */
  private arriving = 0
  private closing = false
  private epochs = 0

  constructor(options: CollabOptions) {
    this.options = options
    this.limits = options.limits ?? collabLimits
    const { limits } = this
    const now = options.now ?? (() => new Date())
    this.rooms = new Rooms({ db: options.db, limits, now, log: options.log, draftSaved: options.draftSaved })
    this.sockets = new WebSocketServer({
      noServer: true,
      clientTracking: false,
      maxPayload: limits.socket.payload,
      maxFragments: limits.socket.fragments,
      perMessageDeflate: false,
    })
    const { perSecond } = limits.handshake
    this.handshakes = new TokenBucket({ perSecond, burst: perSecond }, Date.now())
    this.timers = [
      setInterval(() => {
        for (const connection of this.connections) connection.beat()
      }, limits.socket.heartbeat),
      setInterval(() => this.recheckDue(), Math.max(50, limits.recheck.every / 10)),
    ]
    for (const timer of this.timers) timer.unref()
    this.unsubscribe = options.subscribe((event) => this.onEvent(event))
  }

  stats(): CollabStats {
    const rooms = [...this.rooms.all]
    const since = rooms.flatMap((room) => room.unsavedSince ?? [])
    return {
      rooms: rooms.length,
      sockets: this.connections.size,
      unsavedAge: since.length > 0 ? Math.max(0, Date.now() - Math.min(...since)) : 0,
      notSaving: rooms.filter((room) => room.notSaving).length,
    }
  }

  async close(): Promise<void> {
    if (this.closing) return
    this.closing = true
    this.unsubscribe()
    for (const timer of this.timers) clearInterval(timer)
    await this.rooms.close(this.limits.shutdown.flush)
    const open = [...this.connections]
    for (const connection of open) connection.close(closeCodes.restart)
    const deadline = Date.now() + this.limits.socket.close + 500
    while (this.connections.size > 0 && Date.now() < deadline) await new Promise((resolve) => setTimeout(resolve, 10))
    this.sockets.close()
  }

  upgrade(request: IncomingMessage, socket: Duplex, head: Buffer): void {
    const [path = '', query = ''] = (request.url ?? '').split('?', 2)
    const ours = path === collabPath || path.startsWith(`${collabPath}/`)
    if (!ours && this.options.answerUnknown !== true) return
    socket.on('error', () => socket.destroy())
    const pageId = Number(address.exec(path)?.[1])
    const busy = this.connections.size + this.arriving >= this.limits.sockets.total
    const refusal = !Number.isSafeInteger(pageId)
      ? 404
      : !this.options.originAllowed(request)
        ? 403
        : this.closing || busy || this.handshakes.wait(Date.now()) > 0
          ? 503
          : null
    if (refusal) {
      refuse(socket, refusal)
      return
    }
    this.handshakes.take(1, Date.now())
    const generation = new URLSearchParams(query).get('generation')
    this.arriving++
    this.greet(request, socket, head, { pageId, generation: generation === null ? null : Number(generation) })
      .catch((error: unknown) => {
        this.options.log.error({ err: error, pageId }, 'collab: handshake failed')
        refuse(socket, 503)
      })
      .finally(() => {
        this.arriving--
      })
  }

  private async greet(
    request: IncomingMessage,
    socket: Duplex,
    head: Buffer,
    asked: { pageId: number; generation: number | null },
  ): Promise<void> {
    const person = await within(this.limits.handshake.lookUp, this.options.authenticate(request))
    if (socket.destroyed) return
    if (this.closing) return refuse(socket, 503)
    this.sockets.handleUpgrade(request, socket, head, (ws) => {
      // The browser cannot see why a handshake failed, only why a socket was closed.
      if (!person) return this.turnAway(ws, closeCodes.notSignedIn)
      if (!this.hasPlaceFor(person, asked.pageId)) return this.turnAway(ws, closeCodes.tooMany)
      const connection = new Connection(
        ws,
        { person, pageId: asked.pageId, epoch: ++this.epochs },
        {
          limits: this.limits,
          log: this.options.log,
          active: (active) => this.noteActivity(active),
          gone: (gone) => this.connections.delete(gone),
        },
      )
      this.connections.add(connection)
      this.admit(connection, asked.generation).catch((error: unknown) => {
        this.options.log.error({ err: error, pageId: asked.pageId }, 'collab: not admitted')
        connection.close(closeCodes.loadFailed)
      })
    })
  }

  private turnAway(ws: WebSocket, code: CloseCode): void {
    ws.on('error', () => ws.terminate())
    ws.close(code, closeReasons[code])
    setTimeout(() => ws.terminate(), this.limits.socket.close).unref()
  }

  private hasPlaceFor(person: CollabPerson, pageId: number): boolean {
    const own = [...this.connections].filter((other) => other.personId === person.personId && other.isOpen)
    const here = own.filter((other) => other.pageId === pageId)
    const { perPerson, perPersonAndRoom } = this.limits.sockets
    if (own.length < perPerson && here.length < perPersonAndRoom) return true
    // After a cut line the old sockets of a browser may still seem open: one that is silent makes room.
    const candidates = here.length >= perPersonAndRoom ? here : own
    const now = Date.now()
    const dead = candidates.find((other) => other.silentFor(now) > this.limits.socket.heartbeat * 1.5)
    dead?.close(closeCodes.tooMany)
    return dead !== undefined
  }

  /** Looks the page up, waits for its room and lets the connection in. */
  private async admit(connection: Connection, generation: number | null): Promise<void> {
    const { person, pageId } = connection
    const access = await within(this.limits.handshake.lookUp, this.options.access(person, pageId))
    const refusal = joinRefusal(access)
    if (refusal || !access) return connection.close(refusal ?? closeCodes.noSuchRoom)
    if (generation !== null && generation !== access.generation) return connection.close(closeCodes.generationClosed)
    if (!connection.isOpen) return
    const room = this.closing ? null : this.rooms.enter(pageId)
    if (!room) return connection.close(this.closing ? closeCodes.restart : closeCodes.loadFailed)
    room.join(connection)
    const outcome = await room.loaded
    if (outcome !== 'live') return connection.close(outcome)
    if (!connection.isOpen) return room.leave(connection)
    if (room.closed) return connection.close(closeCodes.restart)
    // Between the look-up and the load a new generation may have begun: whichever is older gives way.
    if (room.generation !== access.generation) {
      room.leave(connection)
      if (room.generation < access.generation) room.drop(closeCodes.generationClosed)
      return connection.close(closeCodes.restart)
    }
    connection.enter(room, access)
  }

  private noteActivity(connection: Connection): void {
    const now = Date.now()
    if (!this.options.noteActivity || now - connection.notedAt < this.limits.recheck.activity) return
    connection.notedAt = now
    this.options.noteActivity(connection.person).catch((error: unknown) => {
      this.options.log.error({ err: error }, 'collab: activity not noted')
    })
  }

  private onEvent(event: CollabEvent): void {
    switch (event.kind) {
      case 'session-ended':
        for (const connection of this.connections)
          if (connection.person.sessionHash === event.sessionHash) connection.close(closeCodes.notSignedIn)
        return
      case 'person-changed':
        for (const connection of this.connections) if (connection.personId === event.personId) this.recheck(connection)
        return
      case 'page-changed': {
        if (this.changedPages.size === 0) {
          setTimeout(() => {
            const pages = new Set(this.changedPages)
            this.changedPages.clear()
            for (const connection of this.connections) if (pages.has(connection.pageId)) this.recheck(connection)
          }, this.limits.recheck.gather).unref()
        }
        this.changedPages.add(event.pageId)
      }
    }
  }

  private recheckDue(): void {
    const due = Date.now() - this.limits.recheck.every
    for (const connection of this.connections) if (connection.checkedAt <= due) this.recheck(connection)
  }

  /** Looks session, role and page up again. Where the database does not answer the socket stays as it is until the next time. */
  private recheck(connection: Connection): void {
    connection.checkedAt = Date.now()
    this.checked(connection).catch((error: unknown) => {
      this.options.log.error({ err: error, pageId: connection.pageId }, 'collab: could not look rights up again')
    })
  }

  private async checked(connection: Connection): Promise<void> {
    const { person, pageId } = connection
    if (!(await this.options.stillSignedIn(person))) return connection.close(closeCodes.notSignedIn)
    const access = await this.options.access(person, pageId)
    const refusal = joinRefusal(access)
    if (refusal || !access) return connection.close(refusal ?? closeCodes.noSuchRoom)
    const room: Room | undefined = this.rooms.find(pageId)
    if (!room || (await room.loaded) !== 'live' || room.closed) return
    if (room.generation < access.generation) return room.drop(closeCodes.generationClosed)
    connection.accessChanged(access)
  }
}

/** Answers a handshake with a plain HTTP refusal. */
function refuse(socket: Duplex, status: number): void {
  if (socket.destroyed) return
  const retry = status === 503 ? 'Retry-After: 1\r\n' : ''
  socket.end(
    `HTTP/1.1 ${status} ${STATUS_CODES[status]}\r\nConnection: close\r\n${retry}Content-Length: 0\r\n\r\n`,
    () => {
      socket.destroy()
    },
  )
}
