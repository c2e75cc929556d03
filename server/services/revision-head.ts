import type { Queryable } from '#drizzle/client.ts'
import * as queries from '#server/queries/revisions.ts'
import { cardSummary, type RevisionHead, type RevisionState } from '#shared/api/pages.ts'
import { markText } from '#shared/stability/marks.ts'

/** States that anybody who may read the page may read. */
export const publicStates = ['in-force', 'superseded', 'withdrawn'] as const satisfies readonly RevisionState[]
export const memberStates = [...publicStates, 'in-review', 'returned'] as const satisfies readonly RevisionState[]

/** Strong: all of a revision but its state is frozen, and every change of state is one step. */
export const etagOf = (row: { major: number; minor: number; patch: number; state: RevisionState }): string =>
  `${markText(row)}.${row.state}`

/** Rows as the API tells them, with their signatures. */
export async function toHeads(db: Queryable, rows: readonly queries.HeadRow[]): Promise<RevisionHead[]> {
  const signatures = await queries.listSignatures(
    db,
    rows.map((row) => row.id),
  )
  return rows.map((row) => ({
    mark: markText(row),
    state: row.state,
    summary: row.summary,
    sentBy: row.sentBy,
    sentAt: row.sentAt.toISOString(),
    settledAt: row.settledAt?.toISOString() ?? null,
    reason: row.reason,
    base: row.base ? markText(row.base) : null,
    signatures: signatures
      .filter((signature) => signature.revisionId === row.id)
      .map(({ person, meaning, at }) => ({ person, meaning, at: at.toISOString() })),
    engine: row.engine,
    fingerprint: row.fingerprint,
    card: cardSummary.parse(row.cardSummary),
    etag: etagOf(row),
  }))
}

export async function toHead(db: Queryable, row: queries.HeadRow): Promise<RevisionHead> {
  const [head] = await toHeads(db, [row])
  if (!head) throw new Error('One row gives one head.')
  return head
}

/** The revision's head by its id. */
export async function readHead(db: Queryable, id: number): Promise<RevisionHead> {
  const row = await queries.findHead(db, id)
  if (!row) throw new Error(`Revision ${id} is not there.`)
  return toHead(db, row)
}
