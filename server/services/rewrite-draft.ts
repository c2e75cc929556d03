import { randomUUID } from 'node:crypto'
import * as Y from 'yjs'
import { append, takeOver } from '#collab/persistence.ts'
import type { Database } from '#drizzle/client.ts'
import type { DraftContent } from '#shared/model/draft.ts'
import {
  equationsOf,
  orderBetween,
  parameterCells,
  parameterRows,
  parametersOf,
  settingKeys,
  settingsOf,
  stateCells,
  stateRows,
  statesOf,
  type TableRow,
} from '#shared/ydoc/shape.ts'

/**
 * Makes a draft say something else as one person's edit, through the same log as typing does: only what differs is
 * written, and the person is noted as a writer in the same transaction.
 *
 * @throws {Error} where the draft is not open to edits (in review, removed, taken over by another process).
 */
export async function rewriteDraft(
  db: Database,
  input: { pageId: number; personId: number; content: DraftContent; now: Date },
): Promise<void> {
  const { pageId, personId, content, now } = input
  const draft = await takeOver(db, pageId)
  if (!draft) throw new Error(`Page ${pageId} is not there.`)
  const { doc } = draft
  try {
    const before = Y.encodeStateVector(doc)
    doc.transact(() => rewrite(doc, content))
    const data = Y.encodeStateAsUpdate(doc, before)
    const written = await append(db, draft, [{ personId, data, at: now }], now)
    if (!written.ok) throw new Error(`The draft of page ${pageId} is not open to edits: ${written.reason}.`)
  } finally {
    doc.destroy()
  }
}

function rewrite(doc: Y.Doc, content: DraftContent): void {
  rewriteText(equationsOf(doc), content.equations)
  rewriteTable(parametersOf(doc), parameterRows(doc), content.parameters, parameterCells)
  rewriteTable(statesOf(doc), stateRows(doc), content.states, stateCells)
  const settings = settingsOf(doc)
  for (const key of settingKeys) {
    const value = content.settings[key] ?? ''
    if (settings.get(key) !== value) settings.set(key, value)
  }
}

/** Replaces what lies between the common beginning and the common end. */
function rewriteText(text: Y.Text, to: string): void {
  const from = text.toString()
  const shorter = Math.min(from.length, to.length)
  let start = 0
  while (start < shorter && from[start] === to[start]) start++
  let end = 0
  while (end < shorter - start && from[from.length - 1 - end] === to[to.length - 1 - end]) end++
  text.delete(start, from.length - start - end)
  text.insert(start, to.slice(start, to.length - end))
}

/** Rows are the same where their symbols are; the others go, new ones follow at the end. */
function rewriteTable<Cell extends string>(
  table: Y.Map<Y.Map<string>>,
  standing: readonly (TableRow<Cell> & { symbol: string })[],
  wanted: readonly ({ id: string; symbol: string } & Partial<Record<Cell, string>>)[],
  cells: readonly Cell[],
): void {
  const symbols = new Set(wanted.map((row) => row.symbol))
  for (const row of standing) if (!symbols.has(row.symbol)) table.delete(row.id)
  let last = standing.at(-1)?.order
  for (const row of wanted) {
    const known = standing.find((one) => one.symbol === row.symbol)
    const target = (known && table.get(known.id)) ?? new Y.Map<string>()
    for (const cell of cells) {
      const value = row[cell] ?? ''
      if (known?.[cell] !== value) target.set(cell, value)
    }
    if (known) continue
    last = orderBetween(last, undefined)
    target.set('order', last)
    table.set(randomUUID(), target)
  }
}
