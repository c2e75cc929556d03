import type { OnsetKind } from '#shared/api/pages.ts'

/** The word of a kind, as facets, rows and tables use it. */
export const kindTitle: Record<OnsetKind, string> = {
  hard: 'Hard',
  soft: 'Soft',
  undecided: 'Undecided',
  none: 'No onset',
}

/** The word of a kind inside a sentence: "from soft to hard". */
export const kindWord: Record<OnsetKind, string> = {
  hard: 'hard',
  soft: 'soft',
  undecided: 'undecided',
  none: 'no onset',
}

/** Hue of a kind, as a class: only soft, hard and undecided onsets have one. */
export const kindHue: Record<OnsetKind, string> = {
  hard: 'text-hard',
  soft: 'text-soft',
  undecided: 'text-open',
  none: 'text-ink',
}

/** What a new revision does to the verdict: "turns this hard", "Draft turns it hard". The kind's own word stands apart for its hue. */
export const kindTurns: Record<OnsetKind, { verb: string; word: string }> = {
  hard: { verb: 'turns', word: 'hard' },
  soft: { verb: 'turns', word: 'soft' },
  undecided: { verb: 'leaves', word: 'undecided' },
  none: { verb: 'leaves', word: 'without an onset in range' },
}
