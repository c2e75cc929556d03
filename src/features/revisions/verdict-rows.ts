import type { HopfPoint } from '#shared/model/card-document.ts'
import type { CardDifference, Judged } from '#shared/stability/compare.ts'
import { type CardSummary, summarise } from '#shared/stability/summary.ts'
import { exactFigure, readerNumber, shortFigure } from '#src/lib/figures.ts'
import { kindWord } from '#src/lib/kind-words.ts'
import { frequencyText, onsetText, otherLimit, unitText } from '#src/lib/onset-figures.ts'

/** One figure of both cards, as it is read. */
export interface VerdictRow {
  what: string
  was: string
  now: string
}

interface Read {
  summary: CardSummary
  onset: HopfPoint | null
  judged: Judged
}

function read(judged: Judged): Read {
  const summary = summarise(judged.document, judged.card)
  return { summary, onset: summary.main === null ? null : (judged.card.hopf?.[summary.main] ?? null), judged }
}

const withUnit = (text: string, { summary }: Read) => `${text} ${unitText(summary.control.unit)}`.trimEnd()

function limitOf(side: Read): string {
  const main = side.summary.main === null ? undefined : side.summary.onsets[side.summary.main]
  if (main) return withUnit(onsetText(main), side)
  const other = otherLimit(side.summary)
  return other ? `${withUnit(other.text, side)}, ${other.word}` : 'none in range'
}

function steadyOf(side: Read): string {
  const { window } = side.judged.card
  if (!window) return 'not steady'
  // An end of the range was entered, nothing is lost there; any other end is rounded into the steady side.
  const from =
    window.low.kind === 'range-end'
      ? shortFigure(window.from)
      : readerNumber(window.from, { digits: 4, rounding: 'up' })
  const to =
    window.high.kind === 'range-end' ? shortFigure(window.to) : readerNumber(window.to, { digits: 4, rounding: 'down' })
  return `${from} to ${withUnit(to, side)}`
}

function frequencyOf({ onset, summary }: Read): string {
  if (!onset) return 'none'
  const { figure, unit } = frequencyText(onset.omega, summary.timeUnit)
  return `${figure} ${unit}`
}

const signed = (value: number | null | undefined) =>
  value === null || value === undefined ? 'none' : `${value > 0 ? '+' : ''}${readerNumber(value, { digits: 3 })}`

/** The figures a verdict rests on, of both cards, whether they differ or not. Limits are rounded to the safe side. */
export function verdictRows(before: Judged, after: Judged): VerdictRow[] {
  const [was, now] = [read(before), read(after)]
  const row = (what: string, text: (side: Read) => string): VerdictRow => ({ what, was: text(was), now: text(now) })
  return [
    row('Kind of onset', ({ summary }) => kindWord[summary.kind]),
    row('Stability ends at', limitOf),
    row('Frequency there', frequencyOf),
    row('Steady from', steadyOf),
    row('Cubic coefficient', ({ onset }) => signed(onset?.cubic)),
    row('Crossing rate', ({ onset }) => signed(onset?.crossing)),
    row('Running at', (side) => withUnit(exactFigure(side.summary.control.value), side)),
  ]
}

/** "Onset stays at 58.00 m/s. What changes is what happens there." Null where neither has an onset. */
export function consequenceNote(before: Judged, after: Judged): string | null {
  const [was, now] = [read(before), read(after)]
  if (!was.onset && !now.onset) return null
  const [from, to] = [limitOf(was), limitOf(now)]
  if (!was.onset) return `An onset appears at ${to}.`
  if (!now.onset) return `The onset at ${from} is gone.`
  const turned = was.summary.kind !== now.summary.kind
  if (from === to) return `Onset stays at ${to}.${turned ? ' What changes is what happens there.' : ''}`
  return `Onset moves from ${from} to ${to}.`
}

/**
 * Both sides of a difference with as many digits as tell them apart, four at least: two numbers that differ never read
 * alike.
 */
export function differenceTexts({ was, now, unit, rounding }: CardDifference): [string, string] {
  const text = (value: CardDifference['was'], digits: number) => {
    if (value === null) return 'not there'
    if (typeof value === 'string') return value
    const figure =
      Number.isInteger(value) && Math.abs(value) < 1000 ? String(value) : readerNumber(value, { digits, rounding })
    return unit && unit !== '1' ? `${figure} ${unit}` : figure
  }
  for (let digits = 4; digits < 15; digits++) {
    const pair: [string, string] = [text(was, digits), text(now, digits)]
    if (pair[0] !== pair[1]) return pair
  }
  return [text(was, 15), text(now, 15)]
}
