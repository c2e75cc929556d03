import { z } from 'zod'
import { none, ofPage } from './common.ts'
import { endpoint } from './endpoint.ts'
import { problemDetail } from './problem.ts'

/**
 * The draft as a model document, read from the co-edited document as the database has it. `document` is null where the
 * text does not make a model yet; `errors` then says why. Editing goes through the socket, never through this. `targets` is
 * what a source may stand behind, also while the draft has faults: symbols of both tables, and lines that hold a statement,
 * each with the anchor of its start (SourceTarget).
 */
export const draft = z.object({
  generation: z.number().int(),
  document: z.unknown().nullable(),
  errors: z.array(problemDetail),
  targets: z.object({
    symbols: z.array(z.object({ symbol: z.string(), meaning: z.string() })),
    lines: z.array(z.object({ line: z.number().int().positive(), text: z.string(), anchor: z.string() })),
  }),
})
export type DraftTargets = z.infer<typeof draft>['targets']

export const readDraft = endpoint({
  method: 'GET',
  path: '/pages/:code/draft',
  act: 'draft:read',
  params: ofPage,
  query: none,
  body: none,
  response: draft,
})

/**
 * Begins the draft anew from what it says, for drafts whose steps have reached their size limit. `generation` is the one
 * the sender saw. Who wrote in it stays noted as a writer.
 */
export const renewDraft = endpoint({
  method: 'POST',
  path: '/pages/:code/draft/generations',
  act: 'draft:renew',
  params: ofPage,
  query: none,
  body: z.strictObject({ generation: z.number().int().positive() }),
  response: z.object({ generation: z.number().int().positive() }),
})
