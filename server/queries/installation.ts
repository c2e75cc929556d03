import { sql } from 'drizzle-orm'
import type { Queryable } from '#drizzle/client.ts'
import { groups, people, signIns } from '#drizzle/schema/index.ts'

/** Whether anybody has an account, any group stands, and anybody ever signed in. */
export async function findUse(db: Queryable): Promise<{ people: boolean; groups: boolean; signIns: boolean }> {
  const [person, group, signIn] = await Promise.all([
    db.select({ one: sql`1` }).from(people).limit(1),
    db.select({ one: sql`1` }).from(groups).limit(1),
    db.select({ one: sql`1` }).from(signIns).limit(1),
  ])
  return { people: person.length > 0, groups: group.length > 0, signIns: signIn.length > 0 }
}
