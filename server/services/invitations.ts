import type { Database, Queryable, Transaction } from '#drizzle/client.ts'
import { AppError } from '#server/http/app-error.ts'
import * as groupQueries from '#server/queries/groups.ts'
import * as queries from '#server/queries/links.ts'
import * as sessionQueries from '#server/queries/session.ts'
import { newPassword } from '#shared/api/common.ts'
import type { MemberRole } from '#shared/api/roles.ts'
import type { OneTimeLink } from '#shared/api/session.ts'
import { findLink, makeLink, makePerson, type NewLink, useLink } from './links.ts'
import { record } from './log.ts'
import { checkNewPassword, hashPassword, passwordMatches } from './passwords.ts'
import type { Known } from './session.ts'

export interface Invite {
  groupId: number
  email: string
  name: string | null
  role: MemberRole
  invitedBy: number
  now: Date
}

/** Makes the invitation and its link; an older one of the same address to the same group is void. */
export async function makeInvitation(tx: Transaction, input: Invite): Promise<NewLink> {
  const { now, ...row } = input
  await queries.revokeInvitations(tx, input.groupId, input.email, now)
  const link = await makeLink(tx, { kind: 'invitation', personId: null, now })
  await queries.insertInvitation(tx, { ...row, linkId: link.id, createdAt: now })
  return link
}

async function find(db: Queryable, token: string, now: Date) {
  const link = await findLink(db, 'invitation', token, now)
  const found = await queries.findInvitation(db, link.id)
  if (!found || found.invitation.revokedAt !== null) {
    throw new AppError('link-used', 'This invitation was taken back or replaced by a newer one.')
  }
  const account = await sessionQueries.findByEmail(db, found.invitation.email)
  return { link, account, ...found }
}

/** What the screen of an invitation says. */
export async function read(
  db: Queryable,
  input: { token: string; now: Date },
): Promise<OneTimeLink & { email: string }> {
  const { link, invitation, groupName, account } = await find(db, input.token, input.now)
  return {
    kind: 'invitation',
    name: account?.name ?? invitation.name,
    email: invitation.email,
    group: groupName,
    role: invitation.role,
    hasAccount: account !== null,
    expiresAt: link.expiresAt.toISOString(),
  }
}

const fieldFault = (path: string, message: string) =>
  new AppError('bad-request', 'Some of what was sent is missing or wrong.', {
    errors: [{ code: 'invalid', message, path }],
  })

/**
 * Accepts an invitation: with the password of the account where the address has one, else by making the account.
 *
 * @throws {AppError} `link-used`, `wrong-password`, `bad-request` (a name or a good password is missing).
 */
export async function accept(
  db: Database,
  input: { token: string; name?: string; password: string; now: Date; requestId: string },
): Promise<Known> {
  const { now, requestId } = input
  const { link, invitation, groupSlug, account } = await find(db, input.token, now)
  const newcomer = account ? null : await readNewcomer(input, invitation.email)
  if (account && (account.disabled || !(await passwordMatches(account.passwordHash, input.password)))) {
    throw new AppError('wrong-password', 'The password is wrong.')
  }
  return db.transaction(async (tx) => {
    await useLink(tx, link.id, now)
    const known = newcomer
      ? await makePerson(tx, { ...newcomer, email: invitation.email, administrator: false, now })
      : { personId: account?.id ?? 0, epoch: account?.epoch ?? 0 }
    const { groupId, role } = invitation
    if (!(await groupQueries.findMembership(tx, groupId, known.personId))) {
      await groupQueries.insertMembership(tx, { groupId, personId: known.personId, role, since: now })
    }
    const target = `group ${groupSlug}`
    await record(tx, {
      at: now,
      personId: known.personId,
      act: 'invitation:accept',
      target,
      after: { role },
      requestId,
    })
    return known
  })
}

async function readNewcomer(input: { name?: string; password: string }, email: string) {
  if (input.name === undefined) throw fieldFault('name', 'Enter your name')
  const password = newPassword.safeParse(input.password)
  if (!password.success) throw fieldFault('password', password.error.issues[0]?.message ?? 'Too short')
  checkNewPassword(password.data, { name: input.name, email }, 'password')
  return { name: input.name, passwordHash: await hashPassword(password.data) }
}
