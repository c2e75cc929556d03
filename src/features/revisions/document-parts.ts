import { diffArrays } from 'diff'
import { z } from 'zod'
import type { ModelDocument } from '#shared/model/document.ts'
import { type documentParameter, type documentState, modelDocument } from '#shared/model/document.ts'

const readable = modelDocument.catchall(z.unknown())

/** A frozen document as the API carries it. Null where it is of a shape this client does not know (a newer server). */
export function parseDocument(value: unknown): ModelDocument | null {
  const parsed = readable.safeParse(value)
  return parsed.success ? parsed.data : null
}

export type DocumentParameter = z.infer<typeof documentParameter>
export type DocumentState = z.infer<typeof documentState>

/** One place of the equation block: unchanged, or what was there above what is there now (either may be empty). */
export type LineChange =
  | { kind: 'same'; lines: string[]; at: number }
  | { kind: 'changed'; was: string[]; now: string[]; at: number }

/** The equation blocks side by side, line by line; nothing is folded away. `at` is the line number in the newer block. */
export function compareLines(before: string, after: string): LineChange[] {
  const changes: LineChange[] = []
  let at = 1
  let removed: string[] = []
  const flush = (now: string[]) => {
    if (removed.length > 0 || now.length > 0) changes.push({ kind: 'changed', was: removed, now, at })
    removed = []
    at += now.length
  }
  for (const part of diffArrays(before.split(/\r?\n/), after.split(/\r?\n/))) {
    if (part.removed) removed = [...removed, ...part.value]
    else if (part.added) flush(part.value)
    else {
      flush([])
      changes.push({ kind: 'same', lines: part.value, at })
      at += part.value.length
    }
  }
  flush([])
  return changes
}

export interface RowChange {
  symbol: string
  meaning: string
  was: string | null
  now: string | null
}

const figure = (value: number | undefined) => (value === undefined ? '' : String(value).replace('-', '\u2212'))
const range = (row: { low?: number; high?: number }) =>
  row.low === undefined && row.high === undefined ? '' : ` (${figure(row.low)} to ${figure(row.high)})`

/** A parameter in one line: value, unit, range. */
export function parameterText(row: DocumentParameter): string {
  return `${figure(row.value)}${row.unit && row.unit !== '1' ? ` ${row.unit}` : ''}${range(row)}`
}

/** A state in one line: its search range, start and unit. */
export function stateText(row: DocumentState): string {
  const start = row.start === undefined ? '' : `, starts at ${figure(row.start)}`
  return `${figure(row.low)} to ${figure(row.high)}${row.unit && row.unit !== '1' ? ` ${row.unit}` : ''}${start}`
}

/** Rows that are new, gone or different, in the order of the newer document, gone ones last. */
export function compareRows<Row extends { symbol: string; meaning?: string }>(
  before: readonly Row[],
  after: readonly Row[],
  text: (row: Row) => string,
): RowChange[] {
  const old = new Map(before.map((row) => [row.symbol, row]))
  const changed = after.flatMap((row): RowChange[] => {
    const earlier = old.get(row.symbol)
    old.delete(row.symbol)
    const was = earlier ? text(earlier) : null
    const now = text(row)
    return was === now ? [] : [{ symbol: row.symbol, meaning: row.meaning ?? '', was, now }]
  })
  return [
    ...changed,
    ...[...old.values()].map((row) => ({ symbol: row.symbol, meaning: row.meaning ?? '', was: text(row), now: null })),
  ]
}
