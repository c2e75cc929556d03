import type { CardSummary } from '#shared/api/pages.ts'
import { formatFrequency, formatNumber } from '#shared/stability/numbers.ts'

type Onset = CardSummary['onsets'][number]

const warranted = 4

/** Where stability is lost, rounded to the safe side: down where the danger is above, up where it is below. */
export function onsetText(onset: Pick<Onset, 'p' | 'direction'>): string {
  return formatNumber(onset.p, { digits: warranted, rounding: onset.direction > 0 ? 'down' : 'up' })
}

/** Frequency at an onset, in mHz below 0.1 Hz; per the model's own time where that is no unit of time. */
export function frequencyText(omega: number, timeUnit: string): { figure: string; unit: string } {
  const text = formatFrequency(omega, timeUnit === '' ? null : timeUnit, { digits: 3 })
  const [figure = '', ...unit] = text.split(' ')
  const hertz = text.endsWith(' Hz') ? Number(figure.replace('\u2212', '-')) : Number.NaN
  if (hertz > 0 && hertz < 0.1) return { figure: formatNumber(hertz * 1000, { digits: 3 }), unit: 'mHz' }
  if (hertz >= 1000) return { figure: formatNumber(hertz / 1000, { digits: 3 }), unit: 'kHz' }
  return { figure, unit: unit.join(' ') }
}

/** A unit as it stands after a figure; nothing for a pure number. */
export const unitText = (unit: string): string => (unit === '1' ? '' : unit)

/** Where a limit without an onset ends the steady running nearest to the running point; null where there is none. */
export function otherLimit(card: CardSummary): { text: string; word: string } | null {
  const { value } = card.control
  const [nearest] = card.otherEnds.toSorted((a, b) => Math.abs(a.p - value) - Math.abs(b.p - value))
  if (!nearest) return null
  const rounding = nearest.p > value ? 'down' : 'up'
  const word = { fold: 'turning point', 'branch-point': 'branch point', 'box-left': 'leaves its box' }[nearest.kind]
  return { text: formatNumber(nearest.p, { digits: warranted, rounding }), word }
}

/** True where the running point stands on ground. */
export function standsOnGround(card: CardSummary): boolean {
  return card.ground.some((stretch) => card.control.value >= stretch.from && card.control.value <= stretch.to)
}
