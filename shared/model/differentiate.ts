/**
 * Derivatives as nodes of the same builder: the Jacobian of chosen nodes with respect to chosen inputs.
 *
 * Forward accumulation with one shortcut that keeps Jacobians cheap: a chain of functions of one intermediate quantity
 * (its root) carries a single derivative with respect to the root, and the root's sparse gradient is multiplied in only
 * where two different roots meet. Everything is shared with the function itself, so that a tape of F and J computes
 * exponentials and powers once. Source: Griewank & Walther, Evaluating Derivatives (2nd ed.), chapters 3 and 9.
 */

import { constantCode, inputCode, op } from './op-codes.ts'
import type { TapeBuilder } from './tape-builder.ts'

/** Derivative of a node: factor (-1 stands for one) times the gradient of `root`. */
interface Chain {
  root: number
  factor: number
}

/** A sparse gradient: `entries[k]` is the derivative in the input of column `columns[k]`. */
export interface Gradient {
  columns: number[]
  /** Node of each entry. */
  entries: number[]
}

const empty: Gradient = { columns: [], entries: [] }

/**
 * Gradients of `targets` with respect to the input nodes `inputs`; column k belongs to inputs[k]. Entries that are
 * identically zero are left out.
 */
export function gradients(builder: TapeBuilder, targets: readonly number[], inputs: readonly number[]): Gradient[] {
  const limit = builder.size
  const needed = new Uint8Array(limit)
  const mark: number[] = []
  for (const id of targets) {
    if (needed[id] === 0) mark.push(id)
    needed[id] = 1
  }
  for (let id = mark.pop(); id !== undefined; id = mark.pop()) {
    if (builder.isConstant(id) || builder.code[id] === inputCode) continue
    for (const operand of operandsOf(builder, id)) {
      if (needed[operand] === 1) continue
      needed[operand] = 1
      mark.push(operand)
    }
  }
  const chains: (Chain | undefined)[] = new Array(limit)
  const roots = new Map<number, Gradient>()
  const one = builder.constant(1)
  inputs.forEach((id, column) => {
    chains[id] = { root: id, factor: -1 }
    roots.set(id, { columns: [column], entries: [one] })
  })
  const times = (factor: number, by: number): number => (factor < 0 ? by : builder.mul(factor, by))

  /** Adds partial * d(operand) to a gradient under construction. */
  const accumulate = (sum: Map<number, number>, chain: Chain, partial: number): void => {
    const gradient = roots.get(chain.root) ?? empty
    const factor = times(chain.factor, partial)
    gradient.columns.forEach((column, k) => {
      const entry = builder.mul(factor, gradient.entries[k] as number)
      const known = sum.get(column)
      sum.set(column, known === undefined ? entry : builder.add(known, entry))
    })
  }

  const expand = (id: number): Map<number, number> => {
    const sum = new Map<number, number>()
    const chain = chains[id]
    if (chain !== undefined) accumulate(sum, chain, one)
    return sum
  }

  /**
   * min, max and select take over the derivative of the branch that holds; a product with 0 or 1 would turn an
   * infinite slope of the other branch into NaN. The slope of a jump in the test is 0, and unbounded in intervals.
   */
  const branchGradient = (id: number): Gradient => {
    const [a, b] = [builder.a[id] as number, builder.b[id] as number]
    const code = builder.code[id]
    const choice = code === op.select ? a : code === op.max ? builder.sub(a, b) : builder.sub(b, a)
    const [first, second] = code === op.select ? [expand(b), expand(builder.c[id] as number)] : [expand(a), expand(b)]
    const sum = new Map<number, number>()
    for (const column of new Set([...first.keys(), ...second.keys()])) {
      const zero = builder.constant(0)
      sum.set(column, builder.select(choice, first.get(column) ?? zero, second.get(column) ?? zero))
    }
    const test = code === op.select ? chains[a] : undefined
    if (test !== undefined) accumulate(sum, test, builder.unary(op.jump, a))
    return toGradient(builder, sum)
  }

  for (let id = builder.inputs; id < limit; id++) {
    if (needed[id] === 0 || builder.isConstant(id) || builder.code[id] === constantCode) continue
    const active = operandsOf(builder, id).filter((operand) => chains[operand] !== undefined)
    if (active.length === 0) continue
    const code = builder.code[id]
    if (code === op.min || code === op.max || code === op.select) {
      roots.set(id, branchGradient(id))
      chains[id] = { root: id, factor: -1 }
      continue
    }
    const distinct = [...new Set(active)]
    const parts = distinct
      .map((operand) => ({ chain: chains[operand] as Chain, partial: partialDerivative(builder, id, operand) }))
      .filter(({ partial }) => !builder.is(partial, 0))
    const [firstPart] = parts
    if (firstPart === undefined) continue
    if (parts.every(({ chain }) => chain.root === firstPart.chain.root)) {
      const factor = parts
        .map(({ chain, partial }) => times(chain.factor, partial))
        .reduce((sum, term) => builder.add(sum, term))
      if (!builder.is(factor, 0))
        chains[id] = { root: firstPart.chain.root, factor: builder.is(factor, 1) ? -1 : factor }
      continue
    }
    const sum = new Map<number, number>()
    for (const { chain, partial } of parts) accumulate(sum, chain, partial)
    roots.set(id, toGradient(builder, sum))
    chains[id] = { root: id, factor: -1 }
  }
  return targets.map((id) => {
    const chain = chains[id]
    if (chain === undefined) return empty
    return chain.factor < 0 ? (roots.get(chain.root) ?? empty) : toGradient(builder, expand(id))
  })
}

