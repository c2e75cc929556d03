import { z } from 'zod'
import { none, pageCode } from './common.ts'
import { endpoint } from './endpoint.ts'
import { onsetKinds, revisionHead } from './pages.ts'

export const reviewRow = z.object({
  code: pageCode,
  title: z.string(),
  group: z.object({ slug: z.string(), name: z.string() }),
  revision: revisionHead,
  /** Kind of the revision in force, for "turns the verdict from soft to hard"; null where nothing is in force. */
  wasKind: z.enum(onsetKinds).nullable(),
  /** False with a reason where the viewer cannot check it (wrote in it, or is no maintainer). */
  mayApprove: z.boolean(),
  whyNot: z.string().nullable(),
})
export type ReviewRow = z.infer<typeof reviewRow>

export const listReviews = endpoint({
  method: 'GET',
  path: '/reviews',
  act: 'review:list',
  params: none,
  query: none,
  body: none,
  response: z.object({ toCheck: z.array(reviewRow), sentByMe: z.array(reviewRow), settled: z.array(reviewRow) }),
})
