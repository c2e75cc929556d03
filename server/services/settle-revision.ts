import { createDraft } from '#collab/persistence.ts'
import type { Database, Queryable, Transaction } from '#drizzle/client.ts'
import { AppError } from '#server/http/app-error.ts'
import * as pageQueries from '#server/queries/pages.ts'
import * as queries from '#server/queries/revisions.ts'
import type { RevisionHead } from '#shared/api/pages.ts'
import { type Mark, markText, readMark } from '#shared/stability/marks.ts'
import { anchorLines } from './anchor-lines.ts'
import { readDraftDocument } from './draft-document.ts'
import { readDocument } from './frozen-revision.ts'
import { record } from './log.ts'
import { type Actor, titleBlockOf } from './pages.ts'
import { etagOf, readHead } from './revision-head.ts'

export interface SettleInput extends Actor {
  pageId: number
  mark: string
  ifMatch: string | null
}
/** Asks the person's password; throws `wrong-password`. */
type Confirm = () => Promise<void>
type Found = { page: pageQueries.PageRow; revision: queries.HeadRow }

async function findRevision(db: Queryable, pageId: number, text: string): Promise<queries.HeadRow> {
  const mark: Mark | null = readMark(text)
  const revision = mark ? await queries.findByMark(db, pageId, mark) : null
  if (!revision) throw new AppError('not-found', `This page has no revision ${text}.`)
  return revision
}

function checkSeen(revision: queries.HeadRow, ifMatch: string | null): void {
  const etag = etagOf(revision)
  if (ifMatch === etag) return
  throw new AppError('changed', `Revision ${markText(revision)} has changed since you opened it.`, { etag })
}

/** Both rows under the page's lock, as the sender saw them. Of several who settle at once one comes first; the others find it changed. */
async function lockSeen(tx: Transaction, input: SettleInput): Promise<Found> {
  const page = await pageQueries.lockPage(tx, input.pageId)
  if (!page || page.removedAt !== null) throw new AppError('not-found', 'There is nothing at this address.')
  const revision = await findRevision(tx, input.pageId, input.mark)
  checkSeen(revision, input.ifMatch)
  return { page, revision }
}

function checkInReview({ page, revision }: Found): void {
  if (revision.state === 'in-review' && page.inReviewId === revision.id) return
  throw new AppError('already-settled', `Revision ${markText(revision)} is not in review any more.`)
}

const logged = (input: SettleInput, { page, revision }: Found) => ({
  at: input.now,
  personId: input.personId,
  target: `page ${page.code} revision ${markText(revision)}`,
  requestId: input.requestId,
})

/** Sends a revision back; the draft opens again. */
async function giveBack(tx: Transaction, { page, revision }: Found, now: Date): Promise<void> {
  await queries.settle(tx, revision.id, { state: 'returned', settledAt: now })
  await pageQueries.changePage(tx, page.id, { inReviewId: null, changedAt: now })
}

/** The sender, or a maintainer, takes a revision out of review. @throws {AppError} `changed`, `already-settled`, `may-not`. */
export async function takeBack(db: Database, input: SettleInput & { maintainer: boolean }): Promise<RevisionHead> {
  const id = await db.transaction(async (tx) => {
    const found = await lockSeen(tx, input)
    checkInReview(found)
    if (found.revision.sentBy.id !== input.personId && !input.maintainer) {
      throw new AppError('may-not', `Only ${found.revision.sentBy.name} or a maintainer can take it back.`)
    }
    await giveBack(tx, found, input.now)
    await record(tx, { ...logged(input, found), act: 'revision:take-back' })
    return found.revision.id
  })
  return readHead(db, id)
}

/** Returns a revision with remarks. @throws {AppError} `changed`, `already-settled`. */
export async function giveBackWithRemarks(
  db: Database,
  input: SettleInput & { remarks: readonly { text: string; line?: number; symbol?: string }[] },
): Promise<RevisionHead> {
  const { remarks, personId, now } = input
  const id = await db.transaction(async (tx) => {
    const found = await lockSeen(tx, input)
    checkInReview(found)
    await giveBack(tx, found, now)
    const own = { revisionId: found.revision.id, authorId: personId, at: now }
    await queries.insertRemarks(
      tx,
      remarks.map(({ text, line = null, symbol = null }) => ({ ...own, text, line, symbol })),
    )
    await record(tx, { ...logged(input, found), act: 'revision:return', after: { remarks: remarks.length } })
    return found.revision.id
  })
  return readHead(db, id)
}

