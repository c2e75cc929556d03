import { characterFault, isBlank, isInvisible, isWordLike } from './characters.ts'
import type { ModelError } from './errors.ts'
import { foldSymbol, quoted, symbolCharacterFaults } from './symbols.ts'

/**
 * The first reading of an equation block: physical lines into tokens, each with its place. Nothing nests here, so the
 * time is linear in the text whatever the text is.
 */

/** Place of some text: physical line from 1, column in UTF-16 units from 1, length in UTF-16 units. */
export interface Place {
  line: number
  column: number
  length: number
}

/**
 * One token. `key` is the folded symbol of a name (null where a character in it may not stand there), `value` the value
 * of a number. A `bad` token has been reported and can only end the reading of its statement.
 */
export interface Token extends Place {
  kind: 'number' | 'name' | 'operator' | 'open' | 'close' | 'comma' | 'equals' | 'bad'
  text: string
  key: string | null
  value: number
}

/** Tokens of one physical line; `comment` is the text after #, null where the line has none. */
export interface TokenLine {
  line: number
  text: string
  tokens: Token[]
  comment: string | null
}

/** What the tokeniser read, with every fault of single characters and numbers. */
export interface TokenisedBlock {
  lines: TokenLine[]
  errors: ModelError[]
}

const minus = '\u2212'
const single: ReadonlyMap<string, { kind: Token['kind']; text: string }> = new Map([
  ['+', { kind: 'operator', text: '+' }],
  ['-', { kind: 'operator', text: '-' }],
  [minus, { kind: 'operator', text: '-' }],
  ['*', { kind: 'operator', text: '*' }],
  ['\u00d7', { kind: 'operator', text: '*' }],
  ['\u00b7', { kind: 'operator', text: '*' }],
  ['/', { kind: 'operator', text: '/' }],
  ['^', { kind: 'operator', text: '^' }],
  ['(', { kind: 'open', text: '(' }],
  [')', { kind: 'close', text: ')' }],
  [',', { kind: 'comma', text: ',' }],
  ['=', { kind: 'equals', text: '=' }],
])

const refused: ReadonlyMap<string, string> = new Map([
  [';', 'One statement a line: begin a new line instead of ;.'],
  ['!', 'Factorials are not among the operators. They are + - * / ^ and brackets.'],
  ['%', 'The percent sign is not read. Write 0.05 for 5 per cent.'],
  ["'", 'A prime is not read. Write a derivative as dx/dt.'],
  ['"', 'Text in quotes has no place in the equations. Begin a comment with #.'],
  [':', 'A colon is not read. A statement is  name = expression  or  dx/dt = expression.'],
  ['[', 'Use round brackets ( ). Square brackets are not read.'],
  [']', 'Use round brackets ( ). Square brackets are not read.'],
  ['{', 'Use round brackets ( ). Braces are not read.'],
  ['}', 'Use round brackets ( ). Braces are not read.'],
  ['.', 'This point belongs to no number.'],
])
const comparing = 'Comparisons are not read. A statement has one = between a name and its expression.'

// Faults after which the statement may be read on as if the character were not there, so that later faults show too.
const passable = new Set(['!', '%'])

const digits = /[0-9]/
const number = /(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+\-\u2212]?[0-9]+)?/y
const asciiName = /[A-Za-z][A-Za-z0-9_]*/y

/** Splits a block into physical lines: LF, CRLF and a lone CR each end one. */
export function physicalLines(text: string): string[] {
  return text.split(/\r\n|\n|\r/)
}

/** Reads the tokens of a whole block. Never throws. */
export function tokenise(text: string): TokenisedBlock {
  const errors: ModelError[] = []
  const lines = physicalLines(text).map((lineText, i) => tokeniseLine(lineText, i + 1, errors))
  return { lines, errors }
}

function tokeniseLine(text: string, line: number, errors: ModelError[]): TokenLine {
  const tokens: Token[] = []
  const push = (kind: Token['kind'], at: number, length: number, read: string, key: string | null = null, value = 0) =>
    tokens.push({ kind, line, column: at + 1, length, text: read, key, value })
  const fault = (code: ModelError['code'], at: number, length: number, message: string, replacement?: string) => {
    const error: ModelError = { code, message, line, column: at + 1, length }
    if (replacement !== undefined) {
      error.cures = [{ label: replacement === '' ? 'Remove it' : `Write ${replacement}`, replacement }]
    }
    errors.push(error)
  }

  // One line of code in another language need not be told its braces one by one.
  const told = new Set<string>()
  let at = 0
  while (at < text.length) {
    const character = String.fromCodePoint(text.codePointAt(at) ?? 0)
    if (isBlank(character)) {
      at += 1
      continue
    }
    if (character === '#') {
      hiddenInComment(text, at + 1, fault)
      return { line, text, tokens, comment: text.slice(at + 1).trim() }
    }
    const known = single.get(character)
    if (known) {
      push(known.kind, at, 1, known.text)
      at += 1
      continue
    }
    if (digits.test(character) || (character === '.' && digits.test(text.charAt(at + 1)))) {
      at = readNumber(text, at, push, fault)
      continue
    }
    if (isWordLike(character)) {
      const end = wordEnd(text, at)
      readWord(text.slice(at, end), at, push, fault)
      at = end
      continue
    }
    const message = character === '<' || character === '>' ? comparing : refused.get(character)
    if (message !== undefined || (character >= ' ' && character <= '~')) {
      if (!told.has(character))
        fault('syntax', at, 1, message ?? `${character} is not read. The operators are + - * / ^.`)
      told.add(character)
      if (!passable.has(character)) push('bad', at, 1, character)
    } else {
      const { message: why, replacement } = characterFault(character)
      fault('bad-character', at, character.length, why, replacement)
      // Read on as what was meant, so that the rest of the line is judged without it.
      const meant = single.get(replacement ?? '')
      if (meant) push(meant.kind, at, character.length, meant.text)
    }
    at += character.length
  }
  return { line, text, tokens, comment: null }
}

