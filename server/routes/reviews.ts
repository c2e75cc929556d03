import { type Api, mount } from '#server/http/mount.ts'
import * as reviews from '#server/services/reviews.ts'
import { listReviews } from '#shared/api/reviews.ts'

export function reviewRoutes(api: Api): void {
  mount(api, listReviews, ({ db, person }) => reviews.list(db, person.id))
}
