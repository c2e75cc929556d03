import { type Database, isDuplicate, type Queryable, type Transaction } from '#drizzle/client.ts'
import { AppError } from '#server/http/app-error.ts'
import * as queries from '#server/queries/groups.ts'
import * as linkQueries from '#server/queries/links.ts'
import * as sessionQueries from '#server/queries/session.ts'
import type { Group, GroupSummary } from '#shared/api/groups.ts'
import { type MemberRole, mayInGroup } from '#shared/api/roles.ts'
import { makeInvitation } from './invitations.ts'
import type { NewLink } from './links.ts'
import { record } from './log.ts'
import type { GroupContext } from './page-context.ts'

/** Who does it, when, in which request. */
export interface By {
  by: number
  now: Date
  requestId: string
}

/** The person's own groups; all of them for an administrator. */
export const list = (db: Queryable, input: { personId: number; administrator: boolean }): Promise<GroupSummary[]> =>
  summaries(db, input.personId, input.administrator ? 'all' : 'own')

/** One group as the list shows it. */
export async function summary(db: Queryable, input: { personId: number; slug: string }): Promise<GroupSummary> {
  const [found] = await summaries(db, input.personId, { slug: input.slug })
  if (!found) throw new AppError('not-found', 'There is no such group.')
  return found
}

async function summaries(db: Queryable, personId: number, which: Parameters<typeof queries.list>[2]) {
  const found = await queries.list(db, personId, which)
  const prefixes = await queries.listPrefixes(
    db,
    found.map((group) => group.id),
  )
  return found.map(({ id, ...group }) => ({
    ...group,
    prefixes: prefixes.filter((row) => row.groupId === id).map((row) => row.prefix),
  }))
}

/** A group with its members; open invitations only for who may invite. */
export async function read(db: Queryable, input: { group: GroupContext; personId: number; now: Date }): Promise<Group> {
  const { group, personId, now } = input
  const mayInvite =
    mayInGroup('member:invite', group.role) || (group.administrator && mayInGroup('member:invite', 'administrator'))
  const members = await queries.listMembers(db, group.id)
  const invitations = mayInvite ? await queries.listInvitations(db, group.id, now) : []
  return {
    ...(await summary(db, { personId, slug: group.slug })),
    members: members.map((member) => ({ ...member, since: member.since.toISOString() })),
    invitations: invitations.map((row) => ({ ...row, expiresAt: row.expiresAt.toISOString() })),
    mayInvite,
  }
}

/** An address from a name: letters without accents and figures, joined by hyphens. */
const slugOf = (name: string) =>
  name
    .normalize('NFKD')
    .toLowerCase()
    .replace(/[^a-z0-9]+/g, '-')
    .replace(/^-|-$/g, '')
    .slice(0, 50)
    .replace(/-$/, '') || 'group'

async function freeSlug(tx: Queryable, name: string): Promise<string> {
  const base = slugOf(name)
  for (let number = 1; ; number++) {
    const slug = number === 1 ? base : `${base}-${number}`
    if (!(await queries.hasSlug(tx, slug))) return slug
  }
}

async function insertPrefixes(tx: Queryable, groupId: number, prefixes: readonly string[]): Promise<void> {
  for (const [position, prefix] of prefixes.entries()) {
    try {
      await queries.insertPrefix(tx, prefix, groupId)
    } catch (error) {
      if (!isDuplicate(error)) throw error
      const message = `${prefix} belongs to another group`
      throw new AppError('already-exists', `${message}.`, {
        errors: [{ code: 'already-exists', message, path: `prefixes.${position}` }],
      })
    }
  }
}

