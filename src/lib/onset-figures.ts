import type { CardSummary } from '#shared/api/pages.ts'
import { cyclesOf } from '#shared/stability/numbers.ts'
import { readerNumber } from './figures.ts'

type Onset = CardSummary['onsets'][number]

const warranted = 4

/** Where stability is lost, rounded to the safe side: down where the danger is above, up where it is below. */
export function onsetText(onset: Pick<Onset, 'p' | 'direction'>): string {
  return readerNumber(onset.p, { digits: warranted, rounding: onset.direction > 0 ? 'down' : 'up' })
}

/** Frequency at an onset in the unit that keeps its figures short: kHz, Hz, mHz, or per day; else per the model's own time. */
export function frequencyText(omega: number, timeUnit: string): { figure: string; unit: string } {
  const figures = (value: number) => readerNumber(value, { digits: 3 })
  const { value, hertz } = cyclesOf(omega, timeUnit)
  if (!hertz) return { figure: figures(value), unit: `per ${timeUnit === '' ? 'time unit' : timeUnit}` }
  if (value >= 1000) return { figure: figures(value / 1000), unit: 'kHz' }
  if (value >= 0.1) return { figure: figures(value), unit: 'Hz' }
  if (value >= 1e-4) return { figure: figures(value * 1000), unit: 'mHz' }
  return { figure: figures(value * 86_400), unit: 'per day' }
}

/** A unit as it stands after a figure; nothing for a pure number. */
export const unitText = (unit: string): string => (unit === '1' ? '' : unit)

/** Where a limit without an onset ends the steady running nearest to the running point; null where there is none. */
export function otherLimit(card: CardSummary): { text: string; word: string } | null {
  const { value } = card.control
  const [nearest] = card.otherEnds.toSorted((a, b) => Math.abs(a.p - value) - Math.abs(b.p - value))
  if (!nearest) return null
  const rounding = nearest.p > value ? 'down' : 'up'
  const word = { fold: 'turning point', 'branch-point': 'branch point', 'box-left': 'search ends' }[nearest.kind]
  return { text: readerNumber(nearest.p, { digits: warranted, rounding }), word }
}

/** True where the running point stands on ground. */
export function standsOnGround(card: CardSummary): boolean {
  return card.ground.some((stretch) => card.control.value >= stretch.from && card.control.value <= stretch.to)
}
