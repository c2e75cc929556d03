import { assemble } from './assemble.ts'
import type { ModelDocument, Uncertainty } from './document.ts'
import type { ModelError } from './errors.ts'
import { guardValue } from './json-guard.ts'
import { readNumberCell } from './number-cell.ts'
import { sortErrors } from './sort-errors.ts'
import { quoted } from './symbols.ts'
import type { CheckedModel } from './system.ts'
import type { Cell, ModelTables } from './tables.ts'

/**
 * The model while people are typing it: tables whose cells are strings, so that a half-typed "1e" survives. A row whose
 * cells are all blank is not there yet. Paths of errors count the draft's own rows.
 */
export interface DraftParameter {
  id: string
  symbol: string
  value: string
  low: string
  high: string
  unit: string
  meaning: string
  /** "normal 0.02" (standard deviation) or "uniform 0.5 to 2"; blank where nothing is known. */
  uncertainty?: string
}
export interface DraftState {
  id: string
  symbol: string
  low: string
  high: string
  start: string
  unit: string
  meaning: string
}
/** `settings` holds title, summary, field, timeUnit, control, secondControl, observed, quietWord, leftOut (one a line), notes. */
export interface DraftContent {
  equations: string
  parameters: DraftParameter[]
  states: DraftState[]
  settings: Record<string, string>
}

interface ReadDraft {
  document: ModelDocument
  tables: ModelTables
  errors: ModelError[]
}

/** The document a draft spells, or every cell that cannot be read. What the words mean to each other is not judged. */
export function documentFromDraft(
  draft: DraftContent,
): { ok: true; document: ModelDocument } | { ok: false; errors: ModelError[] } {
  const { document, errors } = readDraft(draft)
  return errors.length > 0 ? { ok: false, errors: sortErrors(errors) } : { ok: true, document }
}

/** `checkModel` for a draft: cells, tables, equations and units judged together, all faults at once. Never throws. */
export function checkDraft(draft: DraftContent): CheckedModel {
  const { document, tables, errors } = readDraft(draft)
  const built = assemble(tables)
  if (errors.length === 0 && built.system && built.errors.length === 0) {
    return { ok: true, document, system: built.system, warnings: built.warnings }
  }
  return { ok: false, errors: sortErrors([...errors, ...built.errors]) }
}

/** The draft that spells a document: what a new draft begins from. Citations stay with the page, not in the draft. */
export function draftFromDocument(document: ModelDocument): DraftContent {
  const number = (value: number | undefined) => (value === undefined ? '' : String(value))
  return {
    equations: document.equations,
    parameters: document.parameters.map((row, i) => ({
      id: `p${i + 1}`,
      symbol: row.symbol,
      value: number(row.value),
      low: number(row.low),
      high: number(row.high),
      unit: row.unit ?? '',
      meaning: row.meaning ?? '',
      uncertainty: row.uncertainty ? uncertaintyText(row.uncertainty) : '',
    })),
    states: document.states.map((row, i) => ({
      id: `s${i + 1}`,
      symbol: row.symbol,
      low: number(row.low),
      high: number(row.high),
      start: number(row.start),
      unit: row.unit ?? '',
      meaning: row.meaning ?? '',
    })),
    settings: {
      title: document.title,
      summary: document.summary ?? '',
      field: document.field ?? '',
      timeUnit: document.timeUnit ?? '',
      control: document.control,
      secondControl: document.secondControl ?? '',
      observed: document.observed,
      quietWord: document.quietWord ?? '',
      leftOut: (document.leftOut ?? []).join('\n'),
      notes: document.notes ?? '',
    },
  }
}

/** An uncertainty as its cell spells it. */
export function uncertaintyText(uncertainty: Uncertainty): string {
  if (uncertainty.kind === 'normal') return `normal ${uncertainty.sd}`
  return `uniform ${uncertainty.low} to ${uncertainty.high}`
}

const blank = (row: object) =>
  Object.entries(row).every(
    ([cell, value]) => cell === 'id' || cell === 'order' || typeof value !== 'string' || value.trim() === '',
  )

