import type { z } from 'zod'
import { loadDocument } from '#collab/persistence.ts'
import type { Queryable } from '#drizzle/client.ts'
import type { Compute } from '#server/compute/compute.ts'
import type { draft } from '#shared/api/drafts.ts'
import { detailsOfModel, refusalOf } from './cards.ts'
import { readDraftDocument } from './draft-document.ts'
import { statementLines } from './line-anchors.ts'
import type { PageContext } from './page-context.ts'

/**
 * The committed draft as a model document, sources included; without one every fault. And what a source may stand behind.
 *
 * @throws {AppError} `not-ready` where too many cards are being computed to check it.
 */
export async function read(db: Queryable, compute: Compute, page: PageContext): Promise<z.infer<typeof draft>> {
  const { content, document } = await readDraftDocument(db, page.id, page.generation)
  const checked = await compute.check(content)
  if (!checked.ok && checked.reason !== 'refused') throw refusalOf(checked)
  const errors = checked.ok ? [] : detailsOfModel(checked.errors)
  const doc = await loadDocument(db, page.id, page.generation)
  const lines = statementLines(doc)
  doc.destroy()
  const symbols = [...content.parameters, ...content.states]
    .filter(({ symbol }) => symbol.trim() !== '')
    .map(({ symbol, meaning }) => ({ symbol: symbol.trim(), meaning }))
  return {
    generation: page.generation,
    document: checked.ok ? document : null,
    errors,
    targets: { symbols, lines },
  }
}
