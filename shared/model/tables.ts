import type { ModelError } from './errors.ts'
import { foldSymbol, printedLook, quoted, symbolFault } from './symbols.ts'

/**
 * The tables of a model as they were found, whether in a document or in cells that people are typing in: rows keep the
 * path they came from, and a cell that could not be read is marked so that it is not told twice.
 */

/** A number, null where the cell is absent, or `faulty` where it was reported already. */
export type Cell = number | null | 'faulty'

/** `path` is where the row came from ("parameters[2]"); `symbol` is null where it was reported already. */
export interface TableRow {
  path: string
  symbol: string | null
  unit: string | null
  low: Cell
  high: Cell
}
export interface ParameterRow extends TableRow {
  value: Cell
}
export interface StateRow extends TableRow {
  start: Cell
}

/** Everything the block is checked against. null: absent, or not readable and reported already. */
export interface ModelTables {
  equations: string | null
  parameters: ParameterRow[] | null
  states: StateRow[] | null
  control: string | null
  secondControl: string | null
  observed: string | null
  timeUnit: string | null
}

/** Most states, and most parameters. */
export const mostStates = 30
export const mostParameters = 200

/** The fault of a table with more rows than a model may have, null where it has not. */
export function rowsFault(rows: number, path: 'parameters' | 'states'): ModelError | null {
  const most = path === 'states' ? mostStates : mostParameters
  if (rows <= most) return null
  return { code: 'too-large', message: `A model may have ${most} ${path}; this one has ${rows}.`, path }
}

/**
 * Symbols of both tables: key to row. A row whose symbol is refused is in neither; what was typed there is in `refused`, so
 * that uses of it are not told as well.
 */
export interface TableSymbols {
  parameters: Map<string, ParameterRow>
  states: Map<string, StateRow>
  refused: Set<string>
}

/** Checks the symbols of both tables and gives them by key. */
export function readSymbols(tables: ModelTables, errors: ModelError[]): TableSymbols {
  const found: TableSymbols = { parameters: new Map(), states: new Map(), refused: new Set() }
  const looks = new Map<string, { key: string; symbol: string; path: string }>()
  const declare = <Row extends TableRow>(rows: readonly Row[], into: Map<string, Row>) => {
    for (const row of rows) {
      if (row.symbol === null) continue
      const path = `${row.path}.symbol`
      const fault = symbolFault(row.symbol)
      const key = foldSymbol(row.symbol)
      if (fault || key === null) {
        found.refused.add(row.symbol)
        errors.push({ code: fault?.code ?? 'syntax', message: fault?.message ?? 'This is not a symbol.', path })
        continue
      }
      const look = printedLook(row.symbol)
      const twin = looks.get(look) ?? looks.get(key)
      if (twin) {
        found.refused.add(row.symbol)
        const why =
          twin.key === key
            ? twin.symbol === row.symbol
              ? ''
              : ` It is the same symbol as ${quoted(twin.symbol)}.`
            : ` In print it cannot be told from ${quoted(twin.symbol)}.`
        errors.push({ code: 'duplicate-symbol', message: `${quoted(row.symbol)} is in the tables twice.${why}`, path })
        continue
      }
      looks.set(look, { key, symbol: row.symbol, path })
      looks.set(key, { key, symbol: row.symbol, path })
      into.set(key, row)
    }
  }
  declare(tables.parameters ?? [], found.parameters)
  declare(tables.states ?? [], found.states)
  return found
}

/** Checks low and high of one row. `strict`: low has to lie below high; else equal means fixed. */
export function checkRange(row: TableRow, strict: boolean, errors: ModelError[]): void {
  const { low, high } = row
  if (typeof low !== 'number' || typeof high !== 'number') return
  const name = row.symbol === null ? '' : ` of ${quoted(row.symbol)}`
  const fault = (message: string) => errors.push({ code: 'bad-range', message, path: `${row.path}.low` })
  if (low > high) fault(`The low end${name} (${low}) lies above the high end (${high}).`)
  else if (strict && low === high) fault(`The low and the high end${name} are both ${low}: the range is empty.`)
  else if (!Number.isFinite(high - low)) fault(`The range${name} is too wide to compute with.`)
}
