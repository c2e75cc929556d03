import type { CardWarning } from './card-document.ts'
import { type ParsedBlock, type ParsedStatement, parseBlock } from './equations.ts'
import type { ModelError } from './errors.ts'
import type { Definition, ModelSystem } from './expression.ts'
import { orderHelpers } from './helper-order.ts'
import { foldSymbol, quoted } from './symbols.ts'
import { checkRange, type ModelTables, readSymbols, rowsFault, type TableSymbols } from './tables.ts'
import { checkUnits } from './units.ts'

/** Outcome of `assemble`: the system where nothing is wrong, every fault otherwise; the block either way. */
export interface Assembled {
  system: ModelSystem | null
  errors: ModelError[]
  warnings: CardWarning[]
  block: ParsedBlock | null
}

const fieldName = { control: 'control parameter', secondControl: 'second control parameter' } as const

/**
 * Checks tables and block against each other and builds the system. Every fault is collected; what was reported before
 * (a null or a faulty cell in `tables`) is not told again, but then there is no system either.
 */
export function assemble(tables: ModelTables): Assembled {
  const errors: ModelError[] = []
  const { parameters, states } = tables
  const large = [rowsFault(states?.length ?? 0, 'states'), rowsFault(parameters?.length ?? 0, 'parameters')].filter(
    (fault) => fault !== null,
  )
  if (large.length > 0) return { system: null, errors: large, warnings: [], block: null }

  const symbols = readSymbols(tables, errors)
  if (states?.length === 0)
    errors.push({ code: 'empty-model', message: 'A model needs at least one state.', path: 'states' })
  for (const row of states ?? []) checkRange(row, true, errors)
  const control = controlOf('control', tables, symbols, errors)
  const second = controlOf('secondControl', tables, symbols, errors)
  if (control !== null && control === second) {
    errors.push({
      code: 'bad-control',
      message: 'The second control parameter has to be another one than the first.',
      path: 'secondControl',
    })
  }
  for (const row of parameters ?? []) {
    const key = row.symbol === null ? null : foldSymbol(row.symbol)
    checkRange(row, key !== null && (key === control || key === second), errors)
  }

  const block =
    tables.equations === null ? null : parseBlock(tables.equations, parameters && states ? spelled(symbols) : null)
  for (const error of block?.errors ?? []) errors.push(error)
  const order = orderHelpers(block?.statements.filter((statement) => statement.kind === 'helper') ?? [])
  if (block && block.lines.length > 0 && !block.errors.some((error) => error.code === 'empty-model')) {
    missingEquations(symbols, block, errors)
    for (const loop of order.loops) errors.push(loopError(loop, block))
  }
  const observed = observedOf(tables, symbols, block, order.ordered, errors)

  const complete = parameters && states && block && control !== null && observed && errors.length === 0
  const system = complete ? systemOf(tables, symbols, block, order.ordered, { control, second, observed }) : null
  const warnings = system
    ? [...outsideRange(symbols), ...checkUnits(tables, symbols, block?.statements ?? [], order.ordered)]
    : []
  return { system, errors, warnings, block }
}

const spelled = (symbols: TableSymbols) => ({
  parameters: new Map([...symbols.parameters].map(([key, row]) => [key, row.symbol ?? key])),
  states: new Map([...symbols.states].map(([key, row]) => [key, row.symbol ?? key])),
  refused: new Set([...symbols.refused].map((typed) => foldSymbol(typed) ?? typed)),
})

function controlOf(
  field: 'control' | 'secondControl',
  tables: ModelTables,
  symbols: TableSymbols,
  errors: ModelError[],
): string | null {
  const typed = tables[field]
  if (typed === null || tables.parameters === null) return null
  const key = foldSymbol(typed)
  const row = key === null ? undefined : symbols.parameters.get(key)
  if (!row && symbols.refused.has(typed)) return null
  if (key === null || !row) {
    const state = key !== null && symbols.states.has(key) ? ' It is a state.' : ''
    errors.push({
      code: 'bad-control',
      message: `The ${fieldName[field]} ${quoted(typed)} is not among the parameters.${state}`,
      path: field,
    })
    return null
  }
  const lacking = [row.low === null ? 'low' : '', row.high === null ? 'high' : ''].filter((end) => end !== '')
  const [firstLacking] = lacking
  if (firstLacking !== undefined) {
    const message = `The ${fieldName[field]} ${quoted(typed)} needs a range to be swept: give its ${lacking.join(' and its ')} end.`
    errors.push({ code: 'bad-range', message, path: `${row.path}.${firstLacking}` })
  }
  return key
}

