import type { Database, Queryable, Transaction } from '#drizzle/client.ts'
import { AppError } from '#server/http/app-error.ts'
import * as groupQueries from '#server/queries/groups.ts'
import * as linkQueries from '#server/queries/links.ts'
import * as queries from '#server/queries/people.ts'
import * as sessionQueries from '#server/queries/session.ts'
import type { Person } from '#shared/api/people.ts'
import { record } from './log.ts'

/** Everybody who has an account, or one of them. */
export async function list(db: Queryable, id?: number): Promise<Person[]> {
  const [found, memberships] = await Promise.all([queries.list(db, id), queries.listMemberships(db, id)])
  return found.map((person) => ({
    ...person,
    createdAt: person.createdAt.toISOString(),
    lastSignIn: person.lastSignIn?.toISOString() ?? null,
    groups: memberships
      .filter((row) => row.personId === person.id)
      .map(({ slug, name, role }) => ({ slug, name, role })),
  }))
}

async function keepOneMaintainer(tx: Transaction, group: { id: number; name: string }): Promise<void> {
  if ((await groupQueries.countMaintainers(tx, group.id)) > 0) return
  throw new AppError(
    'last-maintainer',
    `Nobody else who can sign in would be a maintainer of ${group.name}. Appoint another one first.`,
  )
}

/**
 * Gives or takes the administrator's role, disables or enables an account. Disabling voids every session and link of
 * the person.
 *
 * @throws {AppError} `not-found`; `last-maintainer` where no administrator would be left, or a group without a maintainer who
 *                    can sign in.
 */
export async function change(
  db: Database,
  input: { personId: number; administrator?: boolean; disabled?: boolean; by: number; now: Date; requestId: string },
): Promise<Person> {
  const { personId, by, now, requestId } = input
  await db.transaction(async (tx) => {
    // Groups come before people in the order of locks, as where a group's members change.
    const kept = input.disabled ? await groupQueries.lockMaintained(tx, personId) : []
    const administrators = await queries.lockAdministrators(tx)
    const person = await sessionQueries.lockPerson(tx, personId)
    if (!person) throw new AppError('not-found', 'There is no such person.')
    const before = { administrator: person.administrator, disabled: person.disabled }
    const after = {
      administrator: input.administrator ?? before.administrator,
      disabled: input.disabled ?? before.disabled,
    }
    const stays = after.administrator && !after.disabled
    if (!stays && administrators.length === 1 && administrators[0] === personId) {
      throw new AppError('last-maintainer', 'Nobody else would be an administrator.')
    }
    await queries.change(tx, personId, after)
    if (after.disabled && !before.disabled) {
      await sessionQueries.raiseEpoch(tx, personId)
      await sessionQueries.endAllSignIns(tx, personId, now)
      await linkQueries.voidAll(tx, 'password', personId, now)
      for (const group of kept) await keepOneMaintainer(tx, group)
    }
    await record(tx, {
      at: now,
      personId: by,
      act: 'people:change',
      target: `person ${personId}`,
      before,
      after,
      requestId,
    })
  })
  const [changed] = await list(db, personId)
  if (!changed) throw new AppError('not-found', 'There is no such person.')
  return changed
}
