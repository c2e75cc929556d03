import type { DocumentParameter, DocumentState, ModelDocument, Uncertainty } from './document.ts'
import type { DraftContent, DraftParameter, DraftState } from './draft.ts'
import type { ModelError } from './errors.ts'
import { guardValue } from './json-guard.ts'
import { readNumberCell } from './number-cell.ts'
import { quoted } from './symbols.ts'
import type { Cell, ModelTables, ParameterRow, StateRow } from './tables.ts'

/** A draft read cell by cell: the document it spells, with 0 where a cell cannot be read, and what to check it by. */
export interface ReadDraft {
  document: ModelDocument
  tables: ModelTables
  errors: ModelError[]
}

/** Reads every cell of a draft. Rows whose cells are all blank are passed over; paths count the draft's own rows. */
export function readDraft(draft: DraftContent): ReadDraft {
  const errors: ModelError[] = []
  const parameters = present(draft.parameters, 'parameters').map((one) => readParameter(one, errors))
  const states = present(draft.states, 'states').map((one) => readState(one, errors))
  const setting = (key: string) => textOf(Object.hasOwn(draft.settings, key) ? (draft.settings[key] ?? '') : '')
  const required = (key: string, missing: string) => {
    const found = setting(key)
    if (found === null) errors.push({ code: 'missing-field', message: missing, path: key })
    return found
  }
  const control = required('control', 'Choose the control parameter: the one that is swept.')
  const observed = required('observed', 'Choose the observed quantity: the state or helper the card speaks of.')
  const secondControl = setting('secondControl')
  const timeUnit = setting('timeUnit')
  const leftOut = (setting('leftOut') ?? '')
    .split('\n')
    .map((line) => line.trim())
    .filter((line) => line !== '')

  const document: ModelDocument = withoutAbsent({
    format: 'brinkbook-model',
    version: 1,
    title: setting('title') ?? '',
    summary: setting('summary') ?? undefined,
    field: setting('field') ?? undefined,
    timeUnit: timeUnit ?? undefined,
    equations: draft.equations,
    parameters: parameters.map(({ member }) => member),
    states: states.map(({ member }) => member),
    control: control ?? '',
    secondControl: secondControl ?? undefined,
    observed: observed ?? '',
    notes: setting('notes') ?? undefined,
    quietWord: setting('quietWord') ?? undefined,
    leftOut: leftOut.length > 0 ? leftOut : undefined,
  })
  const tables: ModelTables = {
    equations: draft.equations,
    parameters: parameters.map(({ row }) => row),
    states: states.map(({ row }) => row),
    control,
    secondControl,
    observed,
    timeUnit,
  }
  // Half characters in a cell: nothing could store or fingerprint them.
  for (const error of guardValue(document)) errors.push(error)
  return { document, tables, errors }
}

interface Present<Row> {
  cells: Row
  path: string
}

function present<Row extends object>(rows: readonly Row[], name: string): Present<Row>[] {
  const blank = (row: object) =>
    Object.entries(row).every(
      ([cell, value]) => cell === 'id' || cell === 'order' || typeof value !== 'string' || value.trim() === '',
    )
  return rows.map((cells, i) => ({ cells, path: `${name}[${i}]` })).filter(({ cells }) => !blank(cells))
}

function readParameter(
  { cells, path }: Present<DraftParameter>,
  errors: ModelError[],
): { row: ParameterRow; member: DocumentParameter } {
  const symbol = cells.symbol.trim()
  const value = readCell(cells.value, `${path}.value`, `Give the value of ${named(symbol)}.`, errors)
  const low = readCell(cells.low, `${path}.low`, null, errors)
  const high = readCell(cells.high, `${path}.high`, null, errors)
  const unit = textOf(cells.unit)
  const member: DocumentParameter = withoutAbsent({
    symbol,
    value: numberOf(value) ?? 0,
    low: numberOf(low),
    high: numberOf(high),
    unit: unit ?? undefined,
    meaning: textOf(cells.meaning) ?? undefined,
    uncertainty: readUncertainty(cells.uncertainty ?? '', `${path}.uncertainty`, errors) ?? undefined,
  })
  return { row: { path, symbol, unit, value, low, high }, member }
}

function readState(
  { cells, path }: Present<DraftState>,
  errors: ModelError[],
): { row: StateRow; member: DocumentState } {
  const symbol = cells.symbol.trim()
  const low = readCell(cells.low, `${path}.low`, `Give the low end of the range of ${named(symbol)}.`, errors)
  const high = readCell(cells.high, `${path}.high`, `Give the high end of the range of ${named(symbol)}.`, errors)
  const start = readCell(cells.start, `${path}.start`, null, errors)
  const unit = textOf(cells.unit)
  const member: DocumentState = withoutAbsent({
    symbol,
    low: numberOf(low) ?? 0,
    high: numberOf(high) ?? 0,
    start: numberOf(start),
    unit: unit ?? undefined,
    meaning: textOf(cells.meaning) ?? undefined,
  })
  return { row: { path, symbol, unit, low, high, start }, member }
}

const textOf = (typed: string) => (typed.trim() === '' ? null : typed.trim())
const named = (symbol: string) => (symbol === '' ? 'this row' : quoted(symbol))
const numberOf = (cell: Cell) => (typeof cell === 'number' ? cell : undefined)

// A member that is absent is not there at all, as in a document that was read from a file.
function withoutAbsent<Members extends object>(members: Members): Members {
  for (const [name, value] of Object.entries(members)) if (value === undefined) Reflect.deleteProperty(members, name)
  return members
}

function readCell(typed: string, path: string, missing: string | null, errors: ModelError[]): Cell {
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