function missingEquations(symbols: TableSymbols, block: ParsedBlock, errors: ModelError[]): void {
  for (const [key, row] of symbols.states) {
    if (block.started.has(key)) continue
    const name = quoted(row.symbol ?? key)
    errors.push({
      code: 'missing-equation',
      message: `The state ${name} has no equation. Write a line d${name}/dt = ...`,
      path: `${row.path}.symbol`,
    })
  }
}

function loopError(loop: readonly string[], block: ParsedBlock): ModelError {
  const names = loop.map((key) => quoted(block.helpers.get(key) ?? key))
  const shown = names.length > 9 ? [...names.slice(0, 7), '…', ...names.slice(-1)] : names
  const first = block.statements.find((statement) => statement.kind === 'helper' && statement.key === loop[0])
  const message =
    names.length === 2
      ? `${names[0]} is defined by itself.`
      : `These helper quantities are defined by each other: ${shown.join(' → ')}.`
  return { code: 'helper-cycle', message, ...(first ? first.left : {}) }
}

type Observed = { kind: 'state' | 'helper'; key: string; symbol: string }

function observedOf(
  tables: ModelTables,
  symbols: TableSymbols,
  block: ParsedBlock | null,
  ordered: readonly ParsedStatement[],
  errors: ModelError[],
): Observed | null {
  const typed = tables.observed
  if (typed === null || tables.states === null) return null
  const key = foldSymbol(typed)
  const state = key === null ? undefined : symbols.states.get(key)
  if (key !== null && state) return { kind: 'state', key, symbol: state.symbol ?? key }
  const helper = key === null ? undefined : ordered.find((statement) => statement.key === key)
  if (key !== null && helper) return { kind: 'helper', key, symbol: helper.symbol }
  // A helper whose line cannot be read was told there.
  if (
    block === null ||
    block.lines.length === 0 ||
    symbols.refused.has(typed) ||
    (key !== null && block.helpers.has(key))
  )
    return null
  const parameter = key !== null && symbols.parameters.has(key) ? ' It is a parameter.' : ''
  errors.push({
    code: 'bad-observed',
    message: `The observed quantity ${quoted(typed)} is neither a state nor a helper quantity.${parameter}`,
    path: 'observed',
  })
  return null
}

const numberOr = <Other>(cell: unknown, other: Other): number | Other => (typeof cell === 'number' ? cell : other)
const definition = ({ key, expression, line }: Definition): Definition => ({ key, expression, line })

function systemOf(
  tables: ModelTables,
  symbols: TableSymbols,
  block: ParsedBlock,
  ordered: readonly ParsedStatement[],
  chosen: { control: string; second: string | null; observed: Observed },
): ModelSystem | null {
  const parameterKeys = [...symbols.parameters.keys()]
  const stateKeys = [...symbols.states.keys()]
  const byState = new Map(block.statements.filter((one) => one.kind === 'equation').map((one) => [one.key, one]))
  const rows = [...(tables.parameters ?? []), ...(tables.states ?? [])]
  if (rows.some((row) => row.low === 'faulty' || row.high === 'faulty')) return null
  if ([...symbols.parameters.values()].some((row) => typeof row.value !== 'number')) return null

  const equations: Definition[] = []
  for (const key of stateKeys) {
    const found = byState.get(key)
    if (!found) return null
    equations.push(definition(found))
  }
  const { observed } = chosen
  return {
    parameters: [...symbols.parameters].map(([key, row]) => ({
      key,
      symbol: row.symbol ?? key,
      value: numberOr(row.value, 0),
      low: numberOr(row.low, null),
      high: numberOr(row.high, null),
    })),
    states: [...symbols.states].map(([key, row]) => {
      const low = numberOr(row.low, 0)
      const high = numberOr(row.high, 0)
      return { key, symbol: row.symbol ?? key, low, high, start: numberOr(row.start, low + (high - low) / 2) }
    }),
    helpers: ordered.map(definition),
    equations,
    control: parameterKeys.indexOf(chosen.control),
    secondControl: chosen.second === null ? null : parameterKeys.indexOf(chosen.second),
    observed: {
      kind: observed.kind,
      index:
        observed.kind === 'state'
          ? stateKeys.indexOf(observed.key)
          : ordered.findIndex((one) => one.key === observed.key),
      symbol: observed.symbol,
    },
    timeUnit: tables.timeUnit,
  }
}

function outsideRange(symbols: TableSymbols): CardWarning[] {
  const warnings: CardWarning[] = []
  for (const [key, row] of symbols.parameters) {
    const { value, low, high } = row
    if (typeof value !== 'number') continue
    const below = typeof low === 'number' && value < low
    const above = typeof high === 'number' && value > high
    if (!below && !above) continue
    const message = `The value of ${quoted(row.symbol ?? key)} (${value}) lies ${below ? `below its low end (${low})` : `above its high end (${high})`}.`
    warnings.push({ code: 'value-outside-range', message, path: `${row.path}.value` })
  }
  return warnings
}
