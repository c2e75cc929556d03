import { createHash } from 'node:crypto'
import { z } from 'zod'
import type { Database, Queryable, Transaction } from '#drizzle/client.ts'
import * as queries from '#server/queries/log.ts'
import { canonicalJson } from '#shared/model/canonical-json.ts'

export interface LogEntry {
  at: Date
  personId: number | null
  /** Name of the act, as in the policy table where it has a row there. */
  act: string
  /** What it was done to: `page RD-017`, `person 12`, `group kiln-lab`. */
  target: string
  before?: unknown
  after?: unknown
  requestId: string | null
}

const tip = z.object({ hash: z.string(), count: z.number().int() })
const start = { hash: '0'.repeat(64), count: 0 }

const hashOf = (row: LogEntry & { previousHash: string }): string =>
  createHash('sha256')
    .update(
      canonicalJson([
        row.at.toISOString(),
        row.personId,
        row.act,
        row.target,
        row.before ?? null,
        row.after ?? null,
        row.requestId,
        row.previousHash,
      ]),
    )
    .digest('hex')

/**
 * Writes one act to the log, in the act's own transaction: either both are there or neither. Each row holds the hash of
 * the row before. Call it as the last statement: it holds the chain's tip until the transaction ends, and an act that
 * took other locks afterwards could wait in a circle. Never hand it secrets or equation text.
 */
export async function record(tx: Transaction, entry: LogEntry): Promise<void> {
  // The row's foreign key takes this lock as well: before the tip, or two acts could wait for each other.
  if (entry.personId !== null) await queries.holdPerson(tx, entry.personId)
  const { hash: previousHash, count } = tip.parse(await queries.lockTip(tx, start))
  const hash = hashOf({ ...entry, previousHash })
  await queries.insert(tx, {
    at: entry.at,
    personId: entry.personId,
    act: entry.act,
    target: entry.target,
    before: entry.before ?? null,
    after: entry.after ?? null,
    requestId: entry.requestId,
    previousHash,
    hash,
  })
  await queries.moveTip(tx, { hash, count: count + 1 })
}

export type LogCheck = { ok: true; rows: number } | { ok: false; rows: number; firstBad: number | null; reason: string }

/**
 * Walks the whole chain as it stood at one moment. A changed, removed or inserted row is found and named; rows cut off
 * at the end are found by the tip.
 */
export async function verify(db: Database): Promise<LogCheck> {
  return db.transaction(walk, { isolationLevel: 'repeatable read', withConsistentSnapshot: true })
}

async function walk(db: Queryable): Promise<LogCheck> {
  let previousHash = start.hash
  let last = 0
  let rows = 0
  for (;;) {
    const batch = await queries.listAfter(db, last, 500)
    for (const row of batch) {
      const bad = (reason: string): LogCheck => ({ ok: false, rows, firstBad: row.id, reason })
      if (row.previousHash !== previousHash) return bad('It does not follow the row before: one was removed or put in.')
      if (hashOf(row) !== row.hash) return bad('Its content is not what was written.')
      previousHash = row.hash
      last = row.id
      rows++
    }
    if (batch.length === 0) break
  }
  const end = tip.safeParse((await queries.readTip(db)) ?? start)
  if (!end.success || end.data.hash !== previousHash || end.data.count !== rows) {
    return { ok: false, rows, firstBad: null, reason: 'Rows at the end are missing.' }
  }
  return { ok: true, rows }
}