function readDraft(draft: DraftContent): ReadDraft {
  const errors: ModelError[] = []
  const cell = (typed: string, path: string, missing: string | null): Cell => {
    if (typed.trim() === '') {
      if (missing === null) return null
      errors.push({ code: 'missing-field', message: missing, path })
      return 'faulty'
    }
    const read = readNumberCell(typed)
    if (read.ok) return read.value
    errors.push({ code: read.code, message: read.message, path })
    return 'faulty'
  }
  const named = (symbol: string) => (symbol.trim() === '' ? 'this row' : quoted(symbol.trim()))
  const text = (typed: string) => (typed.trim() === '' ? null : typed.trim())
  const present = <Row extends object>(rows: readonly Row[], name: string) =>
    rows.map((row, i) => ({ row, path: `${name}[${i}]` })).filter(({ row }) => !blank(row))

  const parameters = present(draft.parameters, 'parameters').map(({ row, path }) => ({
    path,
    symbol: row.symbol.trim(),
    unit: text(row.unit),
    meaning: text(row.meaning),
    value: cell(row.value, `${path}.value`, `Give the value of ${named(row.symbol)}.`),
    low: cell(row.low, `${path}.low`, null),
    high: cell(row.high, `${path}.high`, null),
    uncertainty: readUncertainty(row.uncertainty ?? '', `${path}.uncertainty`, errors),
  }))
  const states = present(draft.states, 'states').map(({ row, path }) => ({
    path,
    symbol: row.symbol.trim(),
    unit: text(row.unit),
    meaning: text(row.meaning),
    low: cell(row.low, `${path}.low`, `Give the low end of the range of ${named(row.symbol)}.`),
    high: cell(row.high, `${path}.high`, `Give the high end of the range of ${named(row.symbol)}.`),
    start: cell(row.start, `${path}.start`, null),
  }))

  const setting = (key: string) => text(Object.hasOwn(draft.settings, key) ? (draft.settings[key] ?? '') : '')
  const required = (key: string, missing: string) => {
    const found = setting(key)
    if (found === null) errors.push({ code: 'missing-field', message: missing, path: key })
    return found
  }
  const control = required('control', 'Choose the control parameter: the one that is swept.')
  const observed = required('observed', 'Choose the observed quantity: the state or helper the card speaks of.')
  const secondControl = setting('secondControl')
  const timeUnit = setting('timeUnit')

  const number = (found: Cell) => (typeof found === 'number' ? found : 0)
  const optional = <Name extends string, Value>(name: Name, value: Value | null | 'faulty') =>
    value === null || value === 'faulty' ? {} : ({ [name]: value } as { [key in Name]: Value })
  const leftOut = (setting('leftOut') ?? '')
    .split('\n')
    .map((line) => line.trim())
    .filter((line) => line !== '')
  const document: ModelDocument = {
    format: 'brinkbook-model',
    version: 1,
    title: setting('title') ?? '',
    ...optional('summary', setting('summary')),
    ...optional('field', setting('field')),
    ...optional('timeUnit', timeUnit),
    equations: draft.equations,
    parameters: parameters.map((row) => ({
      symbol: row.symbol,
      value: number(row.value),
      ...optional('low', row.low),
      ...optional('high', row.high),
      ...optional('unit', row.unit),
      ...optional('meaning', row.meaning),
      ...optional('uncertainty', row.uncertainty),
    })),
    states: states.map((row) => ({
      symbol: row.symbol,
      low: number(row.low),
      high: number(row.high),
      ...optional('start', row.start),
      ...optional('unit', row.unit),
      ...optional('meaning', row.meaning),
    })),
    control: control ?? '',
    ...optional('secondControl', secondControl),
    observed: observed ?? '',
    ...optional('notes', setting('notes')),
    ...optional('quietWord', setting('quietWord')),
    ...optional('leftOut', leftOut.length > 0 ? leftOut : null),
  }
  const tables: ModelTables = {
    equations: draft.equations,
    parameters,
    states,
    control,
    secondControl,
    observed,
    timeUnit,
  }
  // Half characters in a cell: nothing could store or fingerprint them.
  errors.push(...guardValue(document))
  return { document, tables, errors }
}

function readUncertainty(typed: string, path: string, errors: ModelError[]): Uncertainty | null {
  const text = typed.trim()
  if (text === '') return null
  const fault = (code: ModelError['code'], message: string) => {
    errors.push({ code, message, path })
    return null
  }
  const normal = /^normal (?:sd )?(\S+)$/i.exec(text.replace(/\s+/g, ' '))
  const uniform = /^uniform (\S+) to (\S+)$/i.exec(text.replace(/\s+/g, ' '))
  const numbers = [...(normal ?? uniform ?? [])].slice(1).map(readNumberCell)
  const [first, second] = numbers
  if (!first) return fault('wrong-type', 'Write the uncertainty as  normal 0.02  or  uniform 0.5 to 2.')
  if (!first.ok) return fault(first.code, first.message)
  if (normal)
    return first.value < 0
      ? fault('bad-range', 'A standard deviation may not be less than 0.')
      : { kind: 'normal', sd: first.value }
  if (!second?.ok) return fault(second?.code ?? 'wrong-type', second?.message ?? 'The high end is missing.')
  if (first.value > second.value)
    return fault('bad-range', `The low end (${first.value}) lies above the high end (${second.value}).`)
  return { kind: 'uniform', low: first.value, high: second.value }
}
