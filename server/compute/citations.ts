import { z } from 'zod'
import { formattedTexts, type ReadCitations, readCitations } from './citation-job.ts'
import { type ChildPool, type ChildPoolOptions, createChildPool, type JobFailure } from './pool.ts'

export type CslItem = Record<string, unknown>

/** Reads and formats sources in a child of its own: the library takes seconds to warm and reads what strangers paste. */
export interface Citations {
  /** CSL-JSON items in a pasted text (BibTeX or CSL-JSON), unchecked. */
  read(text: string): Promise<{ ok: true; read: ReadCitations } | { ok: false; reason: JobFailure }>
  /** One line of text for each item, in order; null for one that could not be formatted in time. */
  format(items: readonly CslItem[]): Promise<(string | null)[]>
  close(): Promise<void>
}

/** A formatted line never changes: kept by its item, the longest unused one goes first. */
const keptLines = 5000

export function createCitations(options: { deadline: number; log?: ChildPoolOptions['log'] }): Citations {
  const script = new URL('./citation-child.ts', import.meta.url)
  const pool: ChildPool = createChildPool({ script, size: 1, warm: false, queueLimit: 200, ...options })
  const lines = new Map<string, string>()

  async function formatNew(items: Map<string, CslItem>): Promise<void> {
    const outcome = await pool.run({ kind: 'format', items: [...items.values()] })
    const texts = outcome.ok ? formattedTexts.parse(outcome.answer) : []
    for (const [index, key] of [...items.keys()].entries()) {
      const text = texts[index]
      if (text) lines.set(key, text)
    }
  }

  return {
    async read(text) {
      const outcome = await pool.run({ kind: 'read', text })
      return outcome.ok ? { ok: true, read: readCitations.parse(outcome.answer) } : outcome
    },
    async format(items) {
      const keys = items.map((item) => JSON.stringify(item))
      const missing = new Map<string, CslItem>()
      for (const [index, key] of keys.entries()) {
        const known = lines.get(key)
        const item = items[index]
        if (known !== undefined) {
          lines.delete(key)
          lines.set(key, known)
        } else if (item) missing.set(key, item)
      }
      if (missing.size > 0) await formatNew(missing)
      const found = keys.map((key) => lines.get(key) ?? null)
      while (lines.size > keptLines) lines.delete(z.string().parse(lines.keys().next().value))
      return found
    },
    close: () => pool.close(),
  }
}
