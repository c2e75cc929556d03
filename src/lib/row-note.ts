import type { PageRow } from '#shared/api/pages.ts'
import { readerNumber } from './figures.ts'
import { kindTurns, kindWord } from './kind-words.ts'
import { onsetText, standsOnGround } from './onset-figures.ts'

/** The one line a row adds to its figures: what a reader of the figures alone would miss. Null where they say it all. */
export function rowNote(row: Pick<PageRow, 'card' | 'draftKind'>): string | null {
  const { card, draftKind } = row
  const draft = draftKind === null ? null : `Draft ${kindTurns[draftKind].verb} it ${kindTurns[draftKind].word}`
  if (!card) return draft
  const running = card.control.value
  if (card.ground.length === 0) return joined('Nowhere steady in its range', draft)
  if (!standsOnGround(card)) return joined('Not steady where it runs', draft)
  if (draft !== null) return draft
  return edgeNote(card, running)
}

const joined = (first: string, second: string | null) => (second === null ? first : `${first}. ${second}`)

function edgeNote(card: NonNullable<PageRow['card']>, running: number): string | null {
  const main = card.main === null ? undefined : card.onsets[card.main]
  const { low, high } = card.control
  const [only] = card.ground
  if (card.kind === 'none' && card.otherEnds.length === 0 && card.ground.length === 1 && only) {
    return only.from <= low && only.to >= high ? 'Stable over the whole range' : null
  }
  if (card.kind === 'undecided') return 'Soft or hard is too close to call'
  // Another onset on the other side of the stretch one runs on.
  const stretch = card.ground.find((part) => running >= part.from && running <= part.to)
  const near = (high - low) * 1e-3
  const opposite = card.onsets.find(
    (onset) =>
      onset !== main &&
      onset.operating &&
      onset.direction !== main?.direction &&
      stretch !== undefined &&
      Math.abs(onset.p - (onset.direction > 0 ? stretch.to : stretch.from)) <= near,
  )
  if (opposite) {
    const kind = opposite.verdict === 'hard' || opposite.verdict === 'soft' ? opposite.verdict : 'undecided'
    return `Two limits: ${kindWord[kind]} at ${onsetText(opposite)} from ${opposite.direction > 0 ? 'above' : 'below'}`
  }
  const [first, second, ...more] = card.ground
  if (first && second && more.length === 0) {
    return `Unstable from ${onsetText({ p: first.to, direction: 1 })} to ${readerNumber(second.from, { digits: 4, rounding: 'up' })}`
  }
  return null
}
