import { type Api, mount } from '#server/http/mount.ts'
import * as drafts from '#server/services/drafts.ts'
import { renew } from '#server/services/renew-draft.ts'
import { readDraft, renewDraft } from '#shared/api/drafts.ts'

export function draftRoutes(api: Api): void {
  mount(api, readDraft, ({ db, compute, page }) => drafts.read(db, compute, page))

  mount(api, renewDraft, async ({ db, page, body, person, now, requestId, events }) => {
    const generation = await renew(db, { ...body, pageId: page.id, personId: person.id, now, requestId })
    // Sockets of the generation before are closed: their browsers load the new one.
    events.pageChanged(page.id)
    return { generation }
  })
}
