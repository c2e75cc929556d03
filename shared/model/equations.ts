import type { ModelError } from './errors.ts'
import type { Definition, Expression } from './expression.ts'
import { checkRightSide } from './grammar.ts'
import { nameAdviser } from './nearest-names.ts'
import { parseTree } from './parse-tree.ts'
import { readStatements, type Statement } from './statements.ts'
import { isReserved, printedLook, quoted } from './symbols.ts'
import type { Place, Token, TokenLine } from './tokens.ts'
import { utf8Length } from './utf8.ts'

/** Longest equation block in bytes of UTF-8. */
export const longestBlock = 65_536
/** Most helper quantities. */
export const mostHelpers = 200

/** Symbols of the tables: key to the symbol as typed there. `refused` are keys whose rows were reported already. */
export interface DeclaredSymbols {
  parameters: ReadonlyMap<string, string>
  states: ReadonlyMap<string, string>
  refused: ReadonlySet<string>
}

/** A statement that could be read whole. `symbol` is spelled as the tables spell it. */
export interface ParsedStatement extends Definition {
  kind: 'helper' | 'equation'
  symbol: string
  lastLine: number
  left: Place
  places: ReadonlyMap<Expression, Token>
}

/** An equation block as read. `started` names the states whose equation is there, even where it cannot be read. */
export interface ParsedBlock {
  statements: ParsedStatement[]
  /** Every helper that is named left of an = , read or not, with its spelling. */
  helpers: ReadonlyMap<string, string>
  started: ReadonlySet<string>
  lines: TokenLine[]
  errors: ModelError[]
}

/**
 * Reads an equation block against the symbols of the tables. With `symbols` null the tables are not known and names are
 * not checked. Collects every fault; never throws.
 */
export function parseBlock(text: string, symbols: DeclaredSymbols | null): ParsedBlock {
  const size = text.length > longestBlock ? text.length : utf8Length(text)
  if (size > longestBlock) {
    const message = `The equations have more than ${longestBlock.toLocaleString('en')} bytes (64 KiB), which is the limit.`
    return {
      statements: [],
      helpers: new Map(),
      started: new Set(),
      lines: [],
      errors: [{ code: 'too-large', message, path: 'equations' }],
    }
  }
  const { statements: read, lines, errors } = readStatements(text)
  if (read.length === 0 && errors.length === 0) {
    const message = 'The equations are empty. Write one line for each state, as in dx/dt = mu*x.'
    return {
      statements: [],
      helpers: new Map(),
      started: new Set(),
      lines,
      errors: [{ code: 'empty-model', message, path: 'equations' }],
    }
  }

  const seen = collectLeft(read, symbols, errors)
  const declared = new Map<string, string>([
    ...seen.helpers,
    ...seen.undeclared,
    ...(symbols?.states ?? []),
    ...(symbols?.parameters ?? []),
  ])
  const constants = new Set(['pi', 'e'].filter((name) => !declared.has(name)))
  const known = symbols ? { declared, nearest: nameAdviser([...declared.keys()]) } : null
  const statements: ParsedStatement[] = []
  for (const statement of read) {
    if (statement.equals.kind !== 'equals') continue
    const faults = checkRightSide(statement.right, statement.equals, known)
    for (const fault of faults) errors.push(fault)
    // Beyond the limit there is no model, and trees would only cost time.
    if (seen.helpers.size > mostHelpers) continue
    if (statement.faulty || faults.length > 0 || statement.key === null || seen.refused.has(statement)) continue
    const tree = parseTree(statement.right, constants)
    if (tree === null) {
      const { line, column, length } = statement.equals
      errors.push({ code: 'syntax', message: 'This right-hand side cannot be read.', line, column, length })
      continue
    }
    const { kind, key, line, lastLine, left } = statement
    const spelled = kind === 'equation' ? symbols?.states.get(key) : undefined
    statements.push({ kind, key, symbol: spelled ?? statement.symbol, line, lastLine, left, ...tree })
  }
  return { statements, helpers: seen.helpers, started: seen.started, lines, errors }
}

interface LeftSides {
  helpers: Map<string, string>
  started: Set<string>
  /** States with an equation but no row: told once, at their equation. */
  undeclared: Map<string, string>
  refused: Set<Statement>
}

function collectLeft(read: readonly Statement[], symbols: DeclaredSymbols | null, errors: ModelError[]): LeftSides {
  const sides: LeftSides = { helpers: new Map(), started: new Set(), undeclared: new Map(), refused: new Set() }
  const firstLines = new Map<string, number>()
  const looks = new Map<string, { key: string; symbol: string }>()
  for (const [key, symbol] of [...(symbols?.parameters ?? []), ...(symbols?.states ?? [])]) {
    looks.set(printedLook(symbol), { key, symbol })
  }
  for (const statement of read) {
    const { kind, key, left } = statement
    if (key === null) continue
    const name = quoted(statement.symbol)
    const refuse = (code: ModelError['code'], message: string, cures?: ModelError['cures']) => {
      errors.push({
        code,
        message,
        line: left.line,
        column: left.column,
        length: left.length,
        ...(cures ? { cures } : {}),
      })
      sides.refused.add(statement)
    }
    const once = `${kind} ${key}`
    const before = firstLines.get(once)
    if (before !== undefined) {
      refuse(
        'duplicate-equation',
        `${kind === 'equation' ? `d${name}/dt` : name} is given twice, first in line ${before}.`,
      )
      continue
    }
    firstLines.set(once, statement.line)

    if (kind === 'equation') {
      sides.started.add(key)
      if (symbols === null || symbols.states.has(key) || symbols.refused.has(key)) continue
      sides.undeclared.set(key, statement.symbol)
      if (symbols.parameters.has(key))
        refuse('missing-state', `${name} is a parameter, so it has no equation. List it among the states instead.`)
      else refuse('missing-state', `${name} has an equation but is not among the states.`)
    } else if (isReserved(key)) {
      refuse('reserved-symbol', `${name} is reserved. Choose another symbol for this helper quantity.`)
    } else if (symbols?.states.has(key)) {
      const derivative = `d${statement.symbol}/dt`
      refuse('assigned-input', `${name} is a state: it is given by its equation ${derivative} = ...`, [
        { label: `Write ${derivative}`, replacement: derivative },
      ])
    } else if (symbols?.parameters.has(key)) {
      refuse('assigned-input', `${name} is a parameter: its value stands in the table and cannot be set here.`)
    } else {
      const look = printedLook(statement.symbol)
      const twin = looks.get(look)
      if (twin !== undefined && twin.key !== key) {
        refuse(
          'duplicate-symbol',
          `${name} cannot be told from ${quoted(twin.symbol)} in print. Choose another symbol.`,
        )
      }
      looks.set(look, { key, symbol: statement.symbol })
      sides.helpers.set(key, statement.symbol)
      if (sides.helpers.size === mostHelpers + 1)
        refuse('too-large', `A model may have ${mostHelpers} helper quantities; here begins the next one.`)
    }
  }
  return sides
}
