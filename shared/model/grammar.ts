import { codePointName, greekTwins } from './characters.ts'
import type { ModelError } from './errors.ts'
import { type FunctionName, functionNames } from './expression.ts'
import { nearestNames } from './nearest-names.ts'
import { span } from './statements.ts'
import { printedLook, quoted } from './symbols.ts'
import type { Place, Token } from './tokens.ts'

/**
 * The grammar of a right-hand side, checked on its tokens before any tree is built: what stands where, what is nested
 * how deep, what is called with how many arguments. A side that passes here is one the parser reads in the only way
 * the format allows; so nesting is bounded before anything recurses.
 */

/** Deepest nesting of brackets, powers and signs. */
export const deepestNesting = 200
/** Most numbers and symbols in one statement: a tree of at most 2,000 nodes, which recursion can walk. */
export const mostOperands = 1000

const functions: ReadonlySet<string> = new Set(functionNames)
/** True for the name of a function a model may call. */
export function isFunctionName(key: string): key is FunctionName {
  return functions.has(key)
}

const otherNames: ReadonlyMap<string, string> = new Map([
  ['ln', 'log'],
  ['arcsin', 'asin'],
  ['arccos', 'acos'],
  ['arctan', 'atan'],
  ['arctg', 'atan'],
  ['tg', 'tan'],
  ['sh', 'sinh'],
  ['ch', 'cosh'],
  ['th', 'tanh'],
  ['sgn', 'sign'],
  ['signum', 'sign'],
  ['lg', 'log10'],
])

interface Frame {
  /** The function called, null for a plain bracket. */
  call: Token | null
  open: Token
  /** Signs and powers that wait for their operand. */
  pending: number
  commas: number
}

/** What a right-hand side may name: keys of parameters, states and helpers with their spelling. */
export interface KnownNames {
  declared: ReadonlyMap<string, string>
  /** Declared names that an unknown one may have been meant for. */
  nearest: (unknown: string) => string[]
}

/**
 * Checks one right-hand side and returns all faults found. With `known` null the tables could not be read, and names are
 * not judged.
 */
export function checkRightSide(tokens: readonly Token[], equals: Token, known: KnownNames | null): ModelError[] {
  const errors: ModelError[] = []
  const fault = (code: ModelError['code'], place: Place, message: string, cures?: ModelError['cures']) => {
    const { line, column, length } = place
    errors.push({ code, message, line, column, length, ...(cures && cures.length > 0 ? { cures } : {}) })
  }
  if (tokens.length === 0) {
    fault('syntax', equals, 'The right-hand side is missing.')
    return errors
  }

  let frame: Frame = { call: null, open: equals, pending: 0, commas: 0 }
  const frames: Frame[] = [frame]
  let depth = 0
  let operands = 0
  let wantsOperand = true
  let before: Token = equals

  const tooDeep = (token: Token) => {
    depth += 1
    if (depth <= deepestNesting) return false
    fault('too-deep', token, `This nests more than ${deepestNesting} deep. Split it with helper quantities.`)
    return true
  }
  const settle = () => {
    depth -= frame.pending
    frame.pending = 0
  }

  for (let i = 0; i < tokens.length; i++) {
    const token = tokens[i]
    if (token === undefined) break
    const next = tokens[i + 1]
    if (token.kind === 'bad') return errors
    if (token.kind === 'equals') {
      fault('syntax', token, 'A statement has one = only. Put the other one in a line of its own.')
      return errors
    }
    if (token.kind === 'number' || token.kind === 'name' || token.kind === 'open') {
      if (!wantsOperand) {
        product(before, token, fault)
        settle()
      }
      if (token.kind === 'open') {
        if (tooDeep(token)) return errors
        frame = { call: wantsOperand && before.kind === 'name' ? before : null, open: token, pending: 0, commas: 0 }
        frames.push(frame)
        wantsOperand = true
      } else {
        operands += 1
        if (operands > mostOperands) {
          fault(
            'too-large',
            token,
            `A statement may hold ${mostOperands} numbers and symbols. Split it with helper quantities.`,
          )
          return errors
        }
        wantsOperand = token.kind === 'name' && checkName(token, next?.kind === 'open', known, fault)
      }
    } else if (token.kind === 'operator') {
      if (wantsOperand) {
        if (token.text === '-' || token.text === '+') {
          frame.pending += 1
          if (tooDeep(token)) return errors
        } else {
          const doubled = before.kind === 'operator' && before.text === '*' && token.text === '*'
          fault(
            'syntax',
            token,
            doubled
              ? 'Powers are written with ^, not **.'
              : `Before ${token.text} a number, a symbol or a bracket is missing.`,
          )
          return errors
        }
      } else {
        wantsOperand = true
        if (token.text === '^') {
          frame.pending += 1
          if (tooDeep(token)) return errors
        } else settle()
      }
    } else if (token.kind === 'comma') {
      if (wantsOperand) {
        fault('syntax', token, 'Before the comma something is missing.')
        return errors
      }
      if (frame.call === null) {
        const decimal = before.kind === 'number' && next?.kind === 'number' && next.column === token.column + 1
        fault(
          'syntax',
          decimal ? span(before, next) : token,
          decimal ? 'The decimal mark is a point.' : 'A comma may stand only between the arguments of min and max.',
          decimal
            ? [{ label: `Write ${before.text}.${next.text}`, replacement: `${before.text}.${next.text}` }]
            : undefined,
        )
        return errors
      }
      settle()
      frame.commas += 1
      wantsOperand = true
    } else {
      if (frames.length === 1) {
        fault('syntax', token, 'This ) closes no bracket.')
        return errors
      }
      if (wantsOperand) {
        fault(
          'syntax',
          token,
          before.kind === 'open' ? 'There is nothing in these brackets.' : 'Before the ) something is missing.',
        )
        return errors
      }
      settle()
      depth -= 1
      checkArguments(frame, token, fault)
      frames.pop()
      frame = frames.at(-1) ?? frame
    }
    before = token
  }

  if (wantsOperand) {
    fault('syntax', before, `After ${before.text} something is missing.`)
  } else if (frames.length > 1) {
    fault(
      'syntax',
      frame.open,
      'This bracket is not closed. A statement goes on in the next line only after an operator or an open bracket.',
    )
  }
  return errors
}

