/** Expression trees into nodes of the tape builder: symbols resolved, smooth quotients recognised. */

import type { Expression, FunctionName } from './expression.ts'
import { op } from './op-codes.ts'
import { holdsExponential, holdsPattern, smoothQuotient } from './removable-quotients.ts'
import type { TapeBuilder } from './tape-builder.ts'

const unaryCodes: Partial<Record<FunctionName, number>> = {
  exp: op.exp,
  log: op.log,
  log10: op.log10,
  sin: op.sin,
  cos: op.cos,
  tan: op.tan,
  asin: op.asin,
  acos: op.acos,
  atan: op.atan,
  sinh: op.sinh,
  cosh: op.cosh,
  tanh: op.tanh,
  expm1: op.expm1,
  log1p: op.log1p,
  abs: op.abs,
  sign: op.sign,
}

/**
 * The node of an expression. `symbols` maps keys to nodes (states, parameters, helpers made before); a key that is not
 * there is a fault of the caller and throws. Trees that share subtrees cost each subtree once.
 */
export function lower(builder: TapeBuilder, expression: Expression, symbols: ReadonlyMap<string, number>): number {
  const done = new Map<Expression, number>()

  const visit = (e: Expression): number => {
    switch (e.kind) {
      case 'number':
        return builder.constant(e.value)
      case 'constant':
        return builder.roundedConstant(e.name === 'pi' ? Math.PI : Math.E)
      case 'symbol': {
        const node = symbols.get(e.key)
        if (node === undefined) throw new Error(`No value for the symbol ${e.key}`)
        return node
      }
    }
    const known = done.get(e)
    if (known !== undefined) return known
    const node = e.kind === 'binary' ? binary(e) : e.kind === 'negate' ? builder.neg(visit(e.of)) : call(e.name, e.args)
    done.set(e, node)
    return node
  }

  /** Left spines are walked in a loop: a sum of ten thousand terms is as deep as it is long. */
  const binary = (e: Expression & { kind: 'binary' }): number => {
    const spine: (Expression & { kind: 'binary' })[] = []
    let at: Expression = e
    while (at.kind === 'binary' && !done.has(at)) {
      spine.push(at)
      at = at.left
    }
    let node = visit(at)
    for (let link = spine.pop(); link !== undefined; link = spine.pop()) {
      node = combine(link, node)
      done.set(link, node)
    }
    return node
  }

  const combine = (e: Expression & { kind: 'binary' }, left: number): number => {
    if (e.operator === '^') {
      // e^x is the exponential function, not a power of a rounded base.
      if (e.left.kind === 'constant' && e.left.name === 'e') return builder.unary(op.exp, visit(e.right))
      return builder.pow(left, visit(e.right))
    }
    const right = visit(e.right)
    switch (e.operator) {
      case '+':
        return builder.add(left, right)
      case '-':
        return builder.sub(left, right)
      case '*':
        return multiply(builder, left, right)
      case '/':
        return divide(builder, left, right)
    }
  }

  const call = (name: FunctionName, args: Expression[]): number => {
    const nodes = args.map(visit)
    const first = nodes[0]
    if (first === undefined) throw new Error(`${name} needs an argument`)
    if (name === 'sqrt') return builder.sqrt(first)
    if (name === 'exprel') return builder.quotient(op.exprel, first, 0)
    if (name === 'min') return nodes.reduce((a, b) => builder.min(a, b))
    if (name === 'max') return nodes.reduce((a, b) => builder.max(a, b))
    const code = unaryCodes[name]
    if (code === undefined) throw new Error(`No operation for ${name}`)
    return builder.unary(code, first)
  }

  return visit(expression)
}

function multiply(builder: TapeBuilder, a: number, b: number): number {
  if (holdsExponential(builder, a) || holdsExponential(builder, b)) {
    const smooth = smoothQuotient(builder, a, null, b)
    if (smooth !== null) return smooth
  }
  return builder.mul(a, b)
}

function divide(builder: TapeBuilder, a: number, b: number): number {
  if (holdsPattern(builder, a, b)) {
    const smooth = smoothQuotient(builder, a, b, null)
    if (smooth !== null) return smooth
  }
  return builder.div(a, b)
}
