import { z } from 'zod'
import { type ModelDocument, modelDocument } from '#shared/model/document.ts'

const readable = modelDocument.catchall(z.unknown())

/** A frozen document as the API carries it. Null where it is of a shape this client does not know (a newer server). */
export function parseDocument(value: unknown): ModelDocument | null {
  const parsed = readable.safeParse(value)
  return parsed.success ? parsed.data : null
}
