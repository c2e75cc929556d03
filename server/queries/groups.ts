import { and, asc, count, eq, inArray, isNull, sql } from 'drizzle-orm'
import type { Queryable } from '#drizzle/client.ts'
import { groupPrefixes, groups, invitations, memberships, oneTimeLinks, pages, people } from '#drizzle/schema/index.ts'
import type { MemberRole } from '#shared/api/roles.ts'

export async function listPrefixes(db: Queryable, groupIds: number[]) {
  if (groupIds.length === 0) return []
  return db.select().from(groupPrefixes).where(inArray(groupPrefixes.groupId, groupIds)).orderBy(groupPrefixes.prefix)
}

/** Groups by name with the person's role in each: all of them, the person's own, or the one of a slug. */
export async function list(db: Queryable, personId: number, which: 'all' | 'own' | { slug: string }) {
  const own = and(eq(memberships.groupId, groups.id), eq(memberships.personId, personId))
  const members = db
    .select({ groupId: memberships.groupId, n: count().as('member_count') })
    .from(memberships)
    .groupBy(memberships.groupId)
    .as('members')
  const standing = db
    .select({ groupId: pages.groupId, n: count().as('page_count') })
    .from(pages)
    .where(isNull(pages.removedAt))
    .groupBy(pages.groupId)
    .as('standing')
  return db
    .select({
      id: groups.id,
      slug: groups.slug,
      name: groups.name,
      role: memberships.role,
      memberCount: sql<number>`coalesce(${members.n}, 0)`.mapWith(Number),
      pageCount: sql<number>`coalesce(${standing.n}, 0)`.mapWith(Number),
    })
    .from(groups)
    .leftJoin(memberships, own)
    .leftJoin(members, eq(members.groupId, groups.id))
    .leftJoin(standing, eq(standing.groupId, groups.id))
    .where(
      which === 'all' ? undefined : which === 'own' ? eq(memberships.personId, personId) : eq(groups.slug, which.slug),
    )
    .orderBy(groups.name)
}

export async function listMembers(db: Queryable, groupId: number) {
  return db
    .select({
      person: { id: people.id, name: people.name, email: people.email },
      role: memberships.role,
      since: memberships.since,
    })
    .from(memberships)
    .innerJoin(people, eq(people.id, memberships.personId))
    .where(eq(memberships.groupId, groupId))
    .orderBy(people.name, people.id)
}

/** Invitations that can still be accepted. */
export async function listInvitations(db: Queryable, groupId: number, now: Date) {
  return db
    .select({
      id: invitations.id,
      email: invitations.email,
      name: invitations.name,
      role: invitations.role,
      invitedBy: people.name,
      expiresAt: oneTimeLinks.expiresAt,
    })
    .from(invitations)
    .innerJoin(oneTimeLinks, eq(oneTimeLinks.id, invitations.linkId))
    .innerJoin(people, eq(people.id, invitations.invitedBy))
    .where(
      and(
        eq(invitations.groupId, groupId),
        isNull(invitations.revokedAt),
        isNull(oneTimeLinks.usedAt),
        sql`${oneTimeLinks.expiresAt} > ${now}`,
      ),
    )
    .orderBy(invitations.id)
}

/** Locks the group's row until the transaction ends, so that its members change one act at a time. */
export async function lock(tx: Queryable, id: number): Promise<void> {
  await tx.select({ id: groups.id }).from(groups).where(eq(groups.id, id)).for('update')
}

export async function insert(tx: Queryable, row: typeof groups.$inferInsert): Promise<number> {
  const [made] = await tx.insert(groups).values(row).$returningId()
  return made?.id ?? 0
}

export async function insertPrefix(tx: Queryable, prefix: string, groupId: number): Promise<void> {
  await tx.insert(groupPrefixes).values({ prefix, groupId })
}

export async function findMembership(db: Queryable, groupId: number, personId: number) {
  const [row] = await db
    .select()
    .from(memberships)
    .where(and(eq(memberships.groupId, groupId), eq(memberships.personId, personId)))
    .limit(1)
  return row ?? null
}

/** Maintainers of a group whose account is not disabled. */
export async function countMaintainers(db: Queryable, groupId: number): Promise<number> {
  const [row] = await db
    .select({ n: count() })
    .from(memberships)
    .innerJoin(people, eq(people.id, memberships.personId))
    .where(and(eq(memberships.groupId, groupId), eq(memberships.role, 'maintainer'), eq(people.disabled, false)))
  return row?.n ?? 0
}

/** Locks the groups that a person maintains until the transaction ends. */
export async function lockMaintained(tx: Queryable, personId: number): Promise<{ id: number; name: string }[]> {
  const maintained = await tx
    .select({ id: memberships.groupId })
    .from(memberships)
    .where(and(eq(memberships.personId, personId), eq(memberships.role, 'maintainer')))
  if (maintained.length === 0) return []
  const ids = maintained.map((row) => row.id)
  return tx
    .select({ id: groups.id, name: groups.name })
    .from(groups)
    .where(inArray(groups.id, ids))
    .orderBy(asc(groups.id))
    .for('update')
}

export async function setRole(tx: Queryable, groupId: number, personId: number, role: MemberRole): Promise<void> {
  await tx
    .update(memberships)
    .set({ role })
    .where(and(eq(memberships.groupId, groupId), eq(memberships.personId, personId)))
}

export async function insertMembership(tx: Queryable, row: typeof memberships.$inferInsert): Promise<void> {
  await tx.insert(memberships).values(row)
}

export async function removeMembership(tx: Queryable, groupId: number, personId: number): Promise<void> {
  await tx.delete(memberships).where(and(eq(memberships.groupId, groupId), eq(memberships.personId, personId)))
}

/** True where a slug is taken. */
export async function hasSlug(db: Queryable, slug: string): Promise<boolean> {
  const rows = await db.select({ id: groups.id }).from(groups).where(eq(groups.slug, slug)).limit(1)
  return rows.length > 0
}
