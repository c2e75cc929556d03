import type { StabilityCard } from '#shared/model/card-document.ts'
import type { VerdictKind } from '#shared/stability/sentences.ts'
import { kindHue, kindWord } from '#src/lib/kind-words.ts'

export type Glyph = 'hard' | 'soft' | 'undecided' | 'none'

/** Hue of a kind, as a class: only soft, hard and undecided onsets have one. */
export const verdictHues: Record<VerdictKind, string> = {
  ...kindHue,
  limit: 'text-ink',
  unstable: 'text-ink',
}

/** The word of a kind inside a sentence: "was soft". */
export const kindWords: Record<VerdictKind, string> = {
  ...kindWord,
  limit: 'limited by a turning point or branch point',
  none: 'without onset',
  unstable: 'already unstable',
}

/**
 * The glyphs beside the headline: one for each kind of onset that bounds the steady running, low first. Two onsets of one
 * kind need one glyph.
 */
export function glyphsOf(card: StabilityCard, otherwise: 'hard' | 'soft' | 'open' | 'none'): Glyph[] {
  const ends = card.window ? [card.window.low, card.window.high] : []
  const kinds = ends
    .filter((end) => end.kind === 'onset')
    .map((end): Glyph => (end.verdict === 'hard' || end.verdict === 'soft' ? end.verdict : 'undecided'))
  if (kinds.length > 0) return [...new Set(kinds)]
  return [otherwise === 'open' ? 'undecided' : otherwise]
}
