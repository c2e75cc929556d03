import { z } from 'zod'
import { none, ofPage } from './common.ts'
import { endpoint } from './endpoint.ts'
import { problemDetail } from './problem.ts'

/**
 * The draft as a model document, read from the co-edited document as the database has it. `document` is null where the
 * text does not make a model yet; `errors` then says why. Editing goes through the socket, never through this.
 */
export const draft = z.object({
  generation: z.number().int(),
  document: z.unknown().nullable(),
  errors: z.array(problemDetail),
})

export const readDraft = endpoint({
  method: 'GET',
  path: '/pages/:code/draft',
  act: 'draft:read',
  params: ofPage,
  query: none,
  body: none,
  response: draft,
})
