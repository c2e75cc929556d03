/**
 * The co-edited draft as plain strings (shared/ydoc/shape.ts reads it from the Y.Doc): cells are what people typed, a
 * half-typed "1e" included. `settings` holds title, summary, field, timeUnit, control, secondControl, observed,
 * quietWord, leftOut (one item a line) and notes. `uncertainty` is "", "normal 0.02" or "uniform 0.5 2".
 */
export interface DraftContent {
  equations: string
  parameters: {
    id: string
    symbol: string
    value: string
    low: string
    high: string
    unit: string
    meaning: string
    uncertainty: string
  }[]
  states: { id: string; symbol: string; low: string; high: string; start: string; unit: string; meaning: string }[]
  settings: Record<string, string>
}
