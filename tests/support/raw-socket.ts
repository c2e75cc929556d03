import * as decoding from 'lib0/decoding'
import * as encoding from 'lib0/encoding'
import { WebSocket } from 'ws'
import * as Y from 'yjs'
import { type RoomNews, roomNews } from '#shared/ydoc/rooms.ts'
import { ownOrigin, until } from './collab-server.ts'

export type Heard =
  | { kind: 'step-1'; bytes: Uint8Array }
  | { kind: 'step-2'; bytes: Uint8Array }
  | { kind: 'update'; bytes: Uint8Array }
  | { kind: 'presence'; states: { clientId: number; clock: number; state: unknown }[] }
  | { kind: 'saved'; count: number; epoch: number }
  | { kind: 'room'; news: RoomNews }

/** A socket without the provider: messages made by hand, everything heard kept. */
export class RawSocket {
  readonly socket: WebSocket
  readonly heard: Heard[] = []
  closed: { code: number; reason: string } | null = null
  /** HTTP status of a refused handshake. */
  refused: number | null = null
  retryAfter: string | undefined

  constructor(url: string, options: { token?: string | null; origin?: string | null; headers?: object } = {}) {
    const { token = null, origin = ownOrigin } = options
    this.socket = new WebSocket(url, {
      headers: {
        ...(token === null ? {} : { cookie: `session=${token}` }),
        ...(origin === null ? {} : { origin }),
        ...options.headers,
      },
      perMessageDeflate: false,
    })
    this.socket.on('message', (data, isBinary) => {
      if (isBinary && Buffer.isBuffer(data)) this.heard.push(readHeard(new Uint8Array(data)))
    })
    this.socket.on('close', (code, reason) => {
      this.closed = { code, reason: reason.toString() }
    })
    this.socket.on('unexpected-response', (request, response) => {
      this.retryAfter = response.headers['retry-after']
      this.refused = response.statusCode ?? 0
      request.destroy()
    })
    this.socket.on('error', () => undefined)
  }

  /** Opens and waits for the room's first word. */
  static async join(url: string, token: string): Promise<RawSocket> {
    const raw = new RawSocket(url, { token })
    await until(() => raw.of('room').length > 0 || raw.closed !== null || raw.refused !== null, 'the room speaks')
    return raw
  }

  of<Kind extends Heard['kind']>(kind: Kind): Extract<Heard, { kind: Kind }>[] {
    return this.heard.filter((message): message is Extract<Heard, { kind: Kind }> => message.kind === kind)
  }

  /** The newest count of message 100. */
  get saved(): number {
    return this.of('saved').at(-1)?.count ?? -1
  }

  send(bytes: Uint8Array | string): void {
    this.socket.send(bytes)
  }

  sendSync(kind: 0 | 1 | 2, payload: Uint8Array): void {
    this.send(syncFrame(kind, payload))
  }

  /** Gets the document and answers as the provider would, with nothing of its own. */
  async synced(): Promise<Y.Doc> {
    const doc = new Y.Doc()
    this.sendSync(0, Y.encodeStateVector(doc))
    this.sendSync(1, Y.encodeStateAsUpdate(doc))
    await until(() => this.of('step-2').length > 0, 'a sync step 2')
    for (const { bytes } of this.of('step-2')) Y.applyUpdate(doc, bytes)
    return doc
  }

  sendPresence(entries: { clientId: number; clock: number; state: unknown }[]): void {
    const inner = encoding.createEncoder()
    encoding.writeVarUint(inner, entries.length)
    for (const { clientId, clock, state } of entries) {
      encoding.writeVarUint(inner, clientId)
      encoding.writeVarUint(inner, clock)
      encoding.writeVarString(inner, typeof state === 'string' ? state : JSON.stringify(state))
    }
    const outer = encoding.createEncoder()
    encoding.writeVarUint(outer, 1)
    encoding.writeVarUint8Array(outer, encoding.toUint8Array(inner))
    this.send(encoding.toUint8Array(outer))
  }

  async closes(): Promise<number> {
    await until(() => this.closed !== null, 'the socket is closed')
    return this.closed?.code ?? 0
  }

  end(): void {
    this.socket.terminate()
  }
}

export function syncFrame(kind: 0 | 1 | 2, payload: Uint8Array): Uint8Array {
  const encoder = encoding.createEncoder()
  encoding.writeVarUint(encoder, 0)
  encoding.writeVarUint(encoder, kind)
  encoding.writeVarUint8Array(encoder, payload)
  return encoding.toUint8Array(encoder)
}

function readHeard(bytes: Uint8Array): Heard {
  const decoder = decoding.createDecoder(bytes)
  const type = decoding.readVarUint(decoder)
  if (type === 0) {
    const kind = (['step-1', 'step-2', 'update'] as const)[decoding.readVarUint(decoder)]
    if (kind) return { kind, bytes: decoding.readVarUint8Array(decoder) }
  }
  if (type === 1) {
    const inner = decoding.createDecoder(decoding.readVarUint8Array(decoder))
    const states: { clientId: number; clock: number; state: unknown }[] = []
    for (let count = decoding.readVarUint(inner); count > 0; count--) {
      const clientId = decoding.readVarUint(inner)
      const clock = decoding.readVarUint(inner)
      states.push({ clientId, clock, state: JSON.parse(decoding.readVarString(inner)) })
    }
    return { kind: 'presence', states }
  }
  if (type === 100) return { kind: 'saved', count: decoding.readVarUint(decoder), epoch: decoding.readVarUint(decoder) }
  if (type === 101) return { kind: 'room', news: roomNews.parse(JSON.parse(decoding.readVarString(decoder))) }
  throw new Error(`The server sent a message of type ${type}.`)
}
