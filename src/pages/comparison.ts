import type { Revision } from '#shared/api/revisions.ts'
import type { StabilityCard } from '#shared/model/card-document.ts'
import { type CardComparison, compareCards } from '#shared/stability/compare.ts'
import type { ComparedModel } from '#src/features/revisions/compared-equations.tsx'
import { parseDocument } from '#src/features/revisions/document-parts.ts'

export type Compared = ComparedModel & { card: StabilityCard; revision: Revision }

/** A revision and, where there is one that can be read, the one it is held against. */
export interface Comparison {
  now: Compared
  was: Compared | null
  /** There is one, but of a kind this page cannot read. */
  unreadable: boolean
  cards: CardComparison | null
}

function read(revision: Revision): Compared | null {
  const document = parseDocument(revision.document)
  const card = revision.stabilityCard
  return document && card ? { document, card, revision, lines: revision.lines, mark: revision.mark } : null
}

/** Null where the revision itself cannot be read. */
export function comparisonOf(revision: Revision, other: Revision | null): Comparison | null {
  const now = read(revision)
  if (!now) return null
  const was = other && read(other)
  return { now, was, unreadable: other !== null && was === null, cards: was && compareCards(was, now) }
}
