import type { ModelError } from './errors.ts'
import { foldSymbol, quoted } from './symbols.ts'
import { type Place, type Token, type TokenLine, tokenise } from './tokens.ts'

/**
 * Tokens into statements: continuation lines joined, the left-hand side read. The right-hand side is left as tokens,
 * because what it may name is known only when every statement has been seen.
 */

/** A statement as far as its left-hand side tells. `key` and `left` are null where that side could not be read. */
export interface Statement {
  kind: 'helper' | 'equation'
  /** Key of the helper or of the state that is differentiated. */
  key: string | null
  /** The symbol as typed. */
  symbol: string
  /** Place of the left-hand side. */
  left: Place
  /** First and last physical line. */
  line: number
  lastLine: number
  /** Tokens right of the equals sign; empty where there is none. */
  right: Token[]
  /** The equals sign, or the last token where it is missing. */
  equals: Token
  /** True where something in it has been reported. */
  faulty: boolean
}

/** The block in statements and comment lines, with all faults so far. */
export interface ReadBlock {
  statements: Statement[]
  lines: TokenLine[]
  errors: ModelError[]
}

/** Place that covers both tokens when they stand on one line, else the first alone. */
export function span(first: Place, last: Place): Place {
  if (first.line !== last.line) return { line: first.line, column: first.column, length: first.length }
  return { line: first.line, column: first.column, length: last.column + last.length - first.column }
}

/** Reads a block into statements. Never throws; linear in the text. */
export function readStatements(text: string): ReadBlock {
  const { lines, errors } = tokenise(text)
  const faultyLines = new Set(errors.map((error) => error.line))
  const statements: Statement[] = []
  let current: Token[] = []
  let previous: TokenLine | null = null

  const finish = () => {
    const [first] = current
    if (!first) return
    statements.push(readLeft(current, errors, faultyLines))
    current = []
  }
  for (const line of lines) {
    const [first] = line.tokens
    if (!first) continue
    const last = current.at(-1)
    const goesOn = last !== undefined && (last.kind === 'operator' || last.kind === 'open' || last.kind === 'comma')
    if (!goesOn) finish()
    if (first.kind === 'operator') {
      const where = previous ? `at the end of line ${previous.line}` : 'after what it joins'
      const message = `A line may not begin with an operator. Put ${first.text} ${where}.`
      errors.push({ code: 'syntax', message, line: first.line, column: first.column, length: first.length })
      faultyLines.add(first.line)
      // Without a statement before it the rest of the line has no left-hand side to judge.
      if (!goesOn) {
        previous = line
        continue
      }
    }
    if (goesOn && line.tokens.some((token) => token.kind === 'equals')) {
      const message = `Line ${last.line} ends in ${last.text} and goes on in line ${line.line}, which is a statement of its own. Finish line ${last.line}.`
      errors.push({ code: 'syntax', message, line: last.line, column: last.column, length: last.length })
      faultyLines.add(last.line)
      // Ends the reading of that statement without a second word about the same place.
      current.push({ ...last, kind: 'bad' })
      finish()
    }
    for (const token of line.tokens) current.push(token)
    previous = line
  }
  finish()
  return { statements, lines, errors }
}

const shape = 'A statement is  name = expression  or, for a state,  dx/dt = expression.'

function readLeft(tokens: Token[], errors: ModelError[], faultyLines: ReadonlySet<number | undefined>): Statement {
  const first = tokens[0] ?? emptyToken
  const last = tokens.at(-1) ?? first
  const at = tokens.findIndex((token) => token.kind === 'equals')
  const left = at < 0 ? tokens : tokens.slice(0, at)
  const leftEnd = left.at(-1) ?? first
  const statement: Statement = {
    kind: 'helper',
    key: null,
    symbol: '',
    left: left.length > 0 ? span(first, leftEnd) : span(first, first),
    line: first.line,
    lastLine: last.line,
    right: at < 0 ? [] : tokens.slice(at + 1),
    equals: tokens[at] ?? last,
    faulty: tokens.some((token) => faultyLines.has(token.line)),
  }
  const fault = (place: Place, message: string, cures?: ModelError['cures']) => {
    const { line, column, length } = place
    errors.push({ code: 'syntax', message, line, column, length, ...(cures ? { cures } : {}) })
    statement.faulty = true
  }

  const [head, slash, under] = left
  const derivative = head?.kind === 'name' && slash?.text === '/' && under?.kind === 'name' && under.text === 'dt'
  if (derivative && head.key !== null && /^d./.test(head.key)) {
    statement.kind = 'equation'
    statement.key = head.key.slice(1)
    statement.symbol = head.text.slice(1)
  } else if (head?.kind === 'name') {
    statement.key = head.key
    statement.symbol = head.text
  }

  if (statement.kind === 'equation' && foldSymbol(statement.symbol) === null) {
    statement.key = null
    fault(
      head ?? first,
      `${quoted(statement.symbol)} is not a symbol, so it has no rate: a symbol starts with a letter.`,
    )
    return statement
  }
  // A character that was refused has been told; what it does to the shape of the line need not be told again.
  if (left.some((token) => token.kind === 'bad')) {
    if (statement.kind === 'helper') statement.key = null
    return statement
  }
  const wanted = statement.kind === 'equation' ? 3 : 1
  if (at < 0) {
    if (statement.kind === 'helper') statement.key = null
    fault(
      span(first, leftEnd),
      statement.kind === 'equation' && left.length === 3
        ? 'After dx/dt an = and the right-hand side are missing.'
        : `There is no = in this line. ${shape}`,
    )
  } else if (left.length === 0) {
    fault(first, `There is nothing before the =. ${shape}`)
  } else if (head?.kind !== 'name' || left.length !== wanted) {
    const call = head?.kind === 'name' && slash?.kind === 'open'
    if (statement.kind === 'helper') statement.key = null
    const message = call
      ? `Functions cannot be defined. Write ${quoted(head.text)} = expression, as a helper quantity.`
      : `${shape} Left of the = stands something else.`
    fault(statement.left, message, call ? [{ label: `Write ${head.text}`, replacement: head.text }] : undefined)
  }
  return statement
}

const emptyToken: Token = { kind: 'bad', line: 1, column: 1, length: 0, text: '', key: null, value: 0 }
