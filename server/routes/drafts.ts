import { type Api, mount } from '#server/http/mount.ts'
import * as drafts from '#server/services/drafts.ts'
import { readDraft } from '#shared/api/drafts.ts'

export function draftRoutes(api: Api): void {
  mount(api, readDraft, ({ db, compute, page }) => drafts.read(db, compute, page))
}
