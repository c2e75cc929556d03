import { type Api, mount } from '#server/http/mount.ts'
import * as session from '#server/services/session.ts'
import { changePassword, readSession, signIn, signOut, signOutEverywhere } from '#shared/api/session.ts'

// Nothing of the person may stay behind in the browser (a cookie of ours is cleared by itself).
const forgetStorage = ['Clear-Site-Data', '"storage"'] as const

export function sessionRoutes(api: Api): void {
  mount(api, readSession, ({ db, viewer, config }) =>
    session.read(db, { personId: viewer.person?.id ?? null, loopback: config.loopback }),
  )

  mount(api, signIn, async ({ db, config, session: control }) =>
    session.read(db, { personId: await control.signIn(), loopback: config.loopback }),
  )

  mount(api, signOut, async ({ session: control, setHeader }) => {
    await control.end()
    setHeader(...forgetStorage)
  })

  mount(api, signOutEverywhere, async ({ db, person, now, requestId, events, session: control, setHeader }) => {
    await session.endAll(db, { personId: person.id, now, requestId })
    events.personChanged(person.id)
    await control.end()
    setHeader(...forgetStorage)
  })

  mount(api, changePassword, async ({ db, body, person, now, requestId, events, limiter, session: control }) => {
    limiter.take('signInByAccount', person.email)
    const known = await session.changePassword(db, { person, ...body, now, requestId })
    limiter.giveBack('signInByAccount', person.email)
    events.personChanged(person.id)
    await control.begin({ id: known.personId, epoch: known.epoch })
  })
}
