import { z } from 'zod'
import type { Database, Queryable, Transaction } from '#drizzle/client.ts'
import type { Compute } from '#server/compute/compute.ts'
import { AppError } from '#server/http/app-error.ts'
import * as pageQueries from '#server/queries/pages.ts'
import * as queries from '#server/queries/sources.ts'
import type { FormattedSource, SourceTarget } from '#shared/api/sources.ts'
import type { LinkLabel } from '#shared/model/locators.ts'
import { sameSymbol } from '#shared/stability/summary.ts'
import { type CleanSource, type CslItem, doiOf, plainReference, titleOf, urlOf, yearOf } from './csl.ts'
import { type PlacedLink, readDraftDocument } from './draft-document.ts'
import { keepSource } from './keep-source.ts'
import { record } from './log.ts'
import type { PageContext } from './page-context.ts'
import type { Actor } from './pages.ts'
import { targetColumns } from './source-target.ts'

/** Links that may stand on one draft. */
const mostLinks = 500
const cslItem = z.record(z.string(), z.unknown())

const targetOf = ({ link, line }: PlacedLink): SourceTarget => {
  if (link.target === 'parameter') return { kind: 'parameter', symbol: link.symbol ?? '' }
  if (link.target === 'line') {
    return { kind: 'line', line: line ?? 1, ...(link.anchor === null ? {} : { anchor: link.anchor }) }
  }
  return { kind: 'page' }
}

/** The sources on the draft, each with where it is cited, in the order they came. */
export async function list(db: Queryable, compute: Compute, page: PageContext): Promise<FormattedSource[]> {
  const { links } = await readDraftDocument(db, page.id, page.generation)
  const sources = [...new Map(links.map(({ source }) => [source.id, source])).values()]
  const items = sources.map((source): CslItem => cslItem.parse(source.csl))
  const formatted = await compute.citations.format(items)
  return sources.map((source, index) => {
    const csl = items[index] ?? {}
    return {
      id: source.id,
      key: source.key,
      formatted: formatted[index] ?? plainReference(csl),
      title: titleOf(csl),
      year: yearOf(csl),
      url: urlOf(csl),
      doi: doiOf(csl),
      csl,
      links: links
        .filter((placed) => placed.source.id === source.id)
        .map((placed) => ({
          id: placed.link.id,
          target: targetOf(placed),
          label: placed.link.label,
          locator: placed.link.locator,
          quoted: placed.link.quoted,
        })),
    }
  })
}

/**
 * Runs a change of the draft's sources: under the page's lock, refused while a review is under way, and noted as writing
 * in the draft, since it is frozen with it.
 */
async function change(
  db: Database,
  page: PageContext,
  actor: Actor,
  act: string,
  work: (tx: Transaction, row: pageQueries.PageRow) => Promise<unknown>,
): Promise<void> {
  const { personId, now, requestId } = actor
  await db.transaction(async (tx) => {
    const row = await pageQueries.lockPage(tx, page.id)
    if (!row || row.removedAt !== null) throw new AppError('not-found', 'There is nothing at this address.')
    if (row.inReviewId !== null)
      throw new AppError('in-review', 'The draft is in review; its sources cannot change now.')
    const after = await work(tx, row)
    await pageQueries.noteWriter(tx, { pageId: row.id, generation: row.generation, personId, now })
    await pageQueries.noteDraftChange(tx, row.id, now)
    await record(tx, { at: now, personId, act, target: `page ${row.code}`, after, requestId })
  })
}

/** Adds sources to the group and attaches them to the page. One that is there already is used again. */
export async function add(
  db: Database,
  page: PageContext,
  input: Actor & { sources: readonly CleanSource[] },
): Promise<void> {
  const { personId, now } = input
  await change(db, page, input, 'source:add', async (tx, row) => {
    const standing = await queries.listLinks(tx, row.id)
    checkRoom(standing.length + input.sources.length)
    const attached = new Set(standing.map(({ source }) => source.id))
    const keys: string[] = []
    for (const source of input.sources) {
      const { id: sourceId, key } = await keepSource(tx, { groupId: row.groupId, personId, now }, source)
      keys.push(key)
      if (attached.has(sourceId)) continue
      attached.add(sourceId)
      await queries.insertLink(tx, { pageId: row.id, sourceId, target: 'page', addedBy: personId, addedAt: now })
    }
    return { keys }
  })
}

function checkRoom(links: number): void {
  if (links > mostLinks) throw new AppError('too-large', `At most ${mostLinks} links to sources stand on one page.`)
}

/** Takes a source off the page with all its links. @throws {AppError} `not-found`, `in-review`. */
export async function remove(db: Database, page: PageContext, input: Actor & { sourceId: number }): Promise<void> {
  await change(db, page, input, 'source:remove', async (tx, row) => {
    const removed = await queries.removeLinks(tx, row.id, { sourceId: input.sourceId }, input.now)
    if (removed === 0) throw new AppError('not-found', 'This source is not on the page.')
    return { source: input.sourceId }
  })
}

/** Takes one link off the page. @throws {AppError} `not-found`, `in-review`. */
export async function unlink(db: Database, page: PageContext, input: Actor & { linkId: number }): Promise<void> {
  await change(db, page, input, 'source:unlink', async (tx, row) => {
    const removed = await queries.removeLinks(tx, row.id, { linkId: input.linkId }, input.now)
    if (removed === 0) throw new AppError('not-found', 'This link is not on the page.')
    return { link: input.linkId }
  })
}

/**
 * Says where the page, a parameter or a line of its equations takes something from a source that is on the page.
 *
 * @throws {AppError} `not-found` for a source not on the page, `bad-request` for a line or symbol that is not there.
 */
export async function link(
  db: Database,
  page: PageContext,
  input: Actor & { sourceId: number; target: SourceTarget; label?: LinkLabel; locator?: string; quoted?: string },
): Promise<void> {
  const { sourceId, target, personId, now } = input
  await change(db, page, input, 'source:link', async (tx, row) => {
    const draft = await readDraftDocument(tx, row.id, row.generation)
    if (!draft.links.some(({ source }) => source.id === sourceId)) {
      throw new AppError('not-found', 'This source is not on the page.')
    }
    checkRoom(draft.links.length + 1)
    const rows = [...draft.content.parameters, ...draft.content.states]
    const isThere = (symbol: string) => rows.some((one) => sameSymbol(one.symbol.trim(), symbol))
    if (target.kind === 'parameter' && !isThere(target.symbol)) {
      const message = `There is no parameter or state ${target.symbol}.`
      throw new AppError('bad-request', message, {
        errors: [{ code: 'unknown-symbol', message, path: 'target.symbol' }],
      })
    }
    await queries.insertLink(tx, {
      pageId: row.id,
      sourceId,
      ...(await targetColumns(tx, row, target)),
      label: input.label ?? null,
      locator: input.locator || null,
      quoted: input.quoted || null,
      addedBy: personId,
      addedAt: now,
    })
    return { source: sourceId, target: target.kind }
  })
}