type Push = (kind: Token['kind'], at: number, length: number, text: string, key?: string | null, value?: number) => void
type Fault = (code: ModelError['code'], at: number, length: number, message: string, replacement?: string) => void

// A comment may be in any language, but nothing in it may hide text or turn its direction.
function hiddenInComment(text: string, from: number, fault: Fault): void {
  for (let at = from; at < text.length; ) {
    const character = String.fromCodePoint(text.codePointAt(at) ?? 0)
    // Joiners and variation selectors are ordinary spelling in many scripts; direction and hidden text are not.
    const ordinary = /^(?:\u200c|\u200d|[\ufe00-\ufe0f])$/.test(character)
    const control = /[\p{Cc}\p{Cs}]/u.test(character) && character !== '\t'
    if (control || (!ordinary && isInvisible(character))) {
      const { message, replacement } = characterFault(character)
      fault('bad-character', at, character.length, message, replacement)
    }
    at += character.length
  }
}

function wordEnd(text: string, from: number): number {
  asciiName.lastIndex = from
  let at = asciiName.test(text) ? asciiName.lastIndex : from
  while (at < text.length) {
    const character = String.fromCodePoint(text.codePointAt(at) ?? 0)
    const plain = character <= '~'
    if (
      plain
        ? !/[A-Za-z0-9_]/.test(character)
        : !isWordLike(character) && !(isInvisible(character) && continues(text, at))
    )
      break
    at += character.length
  }
  return at
}

// An invisible character between two letters is a fault inside one name, not the end of it.
function continues(text: string, at: number): boolean {
  const next = text.codePointAt(at + String.fromCodePoint(text.codePointAt(at) ?? 0).length)
  return next !== undefined && isWordLike(String.fromCodePoint(next))
}

function readWord(word: string, at: number, push: Push, fault: Fault): void {
  const key = foldSymbol(word)
  if (key === null) {
    const faults = symbolCharacterFaults(word)
    for (const one of faults) fault('bad-character', at + one.offset, one.length, one.message, one.replacement)
    if (faults.length === 0)
      fault('syntax', at, word.length, `${quoted(word)} is not a symbol: it has to start with a letter.`)
  }
  push('name', at, word.length, word, key)
}

function readNumber(text: string, at: number, push: Push, fault: Fault): number {
  number.lastIndex = at
  number.test(text)
  let end = number.lastIndex
  const literal = text.slice(at, end)
  const value = Number(literal.replace(minus, '-'))
  const rest = text.slice(end)
  if (rest.startsWith('.') || (/^[0-9]/.test(rest) && literal.includes('.'))) {
    while (/[0-9.]/.test(text.charAt(end))) end += 1
    fault('syntax', at, end - at, `${quoted(text.slice(at, end))} is not a number: it has more than one point.`)
  } else if (/^0$/.test(literal) && /^[xXbBoO][0-9a-fA-F]/.test(rest)) {
    while (/[0-9A-Za-z_]/.test(text.charAt(end))) end += 1
    fault(
      'syntax',
      at,
      end - at,
      `${quoted(text.slice(at, end))} is not read: numbers are decimal, as in 12.5 or 1.25e1.`,
    )
  } else if (/^[eE](?![A-Za-z0-9_])/.test(rest) && !/[eE]/.test(literal)) {
    end += 1
    fault(
      'syntax',
      at,
      end - at,
      `${quoted(text.slice(at, end))} is not a number: its exponent is missing. A product needs *.`,
      `${literal}*${text.charAt(end - 1)}`,
    )
  } else if (!Number.isFinite(value)) {
    fault(
      'not-finite',
      at,
      end - at,
      `${quoted(literal)} is too large to be a number here (the limit is about 1.8e308).`,
    )
  }
  push('number', at, end - at, literal, null, Number.isFinite(value) ? value : 0)
  return end
}
