import { z } from 'zod'

const item = z.record(z.string(), z.unknown())

/** What the citation child is asked. */
export const citationJob = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('read'), text: z.string() }),
  z.strictObject({ kind: z.literal('format'), items: z.array(item) }),
])

/** Items as pasted, in CSL-JSON; not checked beyond being objects. */
export const readCitations = z.discriminatedUnion('ok', [
  z.object({ ok: z.literal(true), items: z.array(item) }),
  z.object({ ok: z.literal(false), message: z.string() }),
])
export type ReadCitations = z.infer<typeof readCitations>
export const formattedTexts = z.array(z.string())
