import { type Api, mount } from '#server/http/mount.ts'
import * as newPages from '#server/services/create-page.ts'
import * as library from '#server/services/library.ts'
import { loadPageContext } from '#server/services/page-context.ts'
import * as pages from '#server/services/pages.ts'
import { changePage, createPage, listPages, readPage, removePage } from '#shared/api/pages.ts'

export function pageRoutes(api: Api): void {
  mount(api, listPages, ({ db, viewer, query }) => library.list(db, viewer.person?.id ?? null, query))

  mount(api, createPage, async ({ db, compute, group, body, person, now, requestId, events, limiter }) => {
    if (body.document !== undefined) limiter.take('cards', String(person.id))
    const input = { ...body, groupId: group.id, personId: person.id, now, requestId }
    const { id, code } = await newPages.create(db, compute, input)
    events.draftChanged(id)
    return { code }
  })

  mount(api, readPage, async ({ db, page, viewer, setEtag }) => {
    const head = await pages.read(db, page, viewer.person?.id ?? null)
    setEtag(head.etag)
    return head
  })

  mount(api, changePage, async ({ db, page, body, person, viewer, ifMatch, now, requestId, events, setEtag }) => {
    await pages.changeAccess(db, page, { ...body, ifMatch, personId: person.id, now, requestId })
    events.pageChanged(page.id)
    const changed = (await loadPageContext(db, viewer, { id: page.id })) ?? page
    const head = await pages.read(db, changed, person.id)
    setEtag(head.etag)
    return head
  })

  mount(api, removePage, async ({ db, page, person, ifMatch, now, requestId, events }) => {
    await pages.remove(db, page, { ifMatch, personId: person.id, now, requestId })
    events.pageChanged(page.id)
  })
}
