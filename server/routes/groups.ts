import { type Api, mount } from '#server/http/mount.ts'
import * as groups from '#server/services/groups.ts'
import type { NewLink } from '#server/services/links.ts'
import {
  changeMember,
  createGroup,
  invite,
  listGroups,
  readGroup,
  removeMember,
  revokeInvitation,
} from '#shared/api/groups.ts'

export function groupRoutes(api: Api): void {
  const handOver = ({ path, expiresAt }: NewLink) => ({
    link: `${api.config.publicOrigin}${path}`,
    expiresAt: expiresAt.toISOString(),
  })

  mount(api, listGroups, async ({ db, person }) => ({
    groups: await groups.list(db, { personId: person.id, administrator: person.administrator }),
  }))

  mount(api, createGroup, async ({ db, body, person, now, requestId }) => {
    const { slug, link } = await groups.create(db, { ...body, by: person.id, now, requestId })
    const group = await groups.summary(db, { personId: person.id, slug })
    return { group, invitation: handOver(link) }
  })

  mount(api, readGroup, ({ db, group, person, now }) => groups.read(db, { group, personId: person.id, now }))

  mount(api, changeMember, async ({ db, group, params, body, person, now, requestId, events }) => {
    await groups.changeMember(db, { group, personId: params.person, ...body, by: person.id, now, requestId })
    events.personChanged(params.person)
    return groups.read(db, { group, personId: person.id, now })
  })

  mount(api, removeMember, async ({ db, group, params, person, now, requestId, events }) => {
    await groups.removeMember(db, { group, personId: params.person, by: person.id, now, requestId })
    events.personChanged(params.person)
    return groups.read(db, { group, personId: person.id, now })
  })

  mount(api, invite, async ({ db, group, body, person, now, requestId }) =>
    handOver(await groups.invite(db, { group, ...body, by: person.id, now, requestId })),
  )

  mount(api, revokeInvitation, ({ db, group, params, person, now, requestId }) =>
    groups.revokeInvitation(db, { group, invitationId: params.invitation, by: person.id, now, requestId }),
  )
}
