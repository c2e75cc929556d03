import { createHash } from 'node:crypto'
import { z } from 'zod'
import { loadDocument } from '#collab/persistence.ts'
import type { Queryable } from '#drizzle/client.ts'
import { type LinkRow, listLinks, type SourceRow } from '#server/queries/sources.ts'
import { canonicalJson } from '#shared/model/canonical-json.ts'
import type { CitationReference, ModelDocument } from '#shared/model/document.ts'
import { type DraftContent, documentFromDraft } from '#shared/model/draft.ts'
import { sameSymbol } from '#shared/stability/summary.ts'
import { readDraft } from '#shared/ydoc/shape.ts'
import { lineOfAnchor } from './line-anchors.ts'

/** A link of the draft with the line it stands on now (line links only). */
export interface PlacedLink {
  link: LinkRow
  source: SourceRow
  line: number | null
}

/** A draft as it is committed, with the model document it spells; null where a cell cannot be read. */
export interface ReadDraftDocument {
  content: DraftContent
  links: PlacedLink[]
  document: ModelDocument | null
}

const cslItem = z.record(z.string(), z.unknown())

/** Reads a draft from its log. In a transaction that locked the page this is what would be frozen. */
export async function readDraftDocument(db: Queryable, pageId: number, generation: number): Promise<ReadDraftDocument> {
  const doc = await loadDocument(db, pageId, generation)
  try {
    const content = readDraft(doc)
    const lineCount = content.equations.split(/\r\n|\r|\n/).length
    const links = (await listLinks(db, pageId)).map(({ link, source }) => ({
      link,
      source,
      line:
        link.target === 'line'
          ? ((link.anchor === null ? null : lineOfAnchor(doc, link.anchor)) ?? Math.min(link.line ?? 1, lineCount))
          : null,
    }))
    const spelled = documentFromDraft(content)
    return { content, links, document: spelled.ok ? withSources(spelled.document, links) : null }
  } finally {
    doc.destroy()
  }
}

/** SHA-256 of the RFC 8785 form of a document: what signatures refer to. */
export const digestOf = (document: ModelDocument): string =>
  `sha256:${createHash('sha256').update(canonicalJson(document)).digest('hex')}`

const placeOf = ({ label, locator, quoted }: LinkRow) => ({
  ...(label === null ? {} : { label }),
  ...(locator === null ? {} : { locator }),
  ...(quoted === null ? {} : { quoted }),
})
const isPlaced = (link: LinkRow) => link.label !== null || link.locator !== null || link.quoted !== null

function referenceOf({ link, source }: PlacedLink): CitationReference {
  return isPlaced(link) ? { id: source.key, ...placeOf(link) } : source.key
}

/**
 * The document with the draft's sources in it. A place in a source cited by the page as a whole has no field of its own in
 * the format; it goes into the item's `custom` member, which CSL keeps free for such things.
 */
function withSources(document: ModelDocument, links: readonly PlacedLink[]): ModelDocument {
  const bySource = new Map<number, PlacedLink[]>()
  for (const placed of links) bySource.set(placed.source.id, [...(bySource.get(placed.source.id) ?? []), placed])
  const citations = [...bySource.values()].flatMap((group) => {
    const [first] = group
    if (!first) return []
    const places = group.filter(({ link }) => link.target === 'page' && isPlaced(link)).map(({ link }) => placeOf(link))
    return [
      {
        ...cslItem.parse(first.source.csl),
        id: first.source.key,
        ...(places.length > 0 ? { custom: { places } } : {}),
      },
    ]
  })
  const citing = (symbol: string) => {
    const found = links.filter(
      ({ link }) => link.target === 'parameter' && link.symbol !== null && sameSymbol(link.symbol, symbol),
    )
    return found.length > 0 ? { citations: found.map(referenceOf) } : {}
  }
  const lineCitations = links.flatMap(({ link, source, line }) =>
    line === null ? [] : [{ line, id: source.key, ...placeOf(link) }],
  )
  return {
    ...document,
    parameters: document.parameters.map((row) => ({ ...row, ...citing(row.symbol) })),
    states: document.states.map((row) => ({ ...row, ...citing(row.symbol) })),
    ...(citations.length > 0 ? { citations } : {}),
    ...(lineCitations.length > 0 ? { lineCitations } : {}),
  }
}
