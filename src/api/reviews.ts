import { queryOptions } from '@tanstack/react-query'
import { listReviews } from '#shared/api/reviews.ts'
import { call } from './client.ts'
import { keys } from './keys.ts'

/** To check, sent by the viewer, settled. */
export const reviewsQuery = (viewer: number) =>
  queryOptions({ queryKey: keys.reviews(viewer), queryFn: ({ signal }) => call(listReviews, { signal }) })
