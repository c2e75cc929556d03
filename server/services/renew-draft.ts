import { createDraft } from '#collab/persistence.ts'
import type { Database } from '#drizzle/client.ts'
import { AppError } from '#server/http/app-error.ts'
import * as queries from '#server/queries/pages.ts'
import { anchorLines } from './anchor-lines.ts'
import { readDraftDocument } from './draft-document.ts'
import { record } from './log.ts'
import type { Actor } from './pages.ts'

/**
 * Begins a new generation of the draft with what the last one says, without the steps that led there: the way out for a
 * draft that has reached its size limit. Whoever wrote in it stays a writer, so nobody comes to approve their own text.
 *
 * @throws {AppError} `changed` for another generation than the sender saw, `in-review`, `not-found`.
 */
export async function renew(db: Database, input: Actor & { pageId: number; generation: number }): Promise<number> {
  const { pageId, generation, personId, now, requestId } = input
  return db.transaction(async (tx) => {
    const page = await queries.lockPage(tx, pageId)
    if (!page || page.removedAt !== null) throw new AppError('not-found', 'There is nothing at this address.')
    if (page.inReviewId !== null) throw new AppError('in-review', 'A review of this page is under way.')
    if (page.generation !== generation) {
      throw new AppError('changed', 'A new draft has begun since you opened this one.')
    }
    const { content, links } = await readDraftDocument(tx, pageId, generation)
    const next = { pageId, generation: generation + 1 }
    await createDraft(tx, next.pageId, next.generation, content, now)
    await anchorLines(tx, next, links)
    await queries.copyWriters(tx, pageId, { from: generation, to: next.generation })
    await queries.changePage(tx, pageId, { generation: next.generation, changedAt: now })
    const target = `page ${page.code}`
    await record(tx, {
      at: now,
      personId,
      act: 'draft:renew',
      target,
      after: { generation: next.generation },
      requestId,
    })
    return next.generation
  })
}
