import { createHash, randomBytes } from 'node:crypto'
import { type Database, isDuplicate, type Queryable, type Transaction } from '#drizzle/client.ts'
import { AppError } from '#server/http/app-error.ts'
import { limits } from '#server/limits.ts'
import * as queries from '#server/queries/links.ts'
import * as peopleQueries from '#server/queries/people.ts'
import { record } from './log.ts'
import { checkNewPassword, hashPassword } from './passwords.ts'
import type { Known } from './session.ts'

export type LinkKind = 'setup' | 'invitation' | 'password'

export interface NewLink {
  id: number
  /** Address of the screen that opens it, with the secret; told once, kept nowhere. */
  path: string
  expiresAt: Date
}

const screens: Record<LinkKind, string> = { setup: 'setup', invitation: 'invitations', password: 'passwords' }
const hashOf = (secret: string) => createHash('sha256').update(secret).digest('hex')

const used = () => new AppError('link-used', 'This link was used already, was replaced by a newer one, or is too old.')

/** Makes a link of 256 random bits, of which the database keeps only the hash. */
export async function makeLink(
  tx: Queryable,
  input: { kind: LinkKind; personId: number | null; now: Date },
): Promise<NewLink> {
  const { kind, personId, now } = input
  const secret = randomBytes(32).toString('base64url')
  const expiresAt = new Date(now.getTime() + limits.links[kind])
  const id = await queries.insert(tx, { kind, tokenHash: hashOf(secret), personId, createdAt: now, expiresAt })
  return { id, path: `/${screens[kind]}/${secret}`, expiresAt }
}

type LinkRow = NonNullable<Awaited<ReturnType<typeof queries.find>>>

const isGood = (link: LinkRow, now: Date) => link.usedAt === null && link.expiresAt.getTime() > now.getTime()

/** The link of a secret; 410 where it is unknown, used or too old: nobody learns which. */
export async function findLink(db: Queryable, kind: LinkKind, token: string, now: Date): Promise<LinkRow> {
  const link = await queries.find(db, kind, hashOf(token))
  if (!link || !isGood(link, now)) throw used()
  return link
}

/** Uses a link up, once: the second of two at the same moment gets 410. */
export async function useLink(tx: Queryable, id: number, now: Date): Promise<void> {
  const link = await queries.lock(tx, id)
  if (!link || !isGood(link, now)) throw used()
  await queries.use(tx, id, now)
}

/** Makes the person; 409 where the address has an account. */
export async function makePerson(
  tx: Transaction,
  input: { name: string; email: string; passwordHash: string; administrator: boolean; now: Date },
): Promise<Known> {
  const { now, ...person } = input
  try {
    const personId = await queries.insertPerson(tx, { ...person, createdAt: now })
    return { personId, epoch: 1 }
  } catch (error) {
    if (isDuplicate(error))
      throw new AppError('already-exists', 'There is an account with this e-mail address already.')
    throw error
  }
}

/**
 * The link by which the first administrator makes their account (`npm start -- --empty`). Links made before are void.
 *
 * @returns null where there is an administrator already.
 */
export async function makeSetupLink(db: Database, now: Date): Promise<NewLink | null> {
  return db.transaction(async (tx) => {
    if ((await peopleQueries.lockAdministrators(tx)).length > 0) return null
    await queries.voidAll(tx, 'setup', null, now)
    const link = await makeLink(tx, { kind: 'setup', personId: null, now })
    await record(tx, { at: now, personId: null, act: 'setup:link', target: 'library', requestId: null })
    return link
  })
}

/** Makes the first administrator. */
export async function finishSetup(
  db: Database,
  input: { token: string; name: string; email: string; password: string; now: Date; requestId: string },
): Promise<Known> {
  const { name, email, now, requestId } = input
  const link = await findLink(db, 'setup', input.token, now)
  checkNewPassword(input.password, { name, email }, 'password')
  const passwordHash = await hashPassword(input.password)
  return db.transaction(async (tx) => {
    await useLink(tx, link.id, now)
    if ((await peopleQueries.lockAdministrators(tx)).length > 0) throw used()
    const known = await makePerson(tx, { name, email, passwordHash, administrator: true, now })
    const target = `person ${known.personId}`
    await record(tx, { at: now, personId: known.personId, act: 'setup:finish', target, requestId })
    return known
  })
}
