import { createHash } from 'node:crypto'
import type { Database, Queryable } from '#drizzle/client.ts'
import { AppError } from '#server/http/app-error.ts'
import * as queries from '#server/queries/pages.ts'
import * as revisionQueries from '#server/queries/revisions.ts'
import { cardSummary, type Page, type RevisionHead } from '#shared/api/pages.ts'
import { mayInPage, type PageAct, pageActs, type ReadAccess } from '#shared/api/roles.ts'
import { record } from './log.ts'
import type { PageContext } from './page-context.ts'
import { publicStates, toHeads } from './revision-head.ts'

export interface Actor {
  personId: number
  now: Date
  requestId: string | null
}

const longestTitle = 200
/** A text cut to the width of its column. */
export const within = (text: string, most: number): string => [...text].slice(0, most).join('')

/** What a page's row repeats of its document. */
export const titleBlockOf = (document: { title: string; summary?: string; field?: string }) => ({
  title: within(document.title.trim(), longestTitle),
  summary: within(document.summary?.trim() ?? '', 1000),
  field: within(document.field?.trim() ?? '', 80),
})

/** The page's head for one viewer. Drafts, reviews and what was computed from them only for members. */
export async function read(db: Queryable, context: PageContext, personId: number | null): Promise<Page> {
  const { row, role, inForceId } = context
  const member = role !== 'visitor' && role !== 'stranger'
  const inReviewId = member ? context.inReviewId : null
  const rows = await revisionQueries.findHeads(
    db,
    [inForceId, inReviewId].filter((id) => id !== null),
  )
  const last =
    inForceId !== null || row.everPublic === 0 ? null : await revisionQueries.findNewest(db, context.id, publicStates)
  const all = last ? [...rows, last] : rows
  const heads = await toHeads(db, all)
  const headOf = (id: number | null) => heads[all.findIndex((one) => one.id === id)] ?? null
  const counts = await queries.countParts(db, context.id, inForceId ?? last?.id ?? null)
  const inReview = headOf(inReviewId)
  const page: Omit<Page, 'etag'> = {
    id: context.id,
    code: context.code,
    title: row.title,
    summary: row.summary,
    field: row.field,
    group: { slug: context.groupSlug, name: context.groupName },
    access: context.access,
    state: member ? context.state : publicState(context.state),
    role,
    may: mayDo(context, { personId, review: inReview, everSent: counts.revisions > 0 }),
    inForce: headOf(inForceId),
    lastPublic: headOf(last?.id ?? null),
    inReview,
    draft: member ? await draftOf(db, context, rows.find((one) => one.id === inForceId)?.digest ?? null) : null,
    counts: {
      sources: member ? counts.draftSources : counts.frozenSources,
      revisions: member ? counts.revisions : counts.publicRevisions,
    },
  }
  return { ...page, etag: etagOf(context, page) }
}

/** The state as a visitor may know it: nothing of a review. */
function publicState(state: Page['state']): Page['state'] {
  if (state === 'in-force-in-review') return 'in-force'
  return state === 'withdrawn-in-review' ? 'withdrawn' : state
}

/** Acts of the policy table that this person can do here, less those that something else than the role forbids. */
function mayDo(
  { role, state }: PageContext,
  of: { personId: number | null; review: RevisionHead | null; everSent: boolean },
): string[] {
  const { personId, review } = of
  const wrote = review?.signatures.some((one) => one.meaning === 'written' && one.person.id === personId) ?? false
  const forbidden: Partial<Record<PageAct, boolean>> = {
    'page:remove': of.everSent,
    'revision:approve': wrote,
    'revision:take-back': review?.sentBy.id !== personId && role !== 'maintainer',
  }
  const acts = Object.keys(pageActs) as PageAct[]
  return acts.filter((act) => mayInPage(act, role, state) && forbidden[act] !== true)
}

async function draftOf(db: Queryable, { id, row }: PageContext, digestInForce: string | null): Promise<Page['draft']> {
  return {
    generation: row.generation,
    writers: await queries.listWriters(db, id, row.generation),
    changedAt: row.draftChangedAt.toISOString(),
    kind: row.draftSummary === null ? null : cardSummary.parse(row.draftSummary).kind,
    // What was typed after the last computation is taken for a difference until it is compared.
    differs: digestInForce === null || row.draftDigest !== digestInForce || (row.draftCardAt ?? 0) < row.draftChangedAt,
  }
}

/**
 * A strong ETag of the head as this viewer gets it. It begins with the row's version, the part that If-Match compares:
 * somebody typing in the draft must not make a change of the settings stale. Visitors change nothing and learn no version.
 */
function etagOf(context: PageContext, page: Omit<Page, 'etag'>): string {
  const version = page.draft === null ? 0 : context.version
  return `${version}.${createHash('sha256').update(JSON.stringify(page)).digest('base64url').slice(0, 22)}`
}

const sameVersion = (ifMatch: string | null, version: number): boolean => ifMatch?.split('.')[0] === String(version)

/** Locks the page and checks that the sender saw its present version. */
async function lockSeen(tx: Queryable, context: PageContext, ifMatch: string | null): Promise<queries.PageRow> {
  const row = await queries.lockPage(tx, context.id)
  if (!row || row.removedAt !== null) throw new AppError('not-found', 'There is nothing at this address.')
  if (!sameVersion(ifMatch, row.version)) {
    throw new AppError('changed', 'The page has changed since you opened it.', { etag: `${row.version}.` })
  }
  return row
}

/** Changes who may read the page. @throws {AppError} `changed`. */
export async function changeAccess(
  db: Database,
  context: PageContext,
  input: Actor & { access: ReadAccess; ifMatch: string | null },
): Promise<void> {
  const { access, now, personId, requestId } = input
  await db.transaction(async (tx) => {
    const row = await lockSeen(tx, context, input.ifMatch)
    if (row.access === access) return
    await queries.changePage(tx, context.id, { access, changedAt: now })
    const change = { before: { access: row.access }, after: { access } }
    await record(tx, { at: now, personId, act: 'page:settings', target: `page ${row.code}`, ...change, requestId })
  })
}

/** Hides a page that never had a revision sent; its code stays used. @throws {AppError} `changed`, `may-not`. */
export async function remove(
  db: Database,
  context: PageContext,
  input: Actor & { ifMatch: string | null },
): Promise<void> {
  const { now, personId, requestId } = input
  await db.transaction(async (tx) => {
    const row = await lockSeen(tx, context, input.ifMatch)
    if ((await queries.countRevisions(tx, context.id)) > 0) {
      throw new AppError('may-not', 'A revision of this page was sent for review, so its record stays.')
    }
    await queries.changePage(tx, context.id, { removedAt: now, changedAt: now })
    await record(tx, { at: now, personId, act: 'page:remove', target: `page ${row.code}`, requestId })
  })
}
