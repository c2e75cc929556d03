import { type Api, mount } from '#server/http/mount.ts'
import { makePasswordLink as makeLink } from '#server/services/password-links.ts'
import * as people from '#server/services/people.ts'
import { changePerson, listPeople, makePasswordLink } from '#shared/api/people.ts'

export function peopleRoutes(api: Api): void {
  mount(api, listPeople, async ({ db }) => ({ people: await people.list(db) }))

  mount(api, changePerson, async ({ db, params, body, person, now, requestId, events }) => {
    const changed = await people.change(db, { personId: params.person, ...body, by: person.id, now, requestId })
    events.personChanged(params.person)
    return changed
  })

  mount(api, makePasswordLink, async ({ db, params, person, now, requestId, config }) => {
    const link = await makeLink(db, { personId: params.person, by: person.id, now, requestId })
    return { link: `${config.publicOrigin}${link.path}`, expiresAt: link.expiresAt.toISOString() }
  })
}
