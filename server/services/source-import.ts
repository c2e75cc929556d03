import type { Transaction } from '#drizzle/client.ts'
import { AppError } from '#server/http/app-error.ts'
import * as queries from '#server/queries/sources.ts'
import type { CitationReference, ModelDocument } from '#shared/model/document.ts'
import type { LinkLabel } from '#shared/model/locators.ts'
import { anchorLines } from './anchor-lines.ts'
import { cleanSources } from './csl.ts'
import { readDraftDocument } from './draft-document.ts'
import { keepSource } from './keep-source.ts'
import { isKnownLabel } from './locators.ts'

type Place = { label: LinkLabel | null; locator: string | null; quoted: string | null }
type Target = Place & { target: 'page' | 'parameter' | 'line'; symbol?: string; line?: number }

function placeOf(reference: CitationReference): Place {
  if (typeof reference === 'string') return { label: null, locator: null, quoted: null }
  const { label, locator, quoted } = reference
  return {
    label: isKnownLabel(label) ? label : null,
    locator: locator?.trim().slice(0, 60) || null,
    quoted: quoted?.trim().slice(0, 200) || null,
  }
}

/** Where a document cites each of its sources; the page as a whole where nothing in it does. */
function targetsOf(document: ModelDocument): Map<string, Target[]> {
  const targets = new Map<string, Target[]>((document.citations ?? []).map((item) => [String(item.id), []]))
  const add = (reference: CitationReference, target: Omit<Target, keyof Place>) =>
    targets.get(typeof reference === 'string' ? reference : reference.id)?.push({ ...target, ...placeOf(reference) })
  for (const row of [...document.parameters, ...document.states]) {
    for (const reference of row.citations ?? []) add(reference, { target: 'parameter', symbol: row.symbol })
  }
  for (const { line, ...reference } of document.lineCitations ?? []) add(reference, { target: 'line', line })
  for (const found of targets.values()) {
    if (found.length === 0) found.push({ target: 'page', label: null, locator: null, quoted: null })
  }
  return targets
}

/**
 * The sources of a document that a page begins with, and where it cites them. The draft has to be there already: the links
 * of lines are anchored in it.
 *
 * @throws {AppError} `source-refused` for an item without a title or with a malformed DOI.
 */
export async function bringSources(
  tx: Transaction,
  of: { pageId: number; groupId: number; personId: number; now: Date; document: ModelDocument },
): Promise<void> {
  const { citations = [] } = of.document
  if (citations.length === 0) return
  const cleaned = cleanSources(citations)
  if (!cleaned.ok) throw new AppError('source-refused', cleaned.message)
  const targets = targetsOf(of.document)
  for (const [index, source] of cleaned.sources.entries()) {
    const { id: sourceId } = await keepSource(tx, of, source)
    for (const target of targets.get(String(citations[index]?.id)) ?? []) {
      await queries.insertLink(tx, { ...target, pageId: of.pageId, sourceId, addedBy: of.personId, addedAt: of.now })
    }
  }
  const { links } = await readDraftDocument(tx, of.pageId, 1)
  await anchorLines(tx, { pageId: of.pageId, generation: 1 }, links)
}
