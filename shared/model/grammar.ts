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
  return new SideCheck(tokens, equals, known).run()
}

/** One pass over the tokens: what is expected next, what is open, how deep it nests. */
class SideCheck {
  private readonly tokens: readonly Token[]
  private readonly equals: Token
  private readonly known: KnownNames | null
  private readonly errors: ModelError[] = []
  private readonly frames: Frame[]
  private depth = 0
  private operands = 0
  private wantsOperand = true
  private before: Token

  constructor(tokens: readonly Token[], equals: Token, known: KnownNames | null) {
    this.tokens = tokens
    this.equals = equals
    this.known = known
    this.before = equals
    this.frames = [{ call: null, open: equals, pending: 0, commas: 0 }]
  }

  run(): ModelError[] {
    if (this.tokens.length === 0) this.fault('syntax', this.equals, 'The right-hand side is missing.')
    for (const [i, token] of this.tokens.entries()) {
      // What follows a fault of the shape could be judged only by guessing what was meant.
      if (!this.step(token, this.tokens[i + 1])) return this.errors
      this.before = token
    }
    if (this.tokens.length > 0) this.end()
    return this.errors
  }

  private fault(code: ModelError['code'], place: Place, message: string, cures: readonly string[] = []): false {
    const { line, column, length } = place
    const offered = cures.map((replacement) => ({ label: `Write ${replacement}`, replacement }))
    this.errors.push({ code, message, line, column, length, ...(offered.length > 0 ? { cures: offered } : {}) })
    return false
  }

  private get frame(): Frame {
    return this.frames.at(-1) ?? { call: null, open: this.equals, pending: 0, commas: 0 }
  }

  /** Takes one token; false where the reading has to end. */
  private step(token: Token, next: Token | undefined): boolean {
    switch (token.kind) {
      case 'bad':
        return false
      case 'equals':
        return this.fault('syntax', token, 'A statement has one = only. Put the other one in a line of its own.')
      case 'number':
      case 'name':
        return this.operand(token, next)
      case 'open':
        return this.open(token)
      case 'operator':
        return this.wantsOperand ? this.sign(token) : this.operator(token)
      case 'comma':
        return this.comma(token, next)
      case 'close':
        return this.close(token)
    }
  }

  private operand(token: Token, next: Token | undefined): boolean {
    this.impliedProduct(token)
    this.operands += 1
    if (this.operands > mostOperands) {
      const message = `A statement may hold ${mostOperands} numbers and symbols. Split it with helper quantities.`
      return this.fault('too-large', token, message)
    }
    this.wantsOperand = token.kind === 'name' && this.name(token, next?.kind === 'open')
    return true
  }

  private open(token: Token): boolean {
    const call = this.wantsOperand && this.before.kind === 'name' ? this.before : null
    this.impliedProduct(token)
    this.frames.push({ call, open: token, pending: 0, commas: 0 })
    this.wantsOperand = true
    return this.deeper(token)
  }

  private sign(token: Token): boolean {
    if (token.text === '-' || token.text === '+') {
      this.frame.pending += 1
      return this.deeper(token)
    }
    const doubled = this.before.kind === 'operator' && this.before.text === '*' && token.text === '*'
    const missing = `Before ${token.text} a number, a symbol or a bracket is missing.`
    return this.fault('syntax', token, doubled ? 'Powers are written with ^, not **.' : missing)
  }

  private operator(token: Token): boolean {
    this.wantsOperand = true
    if (token.text !== '^') {
      this.settle()
      return true
    }
    this.frame.pending += 1
    return this.deeper(token)
  }

  private comma(token: Token, next: Token | undefined): boolean {
    if (this.wantsOperand) return this.fault('syntax', token, 'Before the comma something is missing.')
    const { frame, before } = this
    if (frame.call === null) {
      const decimal = before.kind === 'number' && next?.kind === 'number' && next.column === token.column + 1
      if (decimal)
        return this.fault('syntax', span(before, next), 'The decimal mark is a point.', [`${before.text}.${next.text}`])
      return this.fault('syntax', token, 'A comma may stand only between the arguments of min and max.')
    }
    this.settle()
    frame.commas += 1
    this.wantsOperand = true
    return true
  }

