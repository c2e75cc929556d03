import { loadDocument } from '#collab/persistence.ts'
import type { Transaction } from '#drizzle/client.ts'
import * as queries from '#server/queries/sources.ts'
import type { PlacedLink } from './draft-document.ts'
import { anchorOfLine } from './line-anchors.ts'

/** Ties links of lines to a generation's text, each on the line it stands on. Anchors of another generation mean nothing in this one. */
export async function anchorLines(
  tx: Transaction,
  draft: { pageId: number; generation: number },
  links: readonly PlacedLink[],
): Promise<void> {
  const placed = links.flatMap(({ link, line }) => (line === null ? [] : [{ id: link.id, line }]))
  if (placed.length === 0) return
  const doc = await loadDocument(tx, draft.pageId, draft.generation)
  for (const { id, line } of placed) {
    const anchor = anchorOfLine(doc, line)
    if (anchor !== null) await queries.moveLink(tx, id, { line, anchor })
  }
  doc.destroy()
}
