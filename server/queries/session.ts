import { and, count, eq, isNull, ne, sql } from 'drizzle-orm'
import type { Queryable } from '#drizzle/client.ts'
import { groups, memberships, pages, people, revisions, signIns } from '#drizzle/schema/index.ts'

export async function findByEmail(db: Queryable, email: string) {
  const [row] = await db.select().from(people).where(eq(people.email, email)).limit(1)
  return row ?? null
}

export async function findById(db: Queryable, id: number) {
  const [row] = await db.select().from(people).where(eq(people.id, id)).limit(1)
  return row ?? null
}

/** Locks the person's row until the transaction ends. */
export async function lockPerson(tx: Queryable, id: number) {
  const [row] = await tx.select().from(people).where(eq(people.id, id)).for('update')
  return row ?? null
}

export async function setPasswordHash(db: Queryable, id: number, passwordHash: string): Promise<void> {
  await db.update(people).set({ passwordHash }).where(eq(people.id, id))
}

/** Raises the epoch: every session of an older one is void. */
export async function raiseEpoch(tx: Queryable, id: number): Promise<void> {
  await tx
    .update(people)
    .set({ epoch: sql`${people.epoch} + 1` })
    .where(eq(people.id, id))
}

export async function insertSignIn(tx: Queryable, row: typeof signIns.$inferInsert): Promise<void> {
  await tx.insert(signIns).values(row)
}

export async function endSignIn(tx: Queryable, sessionHash: string, now: Date): Promise<void> {
  await tx
    .update(signIns)
    .set({ endedAt: now })
    .where(and(eq(signIns.sessionHash, sessionHash), isNull(signIns.endedAt)))
}

export async function endAllSignIns(tx: Queryable, personId: number, now: Date): Promise<void> {
  await tx
    .update(signIns)
    .set({ endedAt: now })
    .where(and(eq(signIns.personId, personId), isNull(signIns.endedAt)))
}

/** Revisions in review in the groups that a person is a maintainer of and that they did not send. */
export async function countToReview(db: Queryable, personId: number): Promise<number> {
  const [row] = await db
    .select({ n: count() })
    .from(revisions)
    .innerJoin(pages, eq(pages.inReviewId, revisions.id))
    .innerJoin(
      memberships,
      and(
        eq(memberships.groupId, pages.groupId),
        eq(memberships.personId, personId),
        eq(memberships.role, 'maintainer'),
      ),
    )
    .where(and(eq(revisions.state, 'in-review'), isNull(pages.removedAt), ne(revisions.sentBy, personId)))
  return row?.n ?? 0
}

export async function listGroupsOf(db: Queryable, personId: number) {
  return db
    .select({ id: groups.id, slug: groups.slug, name: groups.name, role: memberships.role })
    .from(memberships)
    .innerJoin(groups, eq(groups.id, memberships.groupId))
    .where(eq(memberships.personId, personId))
    .orderBy(groups.name)
}
