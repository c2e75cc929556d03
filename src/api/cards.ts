import { useMutation } from '@tanstack/react-query'
import { computeCard } from '#shared/api/cards.ts'
import { call } from './client.ts'

/** A card computed on the server; nothing is stored. A document that makes no model throws `model-refused` with all faults in `errors`. */
export function useComputeCard() {
  return useMutation({ mutationFn: (document: unknown) => call(computeCard, { body: { document } }) })
}
