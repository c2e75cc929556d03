import { diffArrays } from 'diff'

/** A line of the newer text that differs; `removed`: nothing of it is new, but lines that stood before it are gone. */
export interface ChangedLine {
  line: number
  kind: 'changed' | 'removed'
}

/** Beyond so many differing lines the texts count as different from end to end: it is not worth waiting for more. */
const longestEdit = 400

/** Lines of `after` that were not in `before` so, and places where lines are gone. Blanks at the end count for nothing. */
export function changedLines(before: string, after: string): ChangedLine[] {
  const was = linesOf(before)
  const now = linesOf(after)
  const parts = diffArrays(was, now, { maxEditLength: longestEdit })
  if (!parts) return now.map((_, index) => ({ line: index + 1, kind: 'changed' }))
  const changed: ChangedLine[] = []
  let line = 1
  for (const [index, part] of parts.entries()) {
    if (part.removed) {
      const replaced = parts[index + 1]?.added || parts[index - 1]?.added
      if (!replaced) changed.push({ line: Math.min(line, now.length), kind: 'removed' })
      continue
    }
    if (part.added) for (let i = 0; i < part.value.length; i++) changed.push({ line: line + i, kind: 'changed' })
    line += part.value.length
  }
  return changed
}

const linesOf = (text: string) => text.split(/\r\n|\r|\n/).map((line) => line.trimEnd())

/** "lines 2, 4 to 6": for those who do not see the margin. */
export function linesInWords(changed: readonly ChangedLine[]): string {
  const numbers = [...new Set(changed.map(({ line }) => line))].sort((a, b) => a - b)
  const runs: [number, number][] = []
  for (const line of numbers) {
    const last = runs.at(-1)
    if (last && last[1] === line - 1) last[1] = line
    else runs.push([line, line])
  }
  const words = runs.map(([from, to]) => (from === to ? String(from) : `${from} to ${to}`)).join(', ')
  return numbers.length === 1 ? `line ${words}` : `lines ${words}`
}
