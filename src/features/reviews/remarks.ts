import { z } from 'zod'
import type { NewRemark } from '#src/api/revisions.ts'

/** A remark while it is being written. `target`: "line 3", "symbol mu", or empty for the whole revision. */
export interface DraftRemark {
  id: number
  text: string
  target: string
}

const kept = z.array(z.object({ id: z.number(), text: z.string(), target: z.string() })).min(1)

export const noRemarks: DraftRemark[] = [{ id: 0, text: '', target: '' }]

/** What was kept, or one empty remark. */
export function readRemarks(text: string | null): DraftRemark[] {
  if (text === null) return noRemarks
  try {
    return kept.parse(JSON.parse(text))
  } catch {
    return noRemarks
  }
}

export const written = (remarks: readonly DraftRemark[]): DraftRemark[] =>
  remarks.filter((remark) => remark.text.trim() !== '')

/** What is worth keeping, as text; null where nothing is written. */
export const keptRemarks = (remarks: readonly DraftRemark[]): string | null =>
  written(remarks).length === 0 ? null : JSON.stringify(remarks)

export const toSend = (remarks: readonly DraftRemark[]): NewRemark[] =>
  written(remarks).map(({ text, target }) => ({ text: text.trim(), ...targetOf(target) }))

function targetOf(target: string): Pick<NewRemark, 'line' | 'symbol'> {
  if (target.startsWith('line ')) return { line: Number(target.slice(5)) }
  if (target.startsWith('symbol ')) return { symbol: target.slice(7) }
  return {}
}

/** What a draft remark speaks of, in words. */
export const targetWords = (target: string): string =>
  target === '' ? 'the whole revision' : target.replace(/^symbol /, '')
