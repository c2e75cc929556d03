import { z } from 'zod'
import { stabilityCard } from '../model/card-document.ts'
import { none } from './common.ts'
import { endpoint } from './endpoint.ts'

/** A model document's card, computed on the server within a budget; nothing is stored. 422 `model-refused` with all faults. */
export const computeCard = endpoint({
  method: 'POST',
  path: '/cards',
  act: 'card:compute',
  status: 200,
  params: none,
  query: none,
  body: z.strictObject({ document: z.unknown() }),
  response: stabilityCard,
})
