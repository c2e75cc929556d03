import type { DraftContent } from '#shared/model/draft.ts'
import { foldSymbol } from '#shared/model/symbols.ts'

/** Far below the 64 KiB of the column, also where every character takes four bytes. */
const longestWords = 15_000

/** What a page is found by besides its code and title: symbols (as written and spelled out), meanings, sources. One line. */
export function wordsOf(content: Pick<DraftContent, 'parameters' | 'states'>, sources: readonly string[]): string {
  const rows = [...content.parameters, ...content.states]
  const symbols = rows.flatMap(({ symbol }) => [symbol, foldSymbol(symbol) ?? ''])
  const words = [...new Set(symbols), ...rows.map((row) => row.meaning), ...new Set(sources)]
  return [...words.join(' ').replace(/\s+/g, ' ').trim()].slice(0, longestWords).join('')
}

/** A search text as terms; all of them have to be found. At most eight. */
export const termsOf = (query: string): string[] =>
  query
    .split(/\s+/)
    .filter((term) => term !== '')
    .slice(0, 8)
