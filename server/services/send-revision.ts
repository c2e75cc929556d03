import type { Database, Transaction } from '#drizzle/client.ts'
import type { Compute } from '#server/compute/compute.ts'
import { AppError } from '#server/http/app-error.ts'
import * as pageQueries from '#server/queries/pages.ts'
import * as queries from '#server/queries/revisions.ts'
import type { RevisionHead } from '#shared/api/pages.ts'
import { compareCards } from '#shared/stability/compare.ts'
import { type Mark, markText, nextMark } from '#shared/stability/marks.ts'
import * as cards from './cards.ts'
import { digestOf, type ReadDraftDocument, readDraftDocument } from './draft-document.ts'
import { readDocument } from './frozen-revision.ts'
import { record } from './log.ts'
import type { Actor } from './pages.ts'
import { publicStates, readHead } from './revision-head.ts'
import { wordsOf } from './search-words.ts'

/** The draft may change while its card is computed; then it is computed again, so often. */
const tries = 3

/** A draft ready to be frozen, with the card that was computed of exactly this document. */
interface Frozen {
  digest: string
  computed: cards.ComputedCard
  cardId: number
}

/**
 * Freezes the committed draft as the page's next revision, waiting for review, and locks the draft. The card is computed
 * before the transaction, in a child process; inside it the draft is read again under the page's lock and has to be the same.
 *
 * @throws {AppError} `changed` for another generation than the sender saw, `in-review`, `model-refused` with every fault,
 *                    `analysis-budget`, `unsaved-edits` where the draft keeps changing.
 */
export async function send(
  db: Database,
  compute: Compute,
  input: Actor & { pageId: number; generation: number; summary: string },
): Promise<RevisionHead> {
  for (let attempt = 1; attempt <= tries; attempt++) {
    checkPage(await pageQueries.findPage(db, input.pageId), input.generation)
    const draft = await readDraftDocument(db, input.pageId, input.generation)
    const frozen = await judge(db, compute, draft, input.now)
    const revisionId = await db.transaction((tx) => freeze(tx, frozen, input))
    if (revisionId !== null) return readHead(db, revisionId)
  }
  throw new AppError('unsaved-edits', 'The draft is being changed at this moment. Send it when nobody is typing.')
}

function checkPage(page: pageQueries.PageRow | null, generation: number): pageQueries.PageRow {
  if (!page || page.removedAt !== null) throw new AppError('not-found', 'There is nothing at this address.')
  if (page.inReviewId !== null) throw new AppError('in-review', 'A revision of this page is in review already.')
  if (page.generation !== generation) {
    throw new AppError('changed', 'A new draft has begun since you opened this page. Look at it first.')
  }
  return page
}

async function judge(db: Database, compute: Compute, draft: ReadDraftDocument, now: Date): Promise<Frozen> {
  const { document } = draft
  if (document === null) {
    const checked = await compute.check(draft.content)
    if (!checked.ok) throw cards.refusalOf(checked)
    throw new Error('A draft whose cells cannot be read was found without fault.')
  }
  if (document.title === '') {
    const message = 'Give the model a title.'
    throw new AppError('model-refused', message, { errors: [{ code: 'missing-field', message, path: 'title' }] })
  }
  const digest = digestOf(document)
  const computed = await cards.compute(compute, document)
  return { digest, computed, cardId: await cards.keep(db, computed.card, now) }
}

/** The new revision's id; null where the draft is no longer what the card was computed from. */
async function freeze(
  tx: Transaction,
  { digest, computed, cardId }: Frozen,
  input: Actor & { pageId: number; generation: number; summary: string },
): Promise<number | null> {
  const { pageId, generation, summary, personId, now, requestId } = input
  const page = checkPage(await pageQueries.lockPage(tx, pageId), generation)
  const draft = await readDraftDocument(tx, pageId, generation)
  if (draft.document === null || digestOf(draft.document) !== digest) return null

  const marks = await queries.listMarks(tx, pageId)
  const mark = await markOf(tx, page, marks, { document: draft.document, card: computed.card })
  const id = await queries.insert(tx, {
    pageId,
    number: Math.max(0, ...marks.map((one) => one.number)) + 1,
    ...mark,
    state: 'in-review',
    summary,
    document: draft.document,
    digest,
    fingerprint: computed.card.fingerprint,
    engine: computed.card.engine,
    cardId,
    cardSummary: computed.summary,
    baseId: page.inForceId,
    generation,
    sentBy: personId,
    sentAt: now,
  })
  // Whoever sends it stands for it, also where others typed all of it.
  await pageQueries.noteWriter(tx, { pageId, generation, personId, now })
  const writers = await pageQueries.listWriters(tx, pageId, generation)
  await queries.sign(
    tx,
    writers.map((writer) => ({ revisionId: id, personId: writer.id, meaning: 'written' as const, digest, at: now })),
  )
  const words = wordsOf(
    draft.content,
    draft.links.map(({ source }) => source.words),
  )
  await pageQueries.changePage(tx, pageId, {
    inReviewId: id,
    changedAt: now,
    draftCardId: cardId,
    draftSummary: computed.summary,
    draftDigest: digest,
    draftWords: words,
    draftCardAt: page.draftChangedAt,
  })
  const target = `page ${page.code} revision ${markText(mark)}`
  const after = { digest, fingerprint: computed.card.fingerprint, engine: computed.card.engine, summary }
  await record(tx, { at: now, personId, act: 'revision:send', target, after, requestId })
  return id
}

/**
 * By how the card differs from the revision in force. After a withdrawal nothing is in force; then the last public one
 * counts, so that no later revision bears a lower mark than one that readers may still hold in their hands.
 */
async function markOf(
  tx: Transaction,
  page: pageQueries.PageRow,
  marks: readonly Mark[],
  after: Parameters<typeof compareCards>[1],
): Promise<Mark> {
  const base =
    page.inForceId === null
      ? await queries.findNewest(tx, page.id, publicStates)
      : await queries.findHead(tx, page.inForceId)
  if (!base) return nextMark(null, 'patch', marks)
  const document = await readDocument(tx, base.id)
  const before = { document, card: await cards.read(tx, base.cardId) }
  return nextMark(base, compareCards(before, after).level, marks)
}
