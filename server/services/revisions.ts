import type { Queryable } from '#drizzle/client.ts'
import type { Compute } from '#server/compute/compute.ts'
import { AppError } from '#server/http/app-error.ts'
import * as queries from '#server/queries/revisions.ts'
import type { RevisionHead } from '#shared/api/pages.ts'
import type { Revision } from '#shared/api/revisions.ts'
import { readMark } from '#shared/stability/marks.ts'
import { readFrozen } from './frozen-revision.ts'
import type { PageContext } from './page-context.ts'
import { etagOf, memberStates, publicStates, toHeads } from './revision-head.ts'

const isMember = ({ role }: PageContext): boolean => role !== 'visitor' && role !== 'stranger'

/** A page's revisions, newest first: all for members, for others those that are or were in force. */
export async function list(db: Queryable, page: PageContext): Promise<RevisionHead[]> {
  return toHeads(db, await queries.listHeads(db, page.id, isMember(page) ? memberStates : publicStates))
}

async function find(db: Queryable, page: PageContext, text: string): Promise<queries.HeadRow> {
  const mark = readMark(text)
  const row = mark ? await queries.findByMark(db, page.id, mark) : null
  const states: readonly string[] = isMember(page) ? memberStates : publicStates
  if (!row || !states.includes(row.state)) throw new AppError('not-found', `This page has no revision ${text}.`)
  return row
}

/** One revision in full, and another one to compare it with. `etag` covers both. */
export async function read(
  db: Queryable,
  compute: Compute,
  page: PageContext,
  marks: { mark: string; with?: string },
): Promise<{ revision: Revision; other: Revision | null; etag: string }> {
  const row = await find(db, page, marks.mark)
  const otherRow = marks.with === undefined ? null : await find(db, page, marks.with)
  const member = isMember(page)
  const [revision, other] = await Promise.all([
    readFrozen(db, compute, row, member),
    otherRow ? readFrozen(db, compute, otherRow, member) : null,
  ])
  // Remarks are told to members only, so their answer is another one.
  const parts = [etagOf(row), ...(otherRow ? [etagOf(otherRow)] : []), ...(member ? ['member'] : [])]
  return { revision, other, etag: parts.join('+') }
}
