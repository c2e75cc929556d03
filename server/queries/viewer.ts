import { and, eq, isNull, lt } from 'drizzle-orm'
import type { Queryable } from '#drizzle/client.ts'
import { groups, memberships, pages, people, signIns } from '#drizzle/schema/index.ts'

/** The person of a session together with the session's own times; one round trip a request. */
export async function findSignIn(db: Queryable, personId: number, sessionHash: string) {
  const [row] = await db
    .select({
      id: people.id,
      name: people.name,
      email: people.email,
      administrator: people.administrator,
      disabled: people.disabled,
      epoch: people.epoch,
      since: signIns.at,
      lastSeen: signIns.lastSeen,
      endedAt: signIns.endedAt,
    })
    .from(signIns)
    .innerJoin(people, eq(people.id, signIns.personId))
    .where(and(eq(signIns.sessionHash, sessionHash), eq(people.id, personId)))
    .limit(1)
  return row ?? null
}

export async function touchSignIn(db: Queryable, sessionHash: string, now: Date): Promise<void> {
  await db
    .update(signIns)
    .set({ lastSeen: now })
    .where(and(eq(signIns.sessionHash, sessionHash), lt(signIns.lastSeen, now), isNull(signIns.endedAt)))
}

/** A group by its slug with the person's membership in it. */
export async function findGroup(db: Queryable, slug: string, personId: number | null) {
  const [row] = await db
    .select({ id: groups.id, slug: groups.slug, name: groups.name, memberRole: memberships.role })
    .from(groups)
    .leftJoin(memberships, and(eq(memberships.groupId, groups.id), eq(memberships.personId, personId ?? 0)))
    .where(eq(groups.slug, slug))
    .limit(1)
  return row ?? null
}

const pageFields = {
  row: pages,
  groupSlug: groups.slug,
  groupName: groups.name,
  memberRole: memberships.role,
}

/** A page by its code or id with the person's membership in its group. */
export async function findPage(db: Queryable, of: { code: string } | { id: number }, personId: number | null) {
  const [row] = await db
    .select(pageFields)
    .from(pages)
    .innerJoin(groups, eq(groups.id, pages.groupId))
    .leftJoin(memberships, and(eq(memberships.groupId, pages.groupId), eq(memberships.personId, personId ?? 0)))
    .where('code' in of ? eq(pages.code, of.code) : eq(pages.id, of.id))
    .limit(1)
  return row ?? null
}

export async function findPersonState(db: Queryable, personId: number) {
  const [row] = await db
    .select({ disabled: people.disabled, epoch: people.epoch })
    .from(people)
    .where(eq(people.id, personId))
    .limit(1)
  return row ?? null
}
