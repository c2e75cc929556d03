import * as Y from 'yjs'
import {
  equationsOf,
  orderAt,
  parameterCells,
  parameterRows,
  parametersOf,
  settingKeys,
  settingsOf,
  stateCells,
  stateRows,
  statesOf,
} from '#shared/ydoc/shape.ts'
import { pickFrom } from './random.ts'

const pieces = ['x', 'mu*', ' + y', '\n', 'dx/dt = ', 'μ', '😀', '# note', '1e', '-0.5', '(', ')']

/** One edit as a person would make it, anywhere in the draft; it always changes something. Text is kept between 0 and about 400 characters. */
export function editSomething(doc: Y.Doc, random: () => number): void {
  const dice = random()
  if (dice < 0.55) editText(doc, random)
  else if (dice < 0.75) setCell(doc, random)
  else if (dice < 0.85) addRow(doc, random)
  else if (dice < 0.9) removeRow(doc, random)
  else settingsOf(doc).set(pickFrom(random, settingKeys), pickFrom(random, pieces))
}

function editText(doc: Y.Doc, random: () => number): void {
  const text = equationsOf(doc)
  const at = Math.floor(random() * (text.length + 1))
  if (random() < (text.length > 300 ? 0.7 : 0.35) && text.length > at) {
    text.delete(at, Math.min(text.length - at, 1 + Math.floor(random() * 6)))
  } else text.insert(at, pickFrom(random, pieces))
}

interface Table {
  table(doc: Y.Doc): Y.Map<Y.Map<string>>
  rows(doc: Y.Doc): { id: string; order: string }[]
  cells: readonly string[]
}

const tables: readonly Table[] = [
  { table: parametersOf, rows: parameterRows, cells: parameterCells },
  { table: statesOf, rows: stateRows, cells: stateCells },
]

function setCell(doc: Y.Doc, random: () => number): void {
  const { table, rows, cells } = pickFrom(random, tables)
  const all = rows(doc)
  if (all.length === 0) editText(doc, random)
  else table(doc).get(pickFrom(random, all).id)?.set(pickFrom(random, cells), pickFrom(random, pieces))
}

function addRow(doc: Y.Doc, random: () => number): void {
  const { table, rows, cells } = pickFrom(random, tables)
  const all = rows(doc)
  if (all.length > 12) {
    editText(doc, random)
    return
  }
  doc.transact(() => {
    const row = new Y.Map<string>()
    row.set('order', orderAt(all, Math.floor(random() * (all.length + 1))))
    for (const cell of cells) row.set(cell, '')
    table(doc).set(`r${Math.floor(random() * 1e9).toString(36)}`, row)
  })
}

function removeRow(doc: Y.Doc, random: () => number): void {
  const { table, rows } = pickFrom(random, tables)
  const all = rows(doc)
  if (all.length === 0) editText(doc, random)
  else table(doc).delete(pickFrom(random, all).id)
}