/** Makes a group with its prefixes, and the invitation of its first maintainer. */
export async function create(
  db: Database,
  input: By & { name: string; prefixes: string[]; maintainerEmail: string },
): Promise<{ slug: string; link: NewLink }> {
  const { name, by, now, requestId } = input
  const prefixes = [...new Set(input.prefixes)]
  return db.transaction(async (tx) => {
    const slug = await freeSlug(tx, name)
    const groupId = await queries.insert(tx, { slug, name, createdAt: now })
    await insertPrefixes(tx, groupId, prefixes)
    const invite = {
      groupId,
      email: input.maintainerEmail,
      name: null,
      role: 'maintainer',
      invitedBy: by,
      now,
    } as const
    const link = await makeInvitation(tx, invite)
    const after = { name, prefixes }
    await record(tx, { at: now, personId: by, act: 'group:create', target: `group ${slug}`, after, requestId })
    return { slug, link }
  })
}

/** Invites an address to a group. 409 where it belongs to a member. */
export async function invite(
  db: Database,
  input: By & { group: GroupContext; email: string; name?: string; role: MemberRole },
): Promise<NewLink> {
  const { group, email, role, by, now, requestId } = input
  return db.transaction(async (tx) => {
    await queries.lock(tx, group.id)
    const account = await sessionQueries.findByEmail(tx, email)
    if (account && (await queries.findMembership(tx, group.id, account.id))) {
      throw new AppError('already-exists', `${account.name} is a member of this group already.`)
    }
    const name = input.name ?? null
    const link = await makeInvitation(tx, { groupId: group.id, email, name, role, invitedBy: by, now })
    const target = `group ${group.slug}`
    await record(tx, { at: now, personId: by, act: 'member:invite', target, after: { email, role }, requestId })
    return link
  })
}

export async function revokeInvitation(
  db: Database,
  input: By & { group: GroupContext; invitationId: number },
): Promise<void> {
  const { group, invitationId, by, now, requestId } = input
  await db.transaction(async (tx) => {
    await queries.lock(tx, group.id)
    const open = await queries.listInvitations(tx, group.id, now)
    const found = open.find((row) => row.id === invitationId)
    if (!found) throw new AppError('not-found', 'This invitation was used or taken back already.')
    await linkQueries.revokeInvitation(tx, invitationId, now)
    const { email } = found
    const target = `group ${group.slug}`
    await record(tx, { at: now, personId: by, act: 'invitation:revoke', target, before: { email }, requestId })
  })
}

/** The member's role, under the group's lock; 404 where there is no such member. */
async function lockMember(tx: Transaction, groupId: number, personId: number): Promise<MemberRole> {
  await queries.lock(tx, groupId)
  const membership = await queries.findMembership(tx, groupId, personId)
  if (!membership) throw new AppError('not-found', 'This person is no member of the group.')
  return membership.role
}

/** A group keeps a maintainer who can sign in. */
async function keepOneMaintainer(tx: Transaction, groupId: number): Promise<void> {
  if ((await queries.countMaintainers(tx, groupId)) > 0) return
  throw new AppError('last-maintainer', 'Nobody else would be a maintainer of this group. Appoint another one first.')
}

export async function changeMember(
  db: Database,
  input: By & { group: GroupContext; personId: number; role: MemberRole },
): Promise<void> {
  const { group, personId, role, by, now, requestId } = input
  await db.transaction(async (tx) => {
    const before = await lockMember(tx, group.id, personId)
    await queries.setRole(tx, group.id, personId, role)
    if (before === 'maintainer' && role !== 'maintainer') await keepOneMaintainer(tx, group.id)
    const target = `group ${group.slug}`
    const values = { before: { person: personId, role: before }, after: { person: personId, role } }
    await record(tx, { at: now, personId: by, act: 'member:change', target, ...values, requestId })
  })
}

export async function removeMember(db: Database, input: By & { group: GroupContext; personId: number }): Promise<void> {
  const { group, personId, by, now, requestId } = input
  await db.transaction(async (tx) => {
    const before = await lockMember(tx, group.id, personId)
    await queries.removeMembership(tx, group.id, personId)
    if (before === 'maintainer') await keepOneMaintainer(tx, group.id)
    const target = `group ${group.slug}`
    const values = { before: { person: personId, role: before } }
    await record(tx, { at: now, personId: by, act: 'member:remove', target, ...values, requestId })
  })
}
