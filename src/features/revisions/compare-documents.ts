import type {
  CitationReference,
  DocumentParameter,
  DocumentState,
  ModelDocument,
  Uncertainty,
} from '#shared/model/document.ts'
import { foldSymbol } from '#shared/model/symbols.ts'
import { exactFigure } from '#src/lib/figures.ts'
import { type Citer, citerOf } from './compare-sources.ts'

/** One thing of a document that differs. A null side: it is not there. */
export interface Change {
  /** What it belongs to: a symbol, a source, or empty. */
  subject: string
  meaning: string
  /** Which part of it: "value", "uncertainty"; "all of it" where the whole is new or gone. */
  what: string
  was: string | null
  now: string | null
}

const whole = 'all of it'

const withUnit = (text: string, unit: string | undefined) => (unit && unit !== '1' && text ? `${text} ${unit}` : text)
const range = (low: number | undefined, high: number | undefined) =>
  low === undefined && high === undefined ? '' : `${exactFigure(low)} to ${exactFigure(high)}`

function uncertaintyText(uncertainty: Uncertainty | undefined): string {
  if (!uncertainty) return ''
  return uncertainty.kind === 'normal'
    ? `± ${exactFigure(uncertainty.sd)}, one standard deviation`
    : `anywhere from ${exactFigure(uncertainty.low)} to ${exactFigure(uncertainty.high)}`
}

type Parts = Record<string, string>

const sourcesText = (citations: readonly CitationReference[] | undefined, cite: Citer) =>
  (citations ?? []).map(cite).join('; ')

const parameterParts = (row: DocumentParameter, cite: Citer): Parts => ({
  symbol: row.symbol,
  value: withUnit(exactFigure(row.value), row.unit),
  range: range(row.low, row.high),
  uncertainty: uncertaintyText(row.uncertainty),
  meaning: row.meaning ?? '',
  sources: sourcesText(row.citations, cite),
})

const stateParts = (row: DocumentState, cite: Citer): Parts => ({
  symbol: row.symbol,
  'searched from': withUnit(range(row.low, row.high), row.unit),
  'starts at': exactFigure(row.start),
  meaning: row.meaning ?? '',
  sources: sourcesText(row.citations, cite),
})

const allOf = ({ symbol: _, meaning: __, ...parts }: Parts) =>
  Object.entries(parts)
    .filter(([, text]) => text !== '')
    .map(([name, text]) => (name === 'value' ? text : `${name} ${text}`))
    .join('; ')

function compareRows<Row extends { symbol: string; meaning?: string }>(
  before: readonly Row[],
  after: readonly Row[],
  partsBefore: (row: Row) => Parts,
  partsAfter: (row: Row) => Parts,
): Change[] {
  const keyOf = (row: Row) => foldSymbol(row.symbol) ?? row.symbol
  const old = new Map(before.map((row) => [keyOf(row), row]))
  const changes = after.flatMap((row): Change[] => {
    const earlier = old.get(keyOf(row))
    old.delete(keyOf(row))
    const named = { subject: row.symbol, meaning: row.meaning ?? '' }
    const now = partsAfter(row)
    if (!earlier) return [{ ...named, what: whole, was: null, now: allOf(now) }]
    const was = partsBefore(earlier)
    return Object.keys(now).flatMap((what) =>
      was[what] === now[what] ? [] : [{ ...named, what, was: was[what] || null, now: now[what] || null }],
    )
  })
  const gone = [...old.values()].map((row) => ({
    subject: row.symbol,
    meaning: row.meaning ?? '',
    what: whole,
    was: allOf(partsBefore(row)),
    now: null,
  }))
  return [...changes, ...gone]
}

type Before = ModelDocument | null

/** Rows that are new, gone or different in any part, in the order of the newer document, gone ones last. */
export function compareParameters(before: Before, after: ModelDocument): Change[] {
  const was = citerOf(before ?? after)
  const now = citerOf(after)
  return compareRows(
    before?.parameters ?? [],
    after.parameters,
    (row) => parameterParts(row, was),
    (row) => parameterParts(row, now),
  )
}

/** As compareParameters, for the states. */
export function compareStates(before: Before, after: ModelDocument): Change[] {
  const was = citerOf(before ?? after)
  const now = citerOf(after)
  return compareRows(
    before?.states ?? [],
    after.states,
    (row) => stateParts(row, was),
    (row) => stateParts(row, now),
  )
}

const settings = [
  ['title', 'Title'],
  ['summary', 'Summary'],
  ['field', 'Field'],
  ['timeUnit', 'Time unit'],
  ['control', 'Control parameter'],
  ['secondControl', 'Second control'],
  ['observed', 'Observed quantity'],
  ['quietWord', 'Words for steady running'],
  ['notes', 'Notes'],
] as const satisfies readonly (readonly [keyof ModelDocument, string])[]

/** What stands beside equations and tables. Of a first revision nothing is told: all of it is new. */
export function compareSettings(before: Before, after: ModelDocument): Change[] {
  if (!before) return []
  return settings.flatMap(([key, subject]) =>
    (before[key] ?? '') === (after[key] ?? '')
      ? []
      : [{ subject, meaning: '', what: '', was: before[key] || null, now: after[key] || null }],
  )
}

/** Neglected physics that was added to or taken off the list. */
export function compareLeftOut(before: Before, after: ModelDocument): Change[] {
  const [was, now] = [before?.leftOut ?? [], after.leftOut ?? []]
  const change = { subject: '', meaning: '', what: '' }
  return [
    ...now.filter((item) => !was.includes(item)).map((item) => ({ ...change, was: null, now: item })),
    ...was.filter((item) => !now.includes(item)).map((item) => ({ ...change, was: item, now: null })),
  ]
}
