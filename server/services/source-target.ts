import { loadDocument } from '#collab/persistence.ts'
import type { Queryable } from '#drizzle/client.ts'
import { AppError } from '#server/http/app-error.ts'
import type { SourceTarget } from '#shared/api/sources.ts'
import { anchorOfLine, lineOfAnchor } from './line-anchors.ts'

/**
 * A target as the columns of a link. A line is kept as an anchor in the draft's text: the one the editor sent where it
 * stands in this text, else the start of the line of that number.
 *
 * @throws {AppError} `bad-request` where there is no such line.
 */
export async function targetColumns(
  db: Queryable,
  page: { id: number; generation: number },
  target: SourceTarget,
): Promise<{ target: SourceTarget['kind']; symbol?: string; line?: number; anchor?: string }> {
  if (target.kind === 'parameter') return { target: 'parameter', symbol: target.symbol }
  if (target.kind === 'page') return { target: 'page' }
  const doc = await loadDocument(db, page.id, page.generation)
  const line = (target.anchor === undefined ? null : lineOfAnchor(doc, target.anchor)) ?? target.line
  const anchor = anchorOfLine(doc, line)
  doc.destroy()
  if (anchor !== null) return { target: 'line', line, anchor }
  const message = `The equation block has no line ${target.line}.`
  throw new AppError('bad-request', message, { errors: [{ code: 'unknown-line', message, path: 'target.line' }] })
}
