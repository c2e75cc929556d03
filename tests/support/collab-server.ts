import { createServer } from 'node:http'
import type { AddressInfo } from 'node:net'
import { and, eq } from 'drizzle-orm'
import { WebSocket as NodeSocket } from 'ws'
import { attachCollab, type CollabEvent, type CollabOptions } from '#collab/index.ts'
import { type CollabLimits, collabLimits } from '#collab/limits.ts'
import type { Database } from '#drizzle/client.ts'
import { memberships, pages, people } from '#drizzle/schema/index.ts'
import { pageRole, pageState } from '#shared/api/roles.ts'
import {
  createDraftConnection,
  type DraftConnection,
  type DraftConnectionOptions,
} from '#src/features/editor/draft-connection.ts'

export const ownOrigin = 'http://library.example'

/** A co-editing server on a port of its own: real sockets, real tables; only the session cookie is a plain name. */
export async function startCollab(
  db: Database,
  options: { limits?: CollabLimits; port?: number } & Partial<CollabOptions> = {},
) {
  const listeners = new Set<(event: CollabEvent) => void>()
  const sessions = new Map<string, number>()
  const errors: { details: object; message: string }[] = []
  const http = createServer((_, response) => response.writeHead(404).end())
  const collab = attachCollab(http, {
    db,
    authenticate: async (request) => {
      const token = /session=([^;]+)/.exec(request.headers.cookie ?? '')?.[1]
      const personId = token === undefined ? undefined : sessions.get(token)
      if (token === undefined || personId === undefined) return null
      const [person] = await db.select().from(people).where(eq(people.id, personId))
      return person && !person.disabled
        ? { personId, name: person.name, epoch: person.epoch, sessionHash: token }
        : null
    },
    stillSignedIn: async (person) => {
      const [row] = await db.select().from(people).where(eq(people.id, person.personId))
      return sessions.has(person.sessionHash) && row?.disabled === false && row.epoch === person.epoch
    },
    access: (person, pageId) => accessOf(db, person.personId, pageId),
    originAllowed: (request) => request.headers.origin === ownOrigin,
    subscribe: (listener) => {
      listeners.add(listener)
      return () => listeners.delete(listener)
    },
    log: {
      info: () => undefined,
      warn: () => undefined,
      error: (details, message) => errors.push({ details, message }),
    },
    answerUnknown: true,
    ...options,
  })
  await new Promise<void>((resolve) => http.listen(options.port ?? 0, '127.0.0.1', resolve))
  const { port } = http.address() as AddressInfo
  return {
    port,
    url: `ws://127.0.0.1:${port}/collab`,
    collab,
    /** What was logged as an error. */
    errors,
    tell: (event: CollabEvent) => {
      for (const listener of [...listeners]) listener(event)
    },
    /** Begins a session; its token. */
    signIn: (personId: number, token = `session-of-${personId}`) => {
      sessions.set(token, personId)
      return token
    },
    signOut: (token: string) => sessions.delete(token),
    close: async () => {
      await collab.close()
      await new Promise<void>((resolve) => {
        http.close(() => resolve())
        http.closeAllConnections()
      })
    },
  }
}
export type CollabServerForTests = Awaited<ReturnType<typeof startCollab>>

/** What a person is to a page, from the tables and the policy's own functions. */
export async function accessOf(db: Database, personId: number, pageId: number) {
  const [found] = await db
    .select({ page: pages, member: memberships.role })
    .from(pages)
    .leftJoin(memberships, and(eq(memberships.groupId, pages.groupId), eq(memberships.personId, personId)))
    .where(eq(pages.id, pageId))
  if (!found) return null
  const { page, member } = found
  return {
    role: pageRole({ signedIn: true, member }, page.access),
    state: pageState({
      removed: page.removedAt !== null,
      inForce: page.inForceId !== null,
      everPublic: page.everPublic > 0,
      inReview: page.inReviewId !== null,
    }),
    generation: page.generation,
  }
}

/** A deep copy of the limits with some of them changed. */
export function changedLimits(change: (limits: CollabLimits) => void): CollabLimits {
  const limits = structuredClone(collabLimits)
  change(limits)
  return limits
}

/** A WebSocket class that sends this session's cookie, as a browser would. */
export function socketOf(token: string | null, origin: string | null = ownOrigin): typeof WebSocket {
  class SignedInSocket extends NodeSocket {
    constructor(url: string | URL, protocols?: string | string[]) {
      super(url, protocols ?? [], {
        headers: {
          ...(token === null ? {} : { cookie: `session=${token}` }),
          ...(origin === null ? {} : { origin }),
        },
        perMessageDeflate: false,
      })
    }
  }
  // Structurally the browser's class as far as the provider uses it.
  return SignedInSocket as unknown as typeof WebSocket
}

/** The browser's own client, over a Node socket. */
export function openDraft(
  url: string,
  pageId: number,
  token: string,
  options: Partial<DraftConnectionOptions> = {},
): DraftConnection {
  return createDraftConnection({ url, pageId, WebSocketPolyfill: socketOf(token), ...options })
}

/** Waits until the condition holds, looking again and again; fails with the description after `time` milliseconds. */
export async function until(
  condition: () => boolean | Promise<boolean>,
  description: string | (() => string),
  time = 20_000,
) {
  const end = Date.now() + time
  while (!(await condition())) {
    if (Date.now() > end) {
      throw new Error(`Not so after ${time} ms: ${typeof description === 'string' ? description : description()}`)
    }
    await new Promise((resolve) => setTimeout(resolve, 5))
  }
}

export const saved = (connection: DraftConnection) =>
  until(
    () => connection.getState().phase === 'saved',
    () => JSON.stringify(connection.getState()),
  )
