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

export interface SessionTimes {
  idle: number
  absolute: number
  touch: number
}

/** The sign-in that a claim rests on, if it still stands. */
async function findStanding(db: Queryable, claim: SessionClaim, now: Date, times: SessionTimes) {
  const found = await queries.findSignIn(db, claim.personId, claim.sessionHash)
  if (!found || found.disabled || found.epoch !== claim.epoch || found.endedAt !== null) return null
  const idle = now.getTime() - found.lastSeen.getTime()
  if (idle > times.idle || now.getTime() - found.since.getTime() > times.absolute) return null
  return { ...found, idle }
}

/**
 * The viewer of a session. Nobody, where the session was ended, is of an older epoch (signed out everywhere, new
 * password, disabled), is idle for an hour or older than twelve hours. Being seen is written at most once a minute.
 */
export async function loadViewer(
  db: Queryable,
  input: { claim: SessionClaim | null; now: Date; times?: SessionTimes },
): Promise<Viewer> {
  const { claim, now, times = limits.session } = input
  const found = claim ? await findStanding(db, claim, now, times) : null
  if (!claim || !found) return anonymous
  if (found.idle >= times.touch) await queries.touchSignIn(db, claim.sessionHash, now)
  const { id, name, email, administrator, epoch } = found
  return {
    person: { id, name, email, administrator, epoch },
    siteRole: administrator ? 'administrator' : 'person',
    sessionHash: claim.sessionHash,
  }
}

/** Whether a session still stands, without counting the question as activity (an open socket alone is none). */
export async function isStanding(
  db: Queryable,
  input: { claim: SessionClaim; now: Date; times?: SessionTimes },
): Promise<boolean> {
  return (await findStanding(db, input.claim, input.now, input.times ?? limits.session)) !== null
}

/** Frames of the co-editing socket count as activity of their session. */
export async function noteActivity(db: Queryable, input: { sessionHash: string; now: Date }): Promise<void> {
  await queries.touchSignIn(db, input.sessionHash, input.now)
}
