import { z } from 'zod'
import type { Queryable } from '#drizzle/client.ts'
import type { Compute } from '#server/compute/compute.ts'
import * as queries from '#server/queries/revisions.ts'
import type { Revision, ShownLine } from '#shared/api/revisions.ts'
import type { FormattedSource, SourceLink, SourceTarget } from '#shared/api/sources.ts'
import { type CitationReference, type ModelDocument, modelDocument } from '#shared/model/document.ts'
import { blockToTex } from '#shared/model/tex.ts'
import * as cards from './cards.ts'
import { type CslItem, doiOf, plainReference, titleOf, urlOf, yearOf } from './csl.ts'
import { isKnownLabel } from './locators.ts'
import { toHead } from './revision-head.ts'

/** The frozen document of a revision. */
export async function readDocument(db: Queryable, revisionId: number): Promise<ModelDocument> {
  return modelDocument.parse(await queries.findDocument(db, revisionId))
}

/** A revision in full. Remarks only for members of the page's group. */
export async function readFrozen(
  db: Queryable,
  compute: Compute,
  row: queries.HeadRow,
  member: boolean,
): Promise<Revision> {
  const [head, document, stabilityCard, remarks] = await Promise.all([
    toHead(db, row),
    readDocument(db, row.id),
    cards.read(db, row.cardId),
    member ? queries.listRemarks(db, row.id) : [],
  ])
  return {
    ...head,
    document,
    stabilityCard,
    lines: linesOf(row.digest, document),
    sources: await sourcesOf(compute, document),
    remarks: remarks.map((remark) => ({ ...remark, at: remark.at.toISOString() })),
  }
}

/** A frozen document is typeset once; the last ones stay, by what they hold. */
const typeset = new Map<string, ShownLine[]>()
const mostTypeset = 200

function linesOf(digest: string, document: ModelDocument): ShownLine[] {
  const known = typeset.get(digest)
  if (known) return known
  const lines = blockToTex(document).map(({ line, kind, tex, text, comment }): ShownLine => {
    const shown = { line, kind: kind === 'unread' ? 'comment' : kind, tex, text } as const
    return comment === null ? shown : { ...shown, comment }
  })
  const [oldest] = typeset.keys()
  if (typeset.size >= mostTypeset && oldest !== undefined) typeset.delete(oldest)
  typeset.set(digest, lines)
  return lines
}

const pagePlaces = z.object({
  places: z.array(
    z.object({ label: z.string().optional(), locator: z.string().optional(), quoted: z.string().optional() }),
  ),
})
/** Places of a source that is cited by the page as a whole (draft-document.ts puts them there). */
const placesOf = (custom: unknown) => pagePlaces.safeParse(custom).data?.places ?? []

type Cited = Exclude<CitationReference, string>
const whole = (reference: CitationReference): Cited => (typeof reference === 'string' ? { id: reference } : reference)

/** The sources as frozen in the document, in its order; ids are positions, since nothing else may change them any more. */
async function sourcesOf(compute: Compute, document: ModelDocument): Promise<FormattedSource[]> {
  const { citations = [] } = document
  const items = citations.map(({ id: _id, custom: _custom, ...csl }): CslItem => csl)
  const formatted = await compute.citations.format(items)
  let lastLink = 0
  const link = (
    target: SourceTarget,
    { label, locator, quoted }: { label?: string; locator?: string; quoted?: string },
  ): SourceLink => ({
    id: ++lastLink,
    target,
    label: isKnownLabel(label) ? label : null,
    locator: locator ?? null,
    quoted: quoted ?? null,
  })
  const cited = [
    ...[...document.parameters, ...document.states].flatMap(({ symbol, citations: references = [] }) =>
      references.map((one) => ({ target: { kind: 'parameter' as const, symbol }, reference: whole(one) })),
    ),
    ...(document.lineCitations ?? []).map(({ line, ...reference }) => ({
      target: { kind: 'line' as const, line },
      reference,
    })),
  ]
  return items.map((csl, index) => {
    const key = String(citations[index]?.id)
    return {
      id: index + 1,
      key,
      formatted: formatted[index] ?? plainReference(csl),
      title: titleOf(csl),
      year: yearOf(csl),
      url: urlOf(csl),
      doi: doiOf(csl),
      csl,
      links: [
        ...placesOf(citations[index]?.custom).map((place) => link({ kind: 'page' }, place)),
        ...cited.filter((one) => one.reference.id === key).map((one) => link(one.target, one.reference)),
      ],
    }
  })
}
