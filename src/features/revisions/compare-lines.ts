import { diffArrays } from 'diff'

/**
 * One place of the equation block: unchanged, or what was there above what is there now (either may be empty). `at` and
 * `wasAt` are the numbers of its first line in the newer and in the older block.
 */
export type LineChange =
  | { kind: 'same'; lines: string[]; at: number; wasAt: number }
  | { kind: 'changed'; was: string[]; now: string[]; at: number; wasAt: number }

export const linesOf = (equations: string): string[] => equations.split(/\r?\n/)

/** The equation blocks side by side, line by line; nothing is folded away. */
export function compareLines(before: string, after: string): LineChange[] {
  const changes: LineChange[] = []
  let at = 1
  let wasAt = 1
  let removed: string[] = []
  const flush = (now: string[]) => {
    if (removed.length > 0 || now.length > 0) changes.push({ kind: 'changed', was: removed, now, at, wasAt })
    at += now.length
    wasAt += removed.length
    removed = []
  }
  for (const part of diffArrays(linesOf(before), linesOf(after))) {
    if (part.removed) removed = [...removed, ...part.value]
    else if (part.added) flush(part.value)
    else {
      flush([])
      changes.push({ kind: 'same', lines: part.value, at, wasAt })
      at += part.value.length
      wasAt += part.value.length
    }
  }
  flush([])
  return changes
}

/** Lines that differ: of a changed place the longer side counts. */
export const changedLines = (changes: readonly LineChange[]): number =>
  changes.reduce(
    (sum, change) => sum + (change.kind === 'changed' ? Math.max(change.was.length, change.now.length) : 0),
    0,
  )
