import type { Queryable } from '#drizzle/client.ts'
import { limits } from '#server/limits.ts'
import * as queries from '#server/queries/viewer.ts'
import type { SiteRole } from '#shared/api/roles.ts'

export interface ViewerPerson {
  id: number
  name: string
  email: string
  administrator: boolean
  epoch: number
}

/** Who asks: decided anew for each request, never kept in the session. */
export interface Viewer {
  person: ViewerPerson | null
  siteRole: SiteRole
  /** SHA-256 of the session's id; null where nobody is signed in. */
  sessionHash: string | null
}

/** What a session says of itself; it is believed only after loadViewer compared it with the database. */
export interface SessionClaim {
  personId: number
  epoch: number
  sessionHash: string
}

export const anonymous: Viewer = { person: null, siteRole: 'anonymous', sessionHash: null }

/**
 * The viewer of a session. Nobody, where the session was ended, is of an older epoch (signed out everywhere, new
 * password, disabled), is idle for an hour or older than twelve hours. Being seen is written at most once a minute.
 */
export async function loadViewer(
  db: Queryable,
  input: { claim: SessionClaim | null; now: Date; times?: { idle: number; absolute: number; touch: number } },
): Promise<Viewer> {
  if (!input.claim) return anonymous
  const times = input.times ?? limits.session
  const { personId, epoch, sessionHash } = input.claim
  const found = await queries.findSignIn(db, personId, sessionHash)
  if (!found || found.disabled || found.epoch !== epoch || found.endedAt !== null) return anonymous
  const idle = input.now.getTime() - found.lastSeen.getTime()
  if (idle > times.idle || input.now.getTime() - found.since.getTime() > times.absolute) return anonymous
  if (idle >= times.touch) await queries.touchSignIn(db, sessionHash, input.now)
  const { id, name, email, administrator } = found
  return {
    person: { id, name, email, administrator, epoch },
    siteRole: administrator ? 'administrator' : 'person',
    sessionHash,
  }
}

/** Frames of the co-editing socket count as activity of their session. */
export async function noteActivity(db: Queryable, input: { sessionHash: string; now: Date }): Promise<void> {
  await queries.touchSignIn(db, input.sessionHash, input.now)
}
