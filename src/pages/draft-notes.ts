import { uncertaintyText } from '#shared/model/draft.ts'
import type { ModelError } from '#shared/model/errors.ts'
import type { CardStage } from '#shared/stability/messages.ts'
import type { LineMessage } from '#src/features/editor/line-messages.ts'
import { shortFigure } from '#src/lib/figures.ts'
import type { CardState } from '#src/workers/card-runner.ts'
import type { Earlier } from './use-in-force.ts'

/** Faults that belong to a cell or a setting, by their path in the model document; several of one place one after another. */
export function faultsByPath(errors: readonly ModelError[]): Map<string, string> {
  const faults = new Map<string, string>()
  for (const { path, line, message } of errors) {
    if (path === undefined || line !== undefined) continue
    const before = faults.get(path)
    faults.set(path, before ? `${before} ${message}` : message)
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
  rows: readonly {
    symbol: string
    value: string
    low: string
    high: string
    unit: string
    meaning?: string
    uncertainty?: string
  }[],
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
          row.unit !== (before.unit ?? '') ||
          (row.meaning ?? '').trim() !== (before.meaning ?? '') ||
          (row.uncertainty ?? '').trim() !== (before.uncertainty ? uncertaintyText(before.uncertainty) : '')
        )
      })
      .map((row) => row.symbol),
  )
  return { symbols, mark: earlier.mark }
}

const stageWords: Partial<Record<CardStage, string>> = {
  'steady-states': 'Finding the steady states',
  branches: 'Following the branches',
  onsets: 'Looking for onsets',
  window: 'Finding the window',
  sensitivity: 'Computing sensitivities',
  map: 'Computing the map of two parameters',
}

/** How far the analysis is: "Following the branches, 40 %". */
export const progressWords = ({ stage, share }: NonNullable<CardState['progress']>): string =>
  `${stageWords[stage] ?? 'Computing'}, ${Math.round(100 * Math.min(1, Math.max(0, share)))} %`
