import type { MarkLevel } from './compare.ts'

/** A revision's mark. Computed, never typed; never used twice on a page. */
export interface Mark {
  major: number
  minor: number
  patch: number
}

export const firstMark: Mark = { major: 1, minor: 0, patch: 0 }

/** "2.1.0" */
export const markText = ({ major, minor, patch }: Mark): string => `${major}.${minor}.${patch}`

/** The mark a text like "2.1.0" names, or null. */
export function readMark(text: string): Mark | null {
  const match = /^(\d{1,6})\.(\d{1,6})\.(\d{1,6})$/.exec(text)
  return match ? { major: Number(match[1]), minor: Number(match[2]), patch: Number(match[3]) } : null
}

/**
 * The mark of a page's next revision.
 *
 * @param base   mark it is counted from (the revision in force), or null for the first one.
 * @param level  difference to that revision (compare.ts).
 * @param taken  every mark ever given on the page. Where the computed one is among them, the last number goes up until it
 *               is free.
 */
export function nextMark(base: Mark | null, level: MarkLevel, taken: readonly Mark[]): Mark {
  const used = new Set(taken.map(markText))
  const mark = { ...(base === null ? firstMark : raised(base, level)) }
  while (used.has(markText(mark))) mark.patch += 1
  return mark
}

function raised({ major, minor, patch }: Mark, level: MarkLevel): Mark {
  if (level === 'major') return { major: major + 1, minor: 0, patch: 0 }
  if (level === 'minor') return { major, minor: minor + 1, patch: 0 }
  return { major, minor, patch: patch + 1 }
}