  private close(token: Token): boolean {
    if (this.frames.length === 1) return this.fault('syntax', token, 'This ) closes no bracket.')
    if (this.wantsOperand) {
      const empty = this.before.kind === 'open'
      return this.fault(
        'syntax',
        token,
        empty ? 'There is nothing in these brackets.' : 'Before the ) something is missing.',
      )
    }
    this.settle()
    this.depth -= 1
    this.arguments(this.frame, token)
    this.frames.pop()
    return true
  }

  private end(): void {
    if (this.wantsOperand) this.fault('syntax', this.before, `After ${this.before.text} something is missing.`)
    else if (this.frames.length > 1) {
      const message =
        'This bracket is not closed. A statement goes on in the next line only after an operator or an open bracket.'
      this.fault('syntax', this.frame.open, message)
    }
  }

  private deeper(token: Token): boolean {
    this.depth += 1
    if (this.depth <= deepestNesting) return true
    return this.fault(
      'too-deep',
      token,
      `This nests more than ${deepestNesting} deep. Split it with helper quantities.`,
    )
  }

  // Signs and powers have their operand now and nest no longer.
  private settle(): void {
    this.depth -= this.frame.pending
    this.frame.pending = 0
  }

  // No product is implied; the cure is the product the text most likely means, and the reading goes on with it.
  private impliedProduct(right: Token): void {
    if (this.wantsOperand) return
    this.settle()
    const left = this.before
    const product = `${left.text}*${right.text}`
    const call = left.kind === 'name' && right.kind === 'open'
    const message = call
      ? `${quoted(left.text)} is not a function: put * between it and the bracket.`
      : `Put * between ${quoted(left.text)} and ${quoted(right.text)}: no product is implied.`
    this.fault('syntax', span(left, right), message, left.line === right.line && product.length <= 80 ? [product] : [])
  }

  /** Checks a name; true where it is called, so that a bracket with arguments follows. */
  private name(token: Token, open: boolean): boolean {
    const { key } = token
    if (key === null) return open
    if (isFunctionName(key)) {
      if (!open) this.fault('syntax', token, `${key} is a function and needs its argument in brackets.`)
      return open
    }
    if (this.known?.declared.has(key) || key === 'pi' || key === 'e') return false
    if (key === 't') {
      return this.fault(
        'time-dependent',
        token,
        't is the time and may not stand on the right: a model may not depend on the time itself.',
      )
    }
    if (this.known === null) return open
    if (!open) return this.unknownSymbol(token, key, this.known)
    const ours = otherNames.get(key)
    const message = `There is no function ${quoted(token.text)}.${ours === undefined ? '' : ` It is called ${ours} here.`}`
    this.fault('unknown-function', token, message, ours === undefined ? nearestNames(key, functionNames) : [ours])
    return true
  }

  private unknownSymbol(token: Token, key: string, known: KnownNames): false {
    const unknown = `${quoted(token.text)} is not declared.`
    const look = printedLook(token.text)
    if (look !== token.text && known.declared.has(look)) {
      const message = `${unknown} It holds a Greek letter (${codePointsOf(token.text)}) that looks like a Latin one.`
      return this.fault('unknown-symbol', token, message, [look])
    }
    if (/^d./.test(key) && known.declared.has(key.slice(1))) {
      const message = `${unknown} Derivatives may not stand on the right: name the right-hand side as a helper quantity instead.`
      return this.fault('unknown-symbol', token, message)
    }
    return this.fault(
      'unknown-symbol',
      token,
      unknown,
      known.nearest(key).map((name) => known.declared.get(name) ?? name),
    )
  }

  private arguments({ call, commas }: Frame, close: Token): void {
    const name = call?.key
    if (!call || !name || !isFunctionName(name)) return
    const several = name === 'min' || name === 'max'
    if (several && commas === 0) this.fault('syntax', span(call, close), `${name} takes two or more arguments.`)
    if (!several && commas > 0)
      this.fault('syntax', span(call, close), `${name} takes one argument, here are ${commas + 1}.`)
  }
}

const codePointsOf = (text: string) =>
  [...text]
    .filter((character) => greekTwins.has(character))
    .map((character) => codePointName(character.codePointAt(0) ?? 0))
    .join(', ')