async function checkNotWriter(db: Queryable, revision: queries.HeadRow, personId: number): Promise<void> {
  const signatures = await queries.listSignatures(db, [revision.id])
  if (signatures.some((one) => one.meaning === 'written' && one.person.id === personId)) {
    throw new AppError('may-not', 'You wrote in this revision, so somebody else has to check and approve it.')
  }
}

function checkBase({ page, revision }: Found): void {
  if (page.inForceId === revision.baseId) return
  throw new AppError(
    'base-superseded',
    'What is in force has changed since this revision was sent. It was compared with another one; take it back and send it again.',
  )
}

/**
 * Puts a revision in force by a maintainer who did not write in it: checked and approved are signed, the one before is
 * superseded, and a new generation of the draft begins with what was approved. The password is asked before anything is
 * locked and signs nothing where it is wrong.
 *
 * @throws {AppError} `changed`, `already-settled`, `may-not`, `wrong-password`, `base-superseded`.
 */
export async function approve(db: Database, input: SettleInput & { confirm: Confirm }): Promise<RevisionHead> {
  const seen = await findRevision(db, input.pageId, input.mark)
  checkSeen(seen, input.ifMatch)
  await checkNotWriter(db, seen, input.personId)
  await input.confirm()
  const id = await db.transaction(async (tx) => {
    const found = await lockSeen(tx, input)
    checkInReview(found)
    await checkNotWriter(tx, found.revision, input.personId)
    checkBase(found)
    await putInForce(tx, found, input)
    await record(tx, { ...logged(input, found), act: 'revision:approve', after: { digest: found.revision.digest } })
    return found.revision.id
  })
  return readHead(db, id)
}

async function putInForce(tx: Transaction, { page, revision }: Found, { personId, now }: SettleInput): Promise<void> {
  const { id, digest } = revision
  if (page.inForceId !== null) await queries.settle(tx, page.inForceId, { state: 'superseded', settledAt: now })
  await queries.settle(tx, id, { state: 'in-force', settledAt: now })
  await queries.sign(
    tx,
    (['checked', 'approved'] as const).map((meaning) => ({ revisionId: id, personId, meaning, digest, at: now })),
  )
  const document = await readDocument(tx, id)
  const { content, links } = await readDraftDocument(tx, page.id, page.generation)
  const next = { pageId: page.id, generation: page.generation + 1 }
  await createDraft(tx, next.pageId, next.generation, content, now)
  await anchorLines(tx, next, links)
  await pageQueries.changePage(tx, page.id, {
    ...titleBlockOf(document),
    inForceId: id,
    inReviewId: null,
    everPublic: 1,
    generation: next.generation,
    publicWords: page.draftWords,
    draftChangedAt: now,
    draftCardAt: now,
    changedAt: now,
  })
}

/** Takes the revision in force out of force, for good. @throws {AppError} `changed`, `already-settled`, `wrong-password`. */
export async function withdraw(
  db: Database,
  input: SettleInput & { reason: string; confirm: Confirm },
): Promise<RevisionHead> {
  const { personId, now, reason } = input
  checkSeen(await findRevision(db, input.pageId, input.mark), input.ifMatch)
  await input.confirm()
  const id = await db.transaction(async (tx) => {
    const found = await lockSeen(tx, input)
    const { page, revision } = found
    if (revision.state !== 'in-force' || page.inForceId !== revision.id) {
      throw new AppError('already-settled', `Revision ${markText(revision)} is not in force.`)
    }
    await queries.settle(tx, revision.id, { state: 'withdrawn', settledAt: now, reason })
    const signature = {
      revisionId: revision.id,
      personId,
      meaning: 'withdrawn' as const,
      digest: revision.digest,
      at: now,
    }
    await queries.sign(tx, [signature])
    await pageQueries.changePage(tx, page.id, { inForceId: null, changedAt: now })
    await record(tx, { ...logged(input, found), act: 'revision:withdraw', after: { reason } })
    return revision.id
  })
  return readHead(db, id)
}
