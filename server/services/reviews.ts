import type { z } from 'zod'
import type { Queryable } from '#drizzle/client.ts'
import * as queries from '#server/queries/reviews.ts'
import * as revisionQueries from '#server/queries/revisions.ts'
import { cardSummary, type RevisionHead } from '#shared/api/pages.ts'
import type { listReviews, ReviewRow } from '#shared/api/reviews.ts'
import { toHeads } from './revision-head.ts'

const most = 200
const mostSettled = 50

/** Why the person cannot approve it; null where they can. */
function whyNot(head: RevisionHead, role: string, personId: number): string | null {
  if (head.state !== 'in-review') return 'It is settled.'
  if (head.signatures.some((one) => one.meaning === 'written' && one.person.id === personId)) {
    return 'You wrote in it.'
  }
  return role === 'maintainer' ? null : 'Only a maintainer of the group can approve it.'
}

/** What waits in the person's groups, what the person sent, and what was settled lately. */
export async function list(db: Queryable, personId: number): Promise<z.infer<(typeof listReviews)['response']>> {
  const [waiting, settled] = await Promise.all([
    queries.listOfGroups(db, personId, { states: ['in-review'], limit: most }),
    queries.listOfGroups(db, personId, {
      states: ['returned', 'in-force', 'superseded', 'withdrawn'],
      limit: mostSettled,
    }),
  ])
  const found = [...waiting, ...settled]
  const rows = await revisionQueries.findHeads(
    db,
    found.map((row) => row.revisionId),
  )
  const heads = new Map((await toHeads(db, rows)).map((head, index) => [rows[index]?.id, head]))
  const toRow = (row: (typeof found)[number]): ReviewRow[] => {
    const revision = heads.get(row.revisionId)
    if (!revision) return []
    const reason = whyNot(revision, row.role, personId)
    return [
      {
        code: row.code,
        title: row.title,
        group: row.group,
        revision,
        wasKind: row.inForceSummary === null ? null : cardSummary.parse(row.inForceSummary).kind,
        mayApprove: reason === null,
        whyNot: reason,
      },
    ]
  }
  const inReview = waiting.flatMap(toRow)
  const sent = (row: ReviewRow) => row.revision.sentBy.id === personId
  return {
    toCheck: inReview.filter((row) => !sent(row)),
    sentByMe: inReview.filter(sent),
    settled: settled.flatMap(toRow),
  }
}
