import type { Request } from 'express'
import type { Logger } from 'pino'
import type { Database } from '#drizzle/client.ts'
import type { Compute } from '#server/compute/compute.ts'
import type { Config } from '#server/config.ts'
import type { EventBus } from '#server/event-bus.ts'
import type { Limits } from '#server/limits.ts'
import type { GroupContext, PageContext } from '#server/services/page-context.ts'
import type { Viewer, ViewerPerson } from '#server/services/viewer.ts'
import type { Limiter } from './rate-limits.ts'

/** What the whole API is built from; createApp gets it once. */
export interface Dependencies {
  db: Database
  config: Config
  limits: Limits
  events: EventBus
  compute: Compute
  logger: Logger
  /** The clock, so that tests can set it. */
  now: () => Date
}

/** The session of this browser. */
export interface SessionControl {
  /** Checks e-mail and password of the body by passport-local and begins a session; the person's id. */
  signIn(): Promise<number>
  /** Begins a new session for a person whose identity was just shown another way (a one-time link). */
  begin(person: { id: number; epoch: number }): Promise<void>
  /** Ends this session and forgets its cookie. */
  end(): Promise<void>
}

/** What a handler gets: everything checked, nothing to look up twice. */
export interface HandlerContext<P, Q, B> {
  params: P
  query: Q
  body: B
  db: Database
  now: Date
  requestId: string
  viewer: Viewer
  /** The signed-in person. Throws 401 where nobody is: only acts open to everybody have to ask `viewer.person` first. */
  readonly person: ViewerPerson
  /** The group of a group act. Throws where the endpoint's act is of another scope: a programming error. */
  readonly group: GroupContext
  /** The page of a page act. Throws where the endpoint's act is of another scope: a programming error. */
  readonly page: PageContext
  /** The opaque text of If-Match without its quotes; null where the endpoint asks for none. */
  ifMatch: string | null
  /** Sets the answer's ETag; on GET a matching If-None-Match then answers 304. */
  setEtag(value: string): void
  setHeader(name: string, value: string): void
  session: SessionControl
  limiter: Limiter
  events: EventBus
  compute: Compute
  config: Config
  limits: Limits
  logger: Logger
  request: Request
}