type Fault = (code: ModelError['code'], place: Place, message: string, cures?: ModelError['cures']) => void

// No product is implied; the cure is the product the text most likely means.
function product(left: Token, right: Token, fault: Fault): void {
  const replacement = `${left.text}*${right.text}`
  const between = `${quoted(left.text)} and ${quoted(right.text)}`
  const message =
    left.kind === 'name' && right.kind === 'open'
      ? `${quoted(left.text)} is not a function: put * between it and the bracket.`
      : `Put * between ${between}: no product is implied.`
  fault(
    'syntax',
    span(left, right),
    message,
    left.line === right.line && replacement.length <= 80 ? [{ label: `Write ${replacement}`, replacement }] : undefined,
  )
}

/** Checks a name; returns true where it is called, so that a bracket with arguments follows. */
function checkName(token: Token, open: boolean, known: KnownNames | null, fault: Fault): boolean {
  const key = token.key
  if (key === null) return open
  if (isFunctionName(key)) {
    if (!open) fault('syntax', token, `${key} is a function and needs its argument in brackets.`)
    return open
  }
  if (known?.declared.has(key) || key === 'pi' || key === 'e') return false
  if (key === 't') {
    fault(
      'time-dependent',
      token,
      't is the time and may not stand on the right: a model may not depend on the time itself.',
    )
    return false
  }
  if (known === null) return open
  if (open) {
    const ours = otherNames.get(key)
    const near = ours === undefined ? nearestNames(key, functionNames) : [ours]
    const message = `There is no function ${quoted(token.text)}.${ours === undefined ? '' : ` It is called ${ours} here.`}`
    fault(
      'unknown-function',
      token,
      message,
      near.map((name) => ({ label: `Write ${name}`, replacement: name })),
    )
    return true
  }
  const look = printedLook(token.text)
  if (look !== token.text && known.declared.has(look)) {
    const message = `${quoted(token.text)} is not declared. It holds a Greek letter (${codePointsOf(token.text)}) that looks like a Latin one.`
    fault('unknown-symbol', token, message, [{ label: `Write ${look}`, replacement: look }])
    return false
  }
  const near = known.nearest(key).map((name) => known.declared.get(name) ?? name)
  const derivative = /^d./.test(key) && known.declared.has(key.slice(1))
  const why = derivative
    ? ' Derivatives may not stand on the right: name the right-hand side as a helper quantity instead.'
    : ''
  fault(
    'unknown-symbol',
    token,
    `${quoted(token.text)} is not declared.${why}`,
    derivative ? [] : near.map((name) => ({ label: `Write ${name}`, replacement: name })),
  )
  return false
}

const codePointsOf = (text: string) =>
  [...text]
    .filter((character) => greekTwins.has(character))
    .map((character) => codePointName(character.codePointAt(0) ?? 0))
    .join(', ')

function checkArguments(frame: Frame, close: Token, fault: Fault): void {
  const name = frame.call?.key
  if (frame.call === null || !name || !isFunctionName(name)) return
  const count = frame.commas + 1
  const several = name === 'min' || name === 'max'
  if (several && count < 2) fault('syntax', span(frame.call, close), `${name} takes two or more arguments.`)
  if (!several && count > 1) fault('syntax', span(frame.call, close), `${name} takes one argument, here are ${count}.`)
}
