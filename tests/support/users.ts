import { hash } from '@node-rs/argon2'
import type { Express } from 'express'
import type { Database } from '#drizzle/client.ts'
import { groupPrefixes, groups, memberships, people } from '#drizzle/schema/index.ts'
import type { MemberRole } from '#shared/api/roles.ts'
import { apiRoot, type Tab, tab } from './http.ts'

/** Every test person's password. */
export const password = 'four otters mend clocks'
let hashed: Promise<string> | undefined

export interface TestPerson {
  id: number
  name: string
  email: string
}
export interface TestGroup {
  id: number
  slug: string
  prefix: string
}

/** Makes people and groups straight in the database, and signs people in through the app. */
export function createPeople(app: Express, db: Database) {
  const made = new Date('2026-01-05T08:00:00.000Z')

  async function person(
    name: string,
    flags: { administrator?: boolean; disabled?: boolean } = {},
  ): Promise<TestPerson> {
    hashed ??= hash(password)
    const email = `${name.toLowerCase().replace(/[^a-z0-9]+/g, '.')}@example.org`
    const [row] = await db
      .insert(people)
      .values({ name, email, passwordHash: await hashed, createdAt: made, ...flags })
      .$returningId()
    return { id: row?.id ?? 0, name, email }
  }

  async function group(
    name: string,
    prefix: string,
    members: readonly (readonly [TestPerson, MemberRole])[] = [],
  ): Promise<TestGroup> {
    const slug = name.toLowerCase().replace(/[^a-z0-9]+/g, '-')
    const [row] = await db.insert(groups).values({ name, slug, createdAt: made }).$returningId()
    const id = row?.id ?? 0
    await db.insert(groupPrefixes).values({ prefix, groupId: id })
    if (members.length > 0) {
      await db
        .insert(memberships)
        .values(members.map(([member, role]) => ({ groupId: id, personId: member.id, role, since: made })))
    }
    return { id, slug, prefix }
  }

  /** A tab in which the person is signed in. */
  async function signedIn(who: TestPerson): Promise<Tab> {
    const agent = tab(app)
    const answer = await agent.post(`${apiRoot}/session`).send({ email: who.email, password })
    if (answer.status !== 200) throw new Error(`Signing in as ${who.name} answered ${answer.status}`)
    return agent
  }

  return { person, group, signedIn, signedOut: () => tab(app) }
}
