import { and, asc, eq, max } from 'drizzle-orm'
import type { Queryable } from '#drizzle/client.ts'
import { groups, memberships, people, signIns } from '#drizzle/schema/index.ts'

/** People by name with their last sign-in; one of them where `id` is given. */
export async function list(db: Queryable, id?: number) {
  const last = db
    .select({ personId: signIns.personId, at: max(signIns.at).as('last_sign_in') })
    .from(signIns)
    .groupBy(signIns.personId)
    .as('last')
  return db
    .select({
      id: people.id,
      name: people.name,
      email: people.email,
      administrator: people.administrator,
      disabled: people.disabled,
      createdAt: people.createdAt,
      lastSignIn: last.at,
    })
    .from(people)
    .leftJoin(last, eq(last.personId, people.id))
    .where(id === undefined ? undefined : eq(people.id, id))
    .orderBy(asc(people.name), asc(people.id))
}

export async function listMemberships(db: Queryable, personId?: number) {
  return db
    .select({ personId: memberships.personId, slug: groups.slug, name: groups.name, role: memberships.role })
    .from(memberships)
    .innerJoin(groups, eq(groups.id, memberships.groupId))
    .where(personId === undefined ? undefined : eq(memberships.personId, personId))
    .orderBy(asc(groups.name))
}

/** Locks the rows of all administrators whose account is not disabled, until the transaction ends; their ids. */
export async function lockAdministrators(tx: Queryable): Promise<number[]> {
  const rows = await tx
    .select({ id: people.id })
    .from(people)
    .where(and(eq(people.administrator, true), eq(people.disabled, false)))
    .orderBy(asc(people.id))
    .for('update')
  return rows.map((row) => row.id)
}

export async function change(
  tx: Queryable,
  id: number,
  to: { administrator: boolean; disabled: boolean },
): Promise<void> {
  await tx.update(people).set(to).where(eq(people.id, id))
}
