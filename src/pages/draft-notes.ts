import type { ModelError } from '#shared/model/errors.ts'
import type { LineMessage } from '#src/features/editor/line-messages.ts'
import { shortFigure } from '#src/lib/figures.ts'
import type { CardState } from '#src/workers/card-runner.ts'
import type { Earlier } from './use-in-force.ts'

/** Faults that belong to a cell or a setting, by their path in the model document. */
export function faultsByPath(errors: readonly ModelError[]): Map<string, string> {
  const faults = new Map<string, string>()
  for (const error of errors) {
    if (error.path !== undefined && error.line === undefined && !faults.has(error.path))
      faults.set(error.path, error.message)
  }
  return faults
}

/** Faults and warnings that speak of a line, under that line. */
export function messagesOf(live: CardState): LineMessage[] {
  const faults = (live.checked?.errors ?? []).flatMap((error): LineMessage[] =>
    error.line === undefined
      ? []
      : [
          {
            line: error.line,
            column: error.column,
            length: error.length,
            message: error.message,
            severity: 'fault',
            cures: error.cures ?? [],
          },
        ],
  )
  const fromCard =
    live.card && live.card.id === live.checked?.id ? live.card.card.warnings : (live.checked?.warnings ?? [])
  const warnings = fromCard.flatMap((warning): LineMessage[] =>
    warning.line === undefined
      ? []
      : [{ line: warning.line, message: warning.message, severity: 'warning', cures: [] }],
  )
  return [...faults, ...warnings]
}

/** At the right margin: values of the helpers, numbers of the equations. */
export function valuesOf(live: CardState) {
  const helpers =
    live.card && live.card.id === live.checked?.id
      ? live.card.helperValues.map(({ line, value }) => ({ line, text: shortFigure(value) }))
      : []
  const equations = (live.checked?.lines ?? [])
    .filter((entry) => entry.kind === 'equation')
    .map((entry, index) => ({ line: entry.line, text: `(${index + 1})` }))
  return [...helpers, ...equations]
}

/** Parameters whose row differs from the revision in force. */
export function changedSymbols(
  rows: readonly { symbol: string; value: string; low: string; high: string; unit: string }[],
  earlier: Earlier | null,
) {
  if (!earlier) return null
  const old = new Map(earlier.document.parameters.map((row) => [row.symbol, row]))
  const text = (value: number | undefined) => (value === undefined ? '' : String(value))
  const symbols = new Set(
    rows
      .filter((row) => {
        const before = old.get(row.symbol)
        if (!before) return row.symbol !== ''
        const number = (cell: string) =>
          cell.trim() === '' ? '' : String(Number(cell.replace('\u2212', '-').replace(',', '.')))
        return (
          number(row.value) !== text(before.value) ||
          number(row.low) !== text(before.low) ||
          number(row.high) !== text(before.high) ||
          row.unit !== (before.unit ?? '')
        )
      })
      .map((row) => row.symbol),
  )
  return { symbols, mark: earlier.mark }
}
