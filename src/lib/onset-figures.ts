import type { CardSummary } from '#shared/api/pages.ts'
import { formatNumber } from '#shared/stability/numbers.ts'

type Onset = CardSummary['onsets'][number]

const warranted = 4

/** Where stability is lost, rounded to the safe side: down where the danger is above, up where it is below. */
export function onsetText(onset: Pick<Onset, 'p' | 'direction'>): string {
  return formatNumber(onset.p, { digits: warranted, rounding: onset.direction > 0 ? 'down' : 'up' })
}

// As in shared/stability/numbers.ts; any other time of a model has no hertz.
const secondsIn = new Map([
  ['ms', 1e-3],
  ['s', 1],
  ['min', 60],
  ['h', 3600],
  ['d', 86_400],
])

/** Frequency at an onset in the unit that keeps its figures short: kHz, Hz, mHz, or per day; else per the model's own time. */
export function frequencyText(omega: number, timeUnit: string): { figure: string; unit: string } {
  const cycles = omega / (2 * Math.PI)
  const figures = (value: number) => formatNumber(value, { digits: 3 })
  const seconds = secondsIn.get(timeUnit)
  if (seconds === undefined) return { figure: figures(cycles), unit: `per ${timeUnit === '' ? 'time unit' : timeUnit}` }
  const hertz = cycles / seconds
  if (hertz >= 1000) return { figure: figures(hertz / 1000), unit: 'kHz' }
  if (hertz >= 0.1) return { figure: figures(hertz), unit: 'Hz' }
  if (hertz >= 1e-4) return { figure: figures(hertz * 1000), unit: 'mHz' }
  return { figure: figures(hertz * 86_400), unit: 'per day' }
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
  return { text: formatNumber(nearest.p, { digits: warranted, rounding }), word }
}

/** True where the running point stands on ground. */
export function standsOnGround(card: CardSummary): boolean {
  return card.ground.some((stretch) => card.control.value >= stretch.from && card.control.value <= stretch.to)
}
