import { isDuplicate, type Transaction } from '#drizzle/client.ts'
import * as queries from '#server/queries/sources.ts'
import { canonicalJson } from '#shared/model/canonical-json.ts'
import { type CleanSource, plainReference } from './csl.ts'

/** The same source: what it says counts, not the name it was given. */
const saysTheSame = (row: queries.SourceRow, source: CleanSource) =>
  canonicalJson(row.csl) === canonicalJson(source.csl)

/**
 * Puts a source among the group's, once: one with that DOI, or with that key and the same content, is used again. A key
 * that another source of the group has gets a number.
 */
export async function keepSource(
  tx: Transaction,
  of: { groupId: number; personId: number; now: Date },
  source: CleanSource,
): Promise<queries.SourceRow> {
  const { groupId, personId, now } = of
  for (let number = 1; ; number++) {
    const known = source.doi === null ? null : await queries.findByDoi(tx, groupId, source.doi)
    if (known) return known
    const key = number === 1 ? source.key : `${source.key}-${number}`
    const named = await queries.findByKey(tx, groupId, key)
    if (named && saysTheSame(named, source)) return named
    if (named) continue
    const row = {
      groupId,
      key,
      csl: source.csl,
      doi: source.doi,
      words: plainReference(source.csl),
      addedBy: personId,
      addedAt: now,
    }
    try {
      return { id: await queries.insertSource(tx, row), ...row }
    } catch (error) {
      // Somebody else added it, or took the key, at this moment: look again.
      if (!isDuplicate(error)) throw error
      number--
    }
  }
}
