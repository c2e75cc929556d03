import * as Y from 'yjs'
import type { DraftContent } from '../model/draft.ts'

/**
 * The co-edited document of a page. Roots: `equations` (Y.Text), `parameters` and `states` (Y.Map by row id → Y.Map
 * whose cells are strings, so that a half-typed "1e" survives, and `order`, a string that sorts by code unit),
 * `settings` (Y.Map of strings, with `shape`: "1"). Never a Y.Array of rows: two people adding a row must both keep theirs.
 */
export const shapeVersion = '1'
export const rootNames = ['equations', 'parameters', 'states', 'settings'] as const

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

function rowsOf<Cell extends string>(table: Y.Map<Y.Map<string>>, cells: readonly Cell[]): TableRow<Cell>[] {
  const rows: TableRow<Cell>[] = []
  for (const [id, row] of table) {
    if (!(row instanceof Y.Map)) continue
    const read = (cell: string) => {
      const value: unknown = row.get(cell)
      return typeof value === 'string' ? value : ''
    }
    const entries = cells.map((cell) => [cell, read(cell)] as const)
    rows.push({ id, order: read('order'), ...Object.fromEntries(entries) } as TableRow<Cell>)
  }
  return rows.sort((a, b) => (a.order < b.order ? -1 : a.order > b.order ? 1 : a.id < b.id ? -1 : 1))
}

/** Rows of the parameter table in their order. */
export const parameterRows = (doc: Y.Doc): TableRow<ParameterCell>[] => rowsOf(parametersOf(doc), parameterCells)
/** Rows of the state table in their order. */
export const stateRows = (doc: Y.Doc): TableRow<StateCell>[] => rowsOf(statesOf(doc), stateCells)

/** A string that sorts between two others (either may be absent). Digits of base 36 after a common prefix; never ends in "0". */
export function orderBetween(before: string | undefined, after: string | undefined): string {
  const digits = '0123456789abcdefghijklmnopqrstuvwxyz'
  const low = before ?? ''
  let result = ''
  for (let i = 0; ; i++) {
    const a = i < low.length ? digits.indexOf(low.charAt(i)) : 0
    const bounded = after?.startsWith(result) === true
    const b = bounded && i < after.length ? digits.indexOf(after.charAt(i)) : bounded ? 0 : 36
    if (b - a > 1) return result + digits.charAt(a + Math.floor((b - a) / 2))
    if (bounded && i >= after.length) return `${low}i`
    result += digits.charAt(a)
  }
}

/** The whole document as plain strings: what the checker (shared/model/draft.ts) and the server read. */
export function readDraft(doc: Y.Doc): DraftContent {
  const settings = settingsOf(doc)
  const setting = (key: SettingKey) => {
    const value: unknown = settings.get(key)
    return typeof value === 'string' ? value : ''
  }
  return {
    equations: equationsOf(doc).toString(),
    parameters: parameterRows(doc),
    states: stateRows(doc),
    settings: Object.fromEntries(settingKeys.map((key) => [key, setting(key)])),
  }
}

/** Fills an empty document. Done once, on the server, in the transaction that makes the page or a new generation. */
export function writeDraft(doc: Y.Doc, content: DraftContent): void {
  doc.transact(() => {
    equationsOf(doc).insert(0, content.equations)
    let order: string | undefined
    const fill = (table: Y.Map<Y.Map<string>>, rows: readonly { id: string }[], cells: readonly string[]) => {
      order = undefined
      for (const source of rows) {
        const values: Record<string, unknown> = { ...source }
        const row = new Y.Map<string>()
        order = orderBetween(order, undefined)
        row.set('order', order)
        for (const cell of cells) row.set(cell, typeof values[cell] === 'string' ? values[cell] : '')
        table.set(source.id, row)
      }
    }
    fill(parametersOf(doc), content.parameters, parameterCells)
    fill(statesOf(doc), content.states, stateCells)
    const settings = settingsOf(doc)
    settings.set('shape', shapeVersion)
    for (const key of settingKeys) settings.set(key, content.settings[key] ?? '')
  })
}
