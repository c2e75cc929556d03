import { type Api, mount } from '#server/http/mount.ts'
import { addressKey } from '#server/http/rate-limits.ts'
import * as invitations from '#server/services/invitations.ts'
import * as links from '#server/services/links.ts'
import * as passwordLinks from '#server/services/password-links.ts'
import * as session from '#server/services/session.ts'
import {
  acceptInvitation,
  finishPasswordLink,
  finishSetup,
  readInvitation,
  readPasswordLink,
  readSetup,
} from '#shared/api/session.ts'

/** One-time links: who holds one needs no session and gets one by using it. */
export function linkRoutes(api: Api): void {
  mount(api, readSetup, async ({ db, params, now }) => {
    const link = await links.findLink(db, 'setup', params.token, now)
    const nobody = { name: null, email: null, group: null, role: null, hasAccount: false }
    return { kind: 'setup', ...nobody, expiresAt: link.expiresAt.toISOString() }
  })

  mount(api, finishSetup, async ({ db, params, body, now, requestId, config, session: control }) => {
    const known = await links.finishSetup(db, { ...params, ...body, now, requestId })
    await control.begin({ id: known.personId, epoch: known.epoch })
    return session.read(db, { personId: known.personId, loopback: config.loopback })
  })

  mount(api, readInvitation, ({ db, params, now }) => invitations.read(db, { ...params, now }))

  mount(api, acceptInvitation, async (context) => {
    const { db, params, body, now, requestId, config, limiter, events, session: control, request } = context
    // Counted like sign-ins, by who is invited and not by the link: a new link gives no new guesses.
    const address = addressKey(request)
    limiter.take('signInByAddress', address)
    const { email } = await invitations.read(db, { ...params, now })
    limiter.take('signInByAccount', email)
    const known = await invitations.accept(db, { ...params, ...body, now, requestId })
    limiter.giveBack('signInByAddress', address)
    limiter.giveBack('signInByAccount', email)
    events.personChanged(known.personId)
    await control.begin({ id: known.personId, epoch: known.epoch })
    return session.read(db, { personId: known.personId, loopback: config.loopback })
  })

  mount(api, readPasswordLink, ({ db, params, now }) => passwordLinks.read(db, { ...params, now }))

  mount(api, finishPasswordLink, async ({ db, params, body, now, requestId, config, events, session: control }) => {
    const known = await passwordLinks.finish(db, { ...params, ...body, now, requestId })
    events.personChanged(known.personId)
    await control.begin({ id: known.personId, epoch: known.epoch })
    return session.read(db, { personId: known.personId, loopback: config.loopback })
  })
}
