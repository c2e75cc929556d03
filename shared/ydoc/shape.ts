import * as Y from 'yjs'
import type { DraftContent } from '../model/draft.ts'

/**
 * The co-edited document of a page. Roots: `equations` (Y.Text), `parameters` and `states` (Y.Map by row id → Y.Map
 * whose cells are strings, so that a half-typed "1e" survives, and `order`, a string that sorts by code unit),
 * `settings` (Y.Map of strings, with `shape`: "1"). Never a Y.Array of rows: two people adding a row must both keep theirs.
 */
export const shapeVersion = '1'
export const rootNames = ['equations', 'parameters', 'states', 'settings'] as const

/** Cells of a row of either table, and the settings; each a string. */
export const parameterCells = ['symbol', 'value', 'low', 'high', 'unit', 'meaning', 'uncertainty'] as const
export const stateCells = ['symbol', 'low', 'high', 'start', 'unit', 'meaning'] as const
export const settingKeys = [
  'title',
  'summary',
  'field',
  'timeUnit',
  'control',
  'secondControl',
  'observed',
  'quietWord',
  'leftOut',
  'notes',
] as const
export type ParameterCell = (typeof parameterCells)[number]
export type StateCell = (typeof stateCells)[number]
export type SettingKey = (typeof settingKeys)[number]

/** The equation block. */
export const equationsOf = (doc: Y.Doc): Y.Text => doc.getText('equations')
/** The parameter table: row id → row. */
export const parametersOf = (doc: Y.Doc): Y.Map<Y.Map<string>> => doc.getMap('parameters')
/** The state table: row id → row. */
export const statesOf = (doc: Y.Doc): Y.Map<Y.Map<string>> => doc.getMap('states')
/** Title, summary, control, observed quantity and so on. */
export const settingsOf = (doc: Y.Doc): Y.Map<string> => doc.getMap('settings')

/** Gives every root its type. Yjs keeps a root that an update names first without one, and then it cannot be read. */
export function prepareRoots(doc: Y.Doc): void {
  equationsOf(doc)
  parametersOf(doc)
  statesOf(doc)
  settingsOf(doc)
}

/** A row of a table as it stands, with its id. */
export type TableRow<Cell extends string> = { id: string; order: string } & Record<Cell, string>

const asText = (value: unknown): string => (typeof value === 'string' ? value : '')
const compare = (a: string, b: string) => (a < b ? -1 : a > b ? 1 : 0)

/** Rows in their order; rows that two people put in one place at once stand by id. A cell that is no string reads as blank. */
function rowsOf<Cell extends string>(table: Y.Map<Y.Map<string>>, cells: readonly Cell[]): TableRow<Cell>[] {
  const rows: TableRow<Cell>[] = []
  for (const [id, row] of table) {
    if (!(row instanceof Y.Map)) continue
    const values = Object.fromEntries(cells.map((cell) => [cell, asText(row.get(cell))])) as Record<Cell, string>
    rows.push({ ...values, id, order: asText(row.get('order')) })
  }
  return rows.sort((a, b) => compare(a.order, b.order) || compare(a.id, b.id))
}

/** Rows of the parameter table in their order. */
export const parameterRows = (doc: Y.Doc): TableRow<ParameterCell>[] => rowsOf(parametersOf(doc), parameterCells)
/** Rows of the state table in their order. */
export const stateRows = (doc: Y.Doc): TableRow<StateCell>[] => rowsOf(statesOf(doc), stateCells)

const digits = '0123456789abcdefghijklmnopqrstuvwxyz'
const middle = digits.charAt(digits.length / 2)

/** What an `order` looks like: the digits of a fraction in base 36, without zeros at its end. */
export const orderPattern = /^[0-9a-z]*[1-9a-z]$/

/**
 * An order that sorts after `before` and before `after` (either may be absent). What is no order counts as absent, and
 * so does `after` where it does not sort after `before`: the result then only sorts after `before`.
 *
 * A row put at the end costs one more character only after many (36 in a row), one put between two again and again one
 * more for each five.
 */
export function orderBetween(before: string | undefined, after: string | undefined): string {
  const low = before !== undefined && orderPattern.test(before) ? before : ''
  const high = after !== undefined && orderPattern.test(after) && after > low ? after : undefined
  return high === undefined ? orderAfter(low) : orderWithin(low, high)
}

function orderAfter(low: string): string {
  for (let i = 0; i < low.length; i++) {
    const digit = digits.indexOf(low.charAt(i))
    if (digit < digits.length - 1) return low.slice(0, i) + digits.charAt(digit + 1)
  }
  return low + middle
}

/** low < high as fractions; the first digits they share are kept, then the digit half-way between the two. */
function orderWithin(low: string, high: string): string {
  let shared = ''
  for (let i = 0; ; i++) {
    const from = Math.max(0, digits.indexOf(low.charAt(i) || '0'))
    const to = digits.indexOf(high.charAt(i))
    if (from === to) {
      shared += digits.charAt(from)
      continue
    }
    if (to - from > 1) return shared + digits.charAt(from + Math.floor((to - from) / 2))
    // Neighbouring digits: the longer `high` without its tail lies between, else whatever follows `low`.
    if (high.length > i + 1) return shared + digits.charAt(to)
    return shared + digits.charAt(from) + orderAfter(low.slice(i + 1))
  }
}

/**
 * The order of a row that is to stand at `index` among rows in their order. Where the rows around share one order, the
 * new row stands after all that share it.
 */
export function orderAt(rows: readonly { order: string }[], index: number): string {
  const before = rows[index - 1]?.order
  const after = rows.slice(index).find((row) => before === undefined || row.order > before)?.order
  return orderBetween(before, after)
}

/** Orders of so many rows, evenly spread, so that there is room between any two. */
export function ordersFor(count: number): string[] {
  const width = Math.ceil(Math.log(count + 1) / Math.log(digits.length)) + 1
  const step = digits.length ** width / (count + 1)
  return Array.from({ length: count }, (_, i) =>
    Math.floor((i + 1) * step)
      .toString(digits.length)
      .padStart(width, '0')
      .replace(/0+$/, ''),
  )
}

/** The whole document as plain strings: what the checker (shared/model/draft.ts) and the server read. */
export function readDraft(doc: Y.Doc): DraftContent {
  const settings = settingsOf(doc)
  return {
    equations: equationsOf(doc).toString(),
    parameters: parameterRows(doc).map(({ order: _, ...row }) => row),
    states: stateRows(doc).map(({ order: _, ...row }) => row),
    settings: Object.fromEntries(settingKeys.map((key) => [key, asText(settings.get(key))])),
  }
}

/** Fills an empty document. Done once, on the server, in the transaction that makes the page or a new generation. */
export function writeDraft(doc: Y.Doc, content: DraftContent): void {
  doc.transact(() => {
    equationsOf(doc).insert(0, content.equations)
    fill(parametersOf(doc), content.parameters, parameterCells)
    fill(statesOf(doc), content.states, stateCells)
    const settings = settingsOf(doc)
    settings.set('shape', shapeVersion)
    for (const key of settingKeys) settings.set(key, content.settings[key] ?? '')
  })
}

function fill<Cell extends string>(
  table: Y.Map<Y.Map<string>>,
  rows: readonly ({ id: string } & Partial<Record<Cell, string>>)[],
  cells: readonly Cell[],
): void {
  const orders = ordersFor(rows.length)
  for (const [index, source] of rows.entries()) {
    const row = new Y.Map<string>()
    row.set('order', orders[index] ?? '')
    for (const cell of cells) row.set(cell, source[cell] ?? '')
    table.set(source.id, row)
  }
}
