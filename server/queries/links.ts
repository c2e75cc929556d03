import { and, eq, isNull } from 'drizzle-orm'
import type { Queryable } from '#drizzle/client.ts'
import { groups, invitations, oneTimeLinks, people } from '#drizzle/schema/index.ts'

type Kind = typeof oneTimeLinks.$inferSelect.kind

export async function insert(tx: Queryable, row: typeof oneTimeLinks.$inferInsert): Promise<number> {
  const [made] = await tx.insert(oneTimeLinks).values(row).$returningId()
  return made?.id ?? 0
}

export async function find(db: Queryable, kind: Kind, tokenHash: string) {
  const [row] = await db
    .select()
    .from(oneTimeLinks)
    .where(and(eq(oneTimeLinks.kind, kind), eq(oneTimeLinks.tokenHash, tokenHash)))
    .limit(1)
  return row ?? null
}

/** Locks the link's row, so that of two people who open it at once one is second. */
export async function lock(tx: Queryable, id: number) {
  const [row] = await tx.select().from(oneTimeLinks).where(eq(oneTimeLinks.id, id)).for('update')
  return row ?? null
}

export async function use(tx: Queryable, id: number, now: Date): Promise<void> {
  await tx.update(oneTimeLinks).set({ usedAt: now }).where(eq(oneTimeLinks.id, id))
}

/** Voids every unused link of a kind; with a person, only theirs. */
export async function voidAll(tx: Queryable, kind: Kind, personId: number | null, now: Date): Promise<void> {
  const whose = personId === null ? undefined : eq(oneTimeLinks.personId, personId)
  await tx
    .update(oneTimeLinks)
    .set({ usedAt: now })
    .where(and(eq(oneTimeLinks.kind, kind), isNull(oneTimeLinks.usedAt), whose))
}

export async function insertInvitation(tx: Queryable, row: typeof invitations.$inferInsert): Promise<void> {
  await tx.insert(invitations).values(row)
}

/** The invitation of a link, with its group's name. */
export async function findInvitation(db: Queryable, linkId: number) {
  const [row] = await db
    .select({ invitation: invitations, groupName: groups.name, groupSlug: groups.slug })
    .from(invitations)
    .innerJoin(groups, eq(groups.id, invitations.groupId))
    .where(eq(invitations.linkId, linkId))
    .limit(1)
  return row ?? null
}

export async function revokeInvitations(tx: Queryable, groupId: number, email: string, now: Date): Promise<void> {
  await tx
    .update(invitations)
    .set({ revokedAt: now })
    .where(and(eq(invitations.groupId, groupId), eq(invitations.email, email), isNull(invitations.revokedAt)))
}

export async function revokeInvitation(tx: Queryable, id: number, now: Date): Promise<void> {
  await tx.update(invitations).set({ revokedAt: now }).where(eq(invitations.id, id))
}

export async function insertPerson(tx: Queryable, row: typeof people.$inferInsert): Promise<number> {
  const [made] = await tx.insert(people).values(row).$returningId()
  return made?.id ?? 0
}
