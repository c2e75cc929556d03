import { z } from 'zod'

/** The library takes requests of 256 KiB; a larger document is refused before it is sent. */
export const largestFile = 250 * 1024

const titled = z.object({ title: z.string().trim().min(1).max(120) })

export type ReadFile = { ok: true; document: unknown; title: string | null } | { ok: false; message: string }

/** Text of a file or of the clipboard as a model document. Whether it makes a model is the server's to say; this only reads JSON. */
export function readModelText(text: string): ReadFile {
  if (text.trim() === '') return { ok: false, message: 'Choose a file or paste a model document.' }
  if (text.length > largestFile)
    return { ok: false, message: 'Larger than 250 KiB, which is more than the library takes.' }
  let document: unknown
  try {
    document = JSON.parse(text)
  } catch (error) {
    const why = error instanceof Error ? error.message : ''
    return { ok: false, message: `This is not JSON. ${why}` }
  }
  const title = titled.safeParse(document)
  return { ok: true, document, title: title.success ? title.data.title : null }
}
