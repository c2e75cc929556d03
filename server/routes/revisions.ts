import type { HandlerContext } from '#server/http/context.ts'
import { type Api, mount } from '#server/http/mount.ts'
import * as revisions from '#server/services/revisions.ts'
import { send } from '#server/services/send-revision.ts'
import { confirmPassword } from '#server/services/session.ts'
import * as settle from '#server/services/settle-revision.ts'
import {
  approveRevision,
  listRevisions,
  readRevision,
  returnRevision,
  sendForReview,
  takeBackRevision,
  withdrawRevision,
} from '#shared/api/revisions.ts'

type Settling = HandlerContext<{ mark: string }, unknown, unknown>

const inputOf = ({ page, params, ifMatch, person, now, requestId }: Settling): settle.SettleInput => ({
  pageId: page.id,
  mark: params.mark,
  ifMatch,
  personId: person.id,
  now,
  requestId,
})

/** Asks the password again; wrong ones count like refused sign-ins. */
const confirmer =
  ({ db, person, limiter }: Settling, password: string) =>
  async () => {
    limiter.take('signInByAccount', person.email)
    await confirmPassword(db, { personId: person.id, password })
    limiter.giveBack('signInByAccount', person.email)
  }

export function revisionRoutes(api: Api): void {
  mount(api, listRevisions, async ({ db, page }) => ({ revisions: await revisions.list(db, page) }))

  mount(api, readRevision, async ({ db, compute, page, params, query, setEtag }) => {
    const { revision, other, etag } = await revisions.read(db, compute, page, { mark: params.mark, with: query.with })
    setEtag(etag)
    return { revision, other }
  })

  mount(api, sendForReview, async ({ db, compute, page, body, person, now, requestId, events, setEtag, limiter }) => {
    limiter.take('cards', String(person.id))
    const head = await send(db, compute, { ...body, pageId: page.id, personId: person.id, now, requestId })
    events.pageChanged(page.id)
    setEtag(head.etag)
    return head
  })

  mount(api, takeBackRevision, async (context) => {
    const { db, page, events, setEtag } = context
    const head = await settle.takeBack(db, { ...inputOf(context), maintainer: page.role === 'maintainer' })
    events.pageChanged(page.id)
    setEtag(head.etag)
    return head
  })

  mount(api, returnRevision, async (context) => {
    const { db, page, body, events, setEtag } = context
    const head = await settle.giveBackWithRemarks(db, { ...inputOf(context), remarks: body.remarks })
    events.pageChanged(page.id)
    setEtag(head.etag)
    return head
  })

  mount(api, approveRevision, async (context) => {
    const { db, page, body, events, setEtag } = context
    const confirm = confirmer(context, body.password)
    const head = await settle.approve(db, { ...inputOf(context), confirm })
    events.pageChanged(page.id)
    setEtag(head.etag)
    return head
  })

  mount(api, withdrawRevision, async (context) => {
    const { db, page, body, events, setEtag } = context
    const confirm = confirmer(context, body.password)
    const head = await settle.withdraw(db, { ...inputOf(context), reason: body.reason, confirm })
    events.pageChanged(page.id)
    setEtag(head.etag)
    return head
  })
}
