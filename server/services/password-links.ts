import type { Database, Queryable } from '#drizzle/client.ts'
import { AppError } from '#server/http/app-error.ts'
import * as queries from '#server/queries/links.ts'
import * as sessionQueries from '#server/queries/session.ts'
import type { OneTimeLink } from '#shared/api/session.ts'
import { findLink, makeLink, type NewLink, useLink } from './links.ts'
import { record } from './log.ts'
import { checkNewPassword, hashPassword } from './passwords.ts'
import { type Known, replacePassword } from './session.ts'

/** A link by which a person sets a new password; links of theirs made before are void. */
export async function makePasswordLink(
  db: Database,
  input: { personId: number; by: number; now: Date; requestId: string },
): Promise<NewLink> {
  const { personId, by, now, requestId } = input
  return db.transaction(async (tx) => {
    const person = await sessionQueries.lockPerson(tx, personId)
    if (!person) throw new AppError('not-found', 'There is no such person.')
    if (person.disabled) throw new AppError('may-not', 'This account is disabled; enable it first.')
    await queries.voidAll(tx, 'password', personId, now)
    const link = await makeLink(tx, { kind: 'password', personId, now })
    await record(tx, { at: now, personId: by, act: 'people:password-link', target: `person ${personId}`, requestId })
    return link
  })
}

async function find(db: Queryable, token: string, now: Date) {
  const link = await findLink(db, 'password', token, now)
  const person = await sessionQueries.findById(db, link.personId ?? 0)
  if (!person || person.disabled) throw new AppError('link-used', 'This link cannot be used any more.')
  return { link, person }
}

/** What the screen of a new-password link says. */
export async function read(db: Queryable, input: { token: string; now: Date }): Promise<OneTimeLink> {
  const { link, person } = await find(db, input.token, input.now)
  return {
    kind: 'password',
    name: person.name,
    email: person.email,
    group: null,
    role: null,
    hasAccount: true,
    expiresAt: link.expiresAt.toISOString(),
  }
}

/** Sets the new password and ends every session of the person. */
export async function finish(
  db: Database,
  input: { token: string; password: string; now: Date; requestId: string },
): Promise<Known> {
  const { now, requestId } = input
  const { link, person } = await find(db, input.token, now)
  checkNewPassword(input.password, person, 'password')
  const passwordHash = await hashPassword(input.password)
  return db.transaction(async (tx) => {
    await useLink(tx, link.id, now)
    const epoch = await replacePassword(tx, { personId: person.id, passwordHash, now })
    await record(tx, { at: now, personId: person.id, act: 'password:set', target: `person ${person.id}`, requestId })
    return { personId: person.id, epoch }
  })
}
