import { controlOf, type DescribedModel, sameSymbol } from '#shared/stability/summary.ts'

/** A quantity as the drawing names it. `unit` is empty where it is unknown or a pure number. */
export interface Quantity {
  symbol: string
  meaning: string
  unit: string
}

/** What the drawing needs to know of the model a card was computed from. */
export interface Subject {
  control: Quantity & { low: number; high: number; value: number }
  observed: Quantity
  /** Box of the observed quantity where it is a state; null for a helper, which has none. */
  box: { low: number; high: number } | null
  /** Every state with its box and unit, in document order. */
  states: { symbol: string; meaning: string; unit: string; low: number; high: number }[]
  timeUnit: string
}

const shown = (unit: string | undefined) => (unit === undefined || unit === '1' ? '' : unit)

/** @throws {RangeError} if the document was not checked (its control has no range). */
export function subjectOf(document: DescribedModel): Subject {
  const control = controlOf(document)
  const row = document.states.find((state) => sameSymbol(state.symbol, document.observed))
  return {
    control: { ...control, unit: shown(control.unit) },
    observed: { symbol: row?.symbol ?? document.observed, meaning: row?.meaning ?? '', unit: shown(row?.unit) },
    box: row ? { low: row.low, high: row.high } : null,
    states: document.states.map(({ symbol, meaning = '', unit, low, high }) => ({
      symbol,
      meaning,
      unit: shown(unit),
      low,
      high,
    })),
    timeUnit: document.timeUnit ?? '',
  }
}

/** "running speed", or "V" where the model gives the symbol no meaning. */
export const nameOf = (quantity: Quantity): string => quantity.meaning || quantity.symbol
