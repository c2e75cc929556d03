import { type DeclaredSymbols, type ParsedStatement, parseBlock } from './equations.ts'
import type { Expression } from './expression.ts'
import { foldSymbol } from './symbols.ts'
import { symbolTex } from './tex-symbol.ts'

/** Longest TeX of one line in UTF-16 units, and its deepest nesting of groups: beyond it the typed text is shown. */
export const longestTex = 4096
export const deepestTex = 32

/** One entry of a typeset block. `tex` is null where the line cannot be read or would be too large. */
export interface TexLine {
  /** Physical line on which it begins. */
  line: number
  kind: 'helper' | 'equation' | 'comment' | 'unread'
  tex: string | null
  /** What was typed, without the comment; of a comment line its text. */
  text: string
  /** The comment at the end of the statement's line or lines. */
  comment: string | null
}

/** Tables as far as typesetting needs them: symbols as the document spells them. */
export interface TexTables {
  equations: string
  parameters: readonly { symbol: string }[]
  states: readonly { symbol: string }[]
}

/**
 * Typesets an equation block statement by statement, comments included. Blank lines are left out. Nothing of the
 * user's goes into TeX but letters and digits of symbols; use it with trust off all the same. Never throws.
 */
export function blockToTex(tables: TexTables): TexLine[] {
  const symbols: DeclaredSymbols = {
    parameters: keyed(tables.parameters),
    states: keyed(tables.states),
    refused: new Set(),
  }
  const block = parseBlock(tables.equations, symbols)
  const spelled = new Map<string, string>([...block.helpers, ...symbols.states, ...symbols.parameters])
  const spell = (key: string) => spelled.get(key) ?? key
  const byLine = new Map(block.statements.map((statement) => [statement.line, statement]))
  const entries: TexLine[] = []
  let covered = 0
  for (const { line, text, tokens, comment } of block.lines) {
    const typed = withoutComment(text, comment)
    if (line <= covered) {
      const last = entries.at(-1)
      if (last && typed !== '') last.text += `\n${typed}`
      if (last && comment) last.comment = last.comment ? `${last.comment} ${comment}` : comment
      continue
    }
    const statement = byLine.get(line)
    if (statement) {
      covered = statement.lastLine
      entries.push({ line, kind: statement.kind, tex: statementTex(statement, spell), text: typed, comment })
    } else if (tokens.length > 0 || typed !== '')
      entries.push({ line, kind: 'unread', tex: null, text: typed, comment })
    else if (comment) entries.push({ line, kind: 'comment', tex: null, text: comment, comment: null })
  }
  return entries
}

function keyed(rows: readonly { symbol: string }[]): Map<string, string> {
  const symbols = new Map<string, string>()
  for (const { symbol } of rows) {
    const key = foldSymbol(symbol)
    if (key !== null) symbols.set(key, symbol)
  }
  return symbols
}

function withoutComment(text: string, comment: string | null): string {
  // The first # begins the comment: no other token holds one.
  return (comment === null ? text : text.slice(0, text.indexOf('#'))).trim()
}

/** A statement in TeX, the state's rate with a dot. null where it would be too long or nest too deep. */
export function statementTex(
  statement: Pick<ParsedStatement, 'kind' | 'key' | 'symbol' | 'expression'>,
  spell: (key: string) => string,
): string | null {
  const left = symbolTex(statement.symbol, statement.kind === 'equation')
  const right = expressionTex(statement.expression, spell)
  if (right === null) return null
  const tex = `${left} = ${right}`
  return tex.length <= longestTex ? tex : null
}

/** An expression in TeX, or null where it would be too long or nest too deep. Symbols are spelled by `spell`. */
export function expressionTex(expression: Expression, spell: (key: string) => string): string | null {
  const tex = new TexWriter(spell).write(expression, 0, 0)
  return tex !== null && tex.length <= longestTex ? tex : null
}

const strength = { '+': 1, '-': 1, '*': 2, '/': 2, '^': 4 } as const
const strengthOfSign = 3
const own = new Map<string, string>([
  ['exp', '\\exp'],
  ['log', '\\ln'],
  ['log10', '\\log_{10}'],
  ['sin', '\\sin'],
  ['cos', '\\cos'],
  ['tan', '\\tan'],
  ['asin', '\\arcsin'],
  ['acos', '\\arccos'],
  ['atan', '\\arctan'],
  ['sinh', '\\sinh'],
  ['cosh', '\\cosh'],
  ['tanh', '\\tanh'],
  ['min', '\\min'],
  ['max', '\\max'],
])

