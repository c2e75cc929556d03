import type { ReviewRow } from '#shared/api/reviews.ts'
import { kindTitle, kindWord } from '#src/lib/kind-words.ts'

/**
 * What a row of the reviews says of the verdict. Under review: what approving would change. Settled: the kind alone, since
 * what was in force before is not known here.
 */
export function consequenceOf({ revision, wasKind }: Pick<ReviewRow, 'revision' | 'wasKind'>): string {
  const now = revision.card?.kind ?? null
  if (now === null) return 'No verdict'
  if (revision.state !== 'in-review') return kindTitle[now]
  if (wasKind === null) return 'Nothing in force to compare with'
  return wasKind === now
    ? 'Leaves the verdict as it is'
    : `Turns the verdict from ${kindWord[wasKind]} to ${kindWord[now]}`
}
