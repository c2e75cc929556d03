import * as Y from 'yjs'
import { sameSymbol } from '#shared/stability/summary.ts'
import {
  orderBetween,
  type ParameterCell,
  parameterCells,
  parameterRows,
  parametersOf,
  type SettingKey,
  type StateCell,
  settingsOf,
  stateCells,
  stateRows,
  statesOf,
} from '#shared/ydoc/shape.ts'

/** Changes of the co-edited tables. Each is one transaction, so that undo (draft-history.ts) and the others see one step. */

/** Origin of these transactions. */
export const tableOrigin = 'table'

const newId = () =>
  Array.from(crypto.getRandomValues(new Uint8Array(8)), (byte) => byte.toString(16).padStart(2, '0')).join('')

export function setParameterCell(doc: Y.Doc, id: string, cell: ParameterCell, value: string): void {
  setCell(doc, parametersOf(doc).get(id), cell, value)
}

export function setStateCell(doc: Y.Doc, id: string, cell: StateCell, value: string): void {
  setCell(doc, statesOf(doc).get(id), cell, value)
}

function setCell(doc: Y.Doc, row: Y.Map<string> | undefined, cell: string, value: string): void {
  // A row that somebody else removed meanwhile stays removed.
  if (!row || row.get(cell) === value) return
  doc.transact(() => row.set(cell, value), tableOrigin)
}

export function addParameter(doc: Y.Doc, cells: Partial<Record<ParameterCell, string>> = {}): string {
  return addRow(doc, parametersOf(doc), parameterRows(doc).at(-1)?.order, parameterCells, cells)
}

export function addState(doc: Y.Doc, cells: Partial<Record<StateCell, string>> = {}): string {
  return addRow(doc, statesOf(doc), stateRows(doc).at(-1)?.order, stateCells, cells)
}

function addRow(
  doc: Y.Doc,
  table: Y.Map<Y.Map<string>>,
  last: string | undefined,
  names: readonly string[],
  cells: Record<string, string | undefined>,
): string {
  const id = newId()
  doc.transact(() => {
    const row = new Y.Map<string>()
    row.set('order', orderBetween(last, undefined))
    for (const name of names) row.set(name, cells[name] ?? '')
    table.set(id, row)
  }, tableOrigin)
  return id
}

export function removeParameter(doc: Y.Doc, id: string): void {
  doc.transact(() => parametersOf(doc).delete(id), tableOrigin)
}

export function removeState(doc: Y.Doc, id: string): void {
  doc.transact(() => statesOf(doc).delete(id), tableOrigin)
}

export function setSetting(doc: Y.Doc, key: SettingKey, value: string): void {
  const settings = settingsOf(doc)
  if (settings.get(key) === value) return
  doc.transact(() => settings.set(key, value), tableOrigin)
}

/** Writes the control parameter's own value as it was shown, digit by digit: "Set as the page's value". */
export function setControlValue(doc: Y.Doc, value: number): boolean {
  const control = settingsOf(doc).get('control')
  if (!control || !Number.isFinite(value)) return false
  const row = parameterRows(doc).find(({ symbol }) => sameSymbol(symbol, control))
  if (!row) return false
  setParameterCell(doc, row.id, 'value', String(value))
  return true
}
