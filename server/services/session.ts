import type { Database, Queryable } from '#drizzle/client.ts'
import { AppError } from '#server/http/app-error.ts'
import * as groupQueries from '#server/queries/groups.ts'
import * as queries from '#server/queries/session.ts'
import type { Me, SessionState } from '#shared/api/session.ts'
import { findDemonstration } from './demonstration.ts'
import { record } from './log.ts'
import { checkNewPassword, hashPassword, needsRehash, passwordMatches } from './passwords.ts'

export interface Known {
  personId: number
  epoch: number
}

/** Who has this e-mail address and password; null for everybody else, after the same work for an unknown address. */
export async function checkPassword(db: Database, input: { email: string; password: string }): Promise<Known | null> {
  const person = await queries.findByEmail(db, input.email.toLowerCase())
  const stored = person?.passwordHash ?? null
  const matches = await passwordMatches(stored, input.password)
  if (!person || person.disabled || !matches || stored === null) return null
  if (needsRehash(stored)) await queries.setPasswordHash(db, person.id, await hashPassword(input.password))
  return { personId: person.id, epoch: person.epoch }
}

/**
 * Asks a signed-in person's password again (approving, withdrawing, a new password).
 *
 * @throws {AppError} `wrong-password`.
 */
export async function confirmPassword(db: Database, input: { personId: number; password: string }): Promise<void> {
  const person = await queries.findById(db, input.personId)
  if (person && !person.disabled && (await passwordMatches(person.passwordHash, input.password))) return
  throw new AppError('wrong-password', 'The password is wrong.')
}

/** Writes down a session that has just begun. Without this row the session is nobody's. */
export async function begin(
  db: Database,
  input: { personId: number; sessionHash: string; userAgent: string; now: Date; requestId: string },
): Promise<void> {
  const { personId, sessionHash, now, requestId } = input
  const userAgent = input.userAgent
    .replace(/[^\x21-\x7e]+/g, ' ')
    .trim()
    .slice(0, 200)
  await db.transaction(async (tx) => {
    await queries.insertSignIn(tx, { personId, sessionHash, at: now, lastSeen: now, userAgent })
    await record(tx, { at: now, personId, act: 'session:begin', target: `person ${personId}`, requestId })
  })
}

/** Ends one session. */
export async function end(
  db: Database,
  input: { personId: number; sessionHash: string; now: Date; requestId: string },
): Promise<void> {
  const { personId, sessionHash, now, requestId } = input
  await db.transaction(async (tx) => {
    await queries.endSignIn(tx, sessionHash, now)
    await record(tx, { at: now, personId, act: 'session:end', target: `person ${personId}`, requestId })
  })
}

/** Ends every session of a person, also the one that asks. */
export async function endAll(db: Database, input: { personId: number; now: Date; requestId: string }): Promise<void> {
  const { personId, now, requestId } = input
  await db.transaction(async (tx) => {
    await queries.raiseEpoch(tx, personId)
    await queries.endAllSignIns(tx, personId, now)
    await record(tx, { at: now, personId, act: 'session:end-all', target: `person ${personId}`, requestId })
  })
}

/**
 * Sets a new password, which voids every session of the person. The route then begins a new one for who asked.
 *
 * @returns the person's new epoch.
 * @throws {AppError} `wrong-password`, or `bad-request` for one that is easy to guess.
 */
export async function changePassword(
  db: Database,
  input: {
    person: { id: number; name: string; email: string }
    current: string
    next: string
    now: Date
    requestId: string
  },
): Promise<Known> {
  const { person, now, requestId } = input
  await confirmPassword(db, { personId: person.id, password: input.current })
  checkNewPassword(input.next, person, 'next')
  const passwordHash = await hashPassword(input.next)
  return db.transaction(async (tx) => {
    const epoch = await replacePassword(tx, { personId: person.id, passwordHash, now })
    const entry = { at: now, personId: person.id, act: 'password:change', target: `person ${person.id}`, requestId }
    await record(tx, entry)
    return { personId: person.id, epoch }
  })
}

/** Stores a new password and ends every session; the new epoch. */
export async function replacePassword(
  tx: Queryable,
  input: { personId: number; passwordHash: string; now: Date },
): Promise<number> {
  const person = await queries.lockPerson(tx, input.personId)
  if (!person || person.disabled) throw new AppError('may-not', 'This account is disabled.')
  await queries.setPasswordHash(tx, input.personId, input.passwordHash)
  await queries.raiseEpoch(tx, input.personId)
  await queries.endAllSignIns(tx, input.personId, input.now)
  return person.epoch + 1
}

/** What the browser of a person, or of nobody, needs first. Demonstration accounts are told on this machine only. */
export async function read(
  db: Queryable,
  input: { personId: number | null; loopback: boolean },
): Promise<SessionState> {
  const demonstration = input.loopback ? await findDemonstration(db) : null
  return { me: input.personId === null ? null : await readMe(db, input.personId), demonstration }
}

async function readMe(db: Queryable, personId: number): Promise<Me | null> {
  const person = await queries.findById(db, personId)
  if (!person) return null
  const memberOf = await queries.listGroupsOf(db, personId)
  const prefixes = await groupQueries.listPrefixes(
    db,
    memberOf.map((group) => group.id),
  )
  return {
    id: person.id,
    name: person.name,
    email: person.email,
    administrator: person.administrator,
    groups: memberOf.map((group) => ({
      slug: group.slug,
      name: group.name,
      role: group.role,
      prefixes: prefixes.filter((row) => row.groupId === group.id).map((row) => row.prefix),
    })),
    toReview: await queries.countToReview(db, personId),
  }
}