class TexWriter {
  private readonly spell: (key: string) => string
  private written = 0

  constructor(spell: (key: string) => string) {
    this.spell = spell
  }

  /** `least` is the strength the surroundings ask for, `depth` the groups around. null: too large. */
  write(at: Expression, least: number, depth: number): string | null {
    // Each node writes a character at least, so a tree too large to show is given up early.
    this.written += 1
    if (depth > deepestTex || this.written > longestTex) return null
    switch (at.kind) {
      case 'number':
        return numberTex(at.value, least)
      case 'constant':
        return at.name === 'pi' ? '\\pi' : '\\mathrm{e}'
      case 'symbol':
        return symbolTex(this.spell(at.key))
      case 'negate':
        return this.negated(at.of, least > strengthOfSign, depth)
      case 'call':
        return this.call(at.name, at.args, least, depth)
      case 'binary':
        return this.binary(at, least, depth)
    }
  }

  private negated(of: Expression, brackets: boolean, depth: number): string | null {
    const inner = this.write(of, of.kind === 'negate' ? 4 : strengthOfSign, depth + 1)
    if (inner === null) return null
    return brackets ? bracketed(`-${inner}`) : `-${inner}`
  }

  private binary(at: Expression & { kind: 'binary' }, least: number, depth: number): string | null {
    const { operator, left, right } = at
    if (operator === '/') {
      const above = this.write(left, 0, depth + 1)
      const below = this.write(right, 0, depth + 1)
      if (above === null || below === null) return null
      const tex = `\\frac{${above}}{${below}}`
      return least > strengthOfSign ? bracketed(tex) : tex
    }
    if (operator === '^') {
      const base = this.write(left, 5, depth)
      const power = this.write(right, 0, depth + 1)
      if (base === null || power === null) return null
      const tex = `${base}^{${power}}`
      return least > 4 ? bracketed(tex) : tex
    }
    return this.chain(at, strength[operator], least, depth)
  }

  // Sums and products may be a thousand terms long: they are walked, not descended into.
  private chain(at: Expression & { kind: 'binary' }, rank: number, least: number, depth: number): string | null {
    const inside = depth + (least > rank ? 1 : 0)
    const steps: { operator: string; right: Expression }[] = []
    let first: Expression = at
    while (first.kind === 'binary' && strength[first.operator] === rank && first.operator !== '/') {
      steps.push({ operator: first.operator, right: first.right })
      first = first.left
    }
    let tex = this.write(first, rank, inside)
    for (const { operator, right } of steps.reverse()) {
      // A sign after an operator is bracketed in print, or two signs would meet.
      const next = tex === null ? null : this.write(right, right.kind === 'negate' ? 4 : rank + 1, inside)
      if (tex === null || next === null || tex.length > longestTex) return null
      const join = operator === '*' ? (startsWithDigit(right) ? ' \\cdot ' : ' \\, ') : ` ${operator} `
      tex += join + next
    }
    return tex !== null && least > rank ? bracketed(tex) : tex
  }

  private call(name: string, args: readonly Expression[], least: number, depth: number): string | null {
    const inner = args.map((arg) => this.write(arg, 0, depth + 1))
    if (inner.some((one) => one === null)) return null
    const list = inner.join(', ')
    if (name === 'sqrt') return `\\sqrt{${list}}`
    if (name === 'abs') return `\\left|${list}\\right|`
    const tex = `${own.get(name) ?? `\\operatorname{${name}}`}${bracketed(list)}`
    // The square of a sine must not read as the sine of a square.
    return least > 4 ? bracketed(tex) : tex
  }
}

const bracketed = (tex: string) => `\\left(${tex}\\right)`

function startsWithDigit(expression: Expression): boolean {
  for (let at = expression; ; ) {
    if (at.kind === 'number') return true
    if (at.kind !== 'binary' || at.operator === '/') return false
    at = at.left
  }
}

function numberTex(value: number, least: number): string {
  const [digits = '', exponent] = String(value).split('e')
  if (exponent === undefined) return digits
  const tex = `${digits} \\cdot 10^{${Number(exponent)}}`
  return least > 2 ? bracketed(tex) : tex
}