function toGradient(builder: TapeBuilder, sum: Map<number, number>): Gradient {
  const columns = [...sum.keys()].filter((column) => !builder.is(sum.get(column) as number, 0)).sort((i, j) => i - j)
  return { columns, entries: columns.map((column) => sum.get(column) as number) }
}

function operandsOf(builder: TapeBuilder, id: number): number[] {
  const [a, b] = [builder.a[id] as number, builder.b[id] as number]
  switch (builder.code[id]) {
    case op.add:
    case op.sub:
    case op.mul:
    case op.div:
    case op.pow:
    case op.powlog:
    case op.min:
    case op.max:
    case op.share:
      return [a, b]
    case op.select:
      return [a, b, builder.c[id] as number]
    default:
      return [a]
  }
}

/** Derivative of node `id` with respect to its operand node (all places where that operand stands together). */
function partialDerivative(builder: TapeBuilder, id: number, operand: number): number {
  const [a, b] = [builder.a[id] as number, builder.b[id] as number]
  const one = builder.constant(1)
  const zero = builder.constant(0)
  const square = (x: number): number => builder.integerPower(x, 2)
  const sum = (ofA: () => number, ofB: () => number): number =>
    builder.add(operand === a ? ofA() : zero, operand === b ? ofB() : zero)
  switch (builder.code[id]) {
    case op.add:
      return sum(
        () => one,
        () => one,
      )
    case op.sub:
      return sum(
        () => one,
        () => builder.constant(-1),
      )
    case op.mul:
      if (a === b) return builder.mul(builder.constant(2), a)
      return operand === a ? b : a
    case op.div:
      return sum(
        () => builder.div(one, b),
        () => builder.neg(builder.div(id, b)),
      )
    case op.share: {
      const whole = builder.add(a, b)
      return sum(
        () => builder.div(builder.share(b, a), whole),
        () => builder.neg(builder.div(id, whole)),
      )
    }
    case op.neg:
      return builder.constant(-1)
    case op.powi:
      return builder.mul(builder.constant(b), builder.integerPower(a, b - 1))
    case op.pow:
      return sum(
        () => builder.mul(b, builder.pow(a, builder.sub(b, one))),
        () => builder.powlog(a, b),
      )
    case op.powlog: {
      const less = builder.sub(b, one)
      return sum(
        () => builder.add(builder.mul(b, builder.powlog(a, less)), builder.pow(a, less)),
        () => builder.mul(id, builder.unary(op.log, a)),
      )
    }
    case op.sqrt:
      return builder.div(builder.constant(0.5), id)
    case op.exp:
      return id
    case op.log:
      return builder.div(one, a)
    case op.log10:
      return builder.div(builder.unary(op.log10, builder.roundedConstant(Math.E)), a)
    case op.log1p:
      return builder.div(one, builder.add(one, a))
    case op.expm1:
      return builder.unary(op.exp, a)
    case op.sin:
      return builder.unary(op.cos, a)
    case op.cos:
      return builder.neg(builder.unary(op.sin, a))
    case op.tan:
      return builder.add(one, square(id))
    case op.asin:
      return builder.div(one, rootOfOneMinusSquare(builder, a))
    case op.acos:
      return builder.div(builder.constant(-1), rootOfOneMinusSquare(builder, a))
    case op.atan:
      return builder.div(one, builder.add(one, square(a)))
    case op.sinh:
      return builder.unary(op.cosh, a)
    case op.cosh:
      return builder.unary(op.sinh, a)
    case op.tanh:
      return builder.sub(one, square(id))
    case op.exprel:
      return builder.quotient(op.exprel, a, b + 1)
    case op.bernoulli:
      return builder.quotient(op.bernoulli, a, b + 1)
    case op.logistic:
      // s(a) s(-a): neither factor cancels or overflows.
      return builder.mul(id, builder.unary(op.logistic, builder.neg(a)))
    case op.abs:
      return builder.unary(op.sign, a)
    case op.sign:
      return builder.unary(op.jump, a)
    default:
      return zero
  }
}

/** sqrt((1 - a)(1 + a)): accurate near the ends. */
function rootOfOneMinusSquare(builder: TapeBuilder, a: number): number {
  const one = builder.constant(1)
  return builder.sqrt(builder.mul(builder.sub(one, a), builder.add(one, a)))
}
