import type { Database } from '#drizzle/client.ts'
import { demonstrationPassword, emailOf, groups, type PersonKey, people } from '#drizzle/seed/demonstration.ts'
import * as sessionQueries from '#server/queries/session.ts'
import type { MemberRole } from '#shared/api/roles.ts'
import * as groupService from './groups.ts'
import * as invitations from './invitations.ts'
import * as links from './links.ts'
import { loadGroupContext } from './page-context.ts'
import type { Viewer } from './viewer.ts'

/** Log rows of the demonstration library name this in place of a request. */
export const demonstrationRequest = 'demonstration'

/** Ids of the demonstration people. */
export type PersonIds = (key: PersonKey) => number

const nameOf = (key: PersonKey): string => people.find((person) => person.key === key)?.name ?? key
const tokenOf = (link: { path: string }): string => link.path.split('/').at(-1) ?? ''

/** The person as somebody who is signed in. */
export async function viewerOf(db: Database, personId: number): Promise<Viewer> {
  const person = await sessionQueries.findById(db, personId)
  if (!person) throw new Error(`Person ${personId} is not there.`)
  const { id, name, email, administrator, epoch } = person
  return {
    person: { id, name, email, administrator, epoch },
    siteRole: administrator ? 'administrator' : 'person',
    sessionHash: null,
  }
}

/**
 * Makes the demonstration people and groups the way real ones come about: the first administrator by the set-up link,
 * groups by the administrator, everybody else by an invitation of the group's first maintainer.
 */
export async function bringPeople(db: Database, now: Date): Promise<PersonIds> {
  const requestId = demonstrationRequest
  const password = demonstrationPassword
  const known = new Map<PersonKey, number>()
  const idOf: PersonIds = (key) => {
    const id = known.get(key)
    if (id === undefined) throw new Error(`${key} has no account yet.`)
    return id
  }
  const accept = async (key: PersonKey, link: { path: string }) => {
    const who = { token: tokenOf(link), name: nameOf(key), password }
    known.set(key, (await invitations.accept(db, { ...who, now, requestId })).personId)
  }

  const [administrator] = people.filter((person) => person.administrator)
  const setup = await links.makeSetupLink(db, now)
  if (!administrator || !setup) throw new Error('The demonstration library begins with its administrator.')
  const { key, name } = administrator
  const first = { token: tokenOf(setup), name, email: emailOf(key), password, now, requestId }
  known.set(key, (await links.finishSetup(db, first)).personId)

  for (const group of groups) {
    const [head, ...rest] = firstMaintainerFirst(group.members)
    const by = idOf(key)
    const { name: groupName, prefixes } = group
    const made = { name: groupName, prefixes, maintainerEmail: emailOf(head[0]), by, now, requestId }
    const { slug, link } = await groupService.create(db, made)
    if (slug !== group.slug) throw new Error(`${groupName} got the address ${slug}.`)
    await accept(head[0], link)
    const context = await loadGroupContext(db, await viewerOf(db, idOf(head[0])), slug)
    if (!context) throw new Error(`${groupName} is not there.`)
    for (const [member, role] of rest) {
      const invited = { group: context, email: emailOf(member), name: nameOf(member), role, by: idOf(head[0]) }
      await accept(member, await groupService.invite(db, { ...invited, now, requestId }))
    }
  }
  return idOf
}

type Member = [PersonKey, MemberRole]

function firstMaintainerFirst(members: readonly Member[]): [Member, ...Member[]] {
  const head = members.find(([, role]) => role === 'maintainer')
  if (!head) throw new Error('A group needs a maintainer.')
  return [head, ...members.filter((member) => member !== head)]
}
