/**
 * Builds the graph from which tapes are cut: nodes in an order in which each uses only earlier ones, equal nodes made
 * once (hashed by integers), constants folded, trivial operations left out.
 *
 * A folded constant that was rounded stays a node with its operation and gets a value beside it: point backends read
 * the value, the interval backend encloses what was rounded away. Only 0 times anything (0) and anything to the power 0
 * (1) are given a value where the text may have none; x/x is left alone.
 */

import { bernoulliDerivative, exprelDerivative } from '#shared/numerics/smooth-quotients.ts'
import { productError, sumError } from '#shared/numerics/two-product.ts'
import { arity, constantCode, inputCode, op } from './op-codes.ts'

/** Largest integer exponent that is expanded into multiplications. */
const expandedPower = 64

/** The graph under construction. Nodes are numbers; operations return the node of their result, which may exist already. */
export class TapeBuilder {
  /** Number of inputs: nodes 0 .. inputs - 1 (states first, then parameters). */
  readonly inputs: number
  readonly code: number[] = []
  readonly a: number[] = []
  readonly b: number[] = []
  readonly c: number[] = []
  /** Value of a literal or folded constant, NaN of every other node. */
  readonly value: number[] = []
  /** 1 where the node depends on an input below `states`. */
  readonly varies: number[] = []
  /** Called for each node an emit returns, new or shared: attributes nodes to the line that uses them. */
  onEmit: ((node: number) => void) | null = null
  readonly #states: number
  readonly #constants = new Map<number, number>()
  #table = new Int32Array(1024).fill(-1)

  constructor(states: number, inputs: number) {
    this.#states = states
    this.inputs = inputs
    for (let i = 0; i < inputs; i++) this.#append(inputCode, i, -1, -1, Number.NaN)
  }

  get size(): number {
    return this.code.length
  }

  #append(code: number, a: number, b: number, c: number, value: number): number {
    const id = this.code.length
    this.code.push(code)
    this.a.push(a)
    this.b.push(b)
    this.c.push(c)
    this.value.push(value)
    let varies = code === inputCode && id < this.#states ? 1 : 0
    if (code < constantCode) {
      const operands = arity[code] as number
      varies = this.varies[a] as number
      if (operands > 1) varies |= this.varies[b] as number
      if (operands > 2) varies |= this.varies[c] as number
    }
    this.varies.push(varies)
    return id
  }

  isConstant(id: number): boolean {
    return !Number.isNaN(this.value[id])
  }

  /** A constant that is exactly its value, without rounding on the way. */
  isExact(id: number): boolean {
    return this.code[id] === constantCode && (this.a[id] as number) < 0
  }

  /** Is this node the constant `value`? */
  is(id: number, value: number): boolean {
    return this.value[id] === value
  }

  constant(value: number): number {
    const known = this.#constants.get(value)
    if (known !== undefined) return known
    const id = this.#append(constantCode, -1, -1, -1, value)
    this.#constants.set(value, id)
    return id
  }

  /** A constant known to one unit in the last place only (pi, e). */
  roundedConstant(value: number): number {
    const id = this.#node(constantCode, 1, this.constant(value))
    this.value[id] = value
    return id
  }

  /** The node (code, a, b, c) itself, shared where it exists already. */
  #node(code: number, a: number, b = -1, c = -1): number {
    let mask = this.#table.length - 1
    let slot = hash(code, a, b, c) & mask
    for (let id = this.#table[slot] as number; id >= 0; id = this.#table[slot] as number) {
      if (this.code[id] === code && this.a[id] === a && this.b[id] === b && this.c[id] === c) {
        this.onEmit?.(id)
        return id
      }
      slot = (slot + 1) & mask
    }
    const id = this.#append(code, a, b, c, Number.NaN)
    this.#table[slot] = id
    if (this.code.length * 2 > mask) {
      mask = this.#table.length * 4 - 1
      this.#table = new Int32Array(mask + 1).fill(-1)
      for (let i = this.inputs; i < this.code.length; i++) {
        if (this.isExact(i)) continue
        let k = hash(this.code[i] as number, this.a[i] as number, this.b[i] as number, this.c[i] as number) & mask
        while ((this.#table[k] as number) >= 0) k = (k + 1) & mask
        this.#table[k] = i
      }
    }
    this.onEmit?.(id)
    return id
  }

  /** A constant where the folded value is finite, else the plain node (so that the fault shows when it is run). */
  #fold(value: number, exact: boolean, code: number, a: number, b = -1): number {
    if (exact && Number.isFinite(value)) return this.constant(value)
    const id = this.#node(code, a, b)
    if (Number.isFinite(value)) this.value[id] = value
    return id
  }

  /** Constants that were rounded do not add up exactly, whatever their values do. */
  #exact(a: number, b: number): boolean {
    return this.isExact(a) && this.isExact(b)
  }

  add(a: number, b: number): number {
    if (this.is(a, 0)) return b
    if (this.is(b, 0)) return a
    if (this.isConstant(a) && this.isConstant(b)) {
      const [x, y] = [this.#v(a), this.#v(b)]
      return this.#fold(x + y, this.#exact(a, b) && sumError(x, y) === 0, op.add, a, b)
    }
    if (this.code[b] === op.neg) return this.sub(a, this.a[b] as number)
    if (this.code[a] === op.neg) return this.sub(b, this.a[a] as number)
    return a < b ? this.#node(op.add, a, b) : this.#node(op.add, b, a)
  }

  sub(a: number, b: number): number {
    if (this.is(b, 0)) return a
    if (this.is(a, 0)) return this.neg(b)
    if (this.isConstant(a) && this.isConstant(b)) {
      const [x, y] = [this.#v(a), this.#v(b)]
      return this.#fold(x - y, this.#exact(a, b) && sumError(x, -y) === 0, op.sub, a, b)
    }
    if (this.code[b] === op.neg) return this.add(a, this.a[b] as number)
    if (a === b) return this.constant(0)
    return this.#node(op.sub, a, b)
  }

  neg(a: number): number {
    if (this.isConstant(a)) return this.#fold(-this.#v(a), this.isExact(a), op.neg, a)
    if (this.code[a] === op.neg) return this.a[a] as number
    if (this.code[a] === op.sub) return this.sub(this.b[a] as number, this.a[a] as number)
    return this.#node(op.neg, a)
  }

  mul(a: number, b: number): number {
    if (this.isConstant(b) && !this.isConstant(a)) return this.mul(b, a)
    if (this.isConstant(a)) {
      const v = this.#v(a)
      if (v === 0) return this.constant(0)
      if (v === 1) return b
      if (v === -1) return this.neg(b)
      if (this.isConstant(b)) {
        const w = this.#v(b)
        return this.#fold(v * w, this.#exact(a, b) && isExactProduct(v, w), op.mul, a, b)
      }
      if (this.code[b] === op.neg) return this.mul(this.neg(a), this.a[b] as number)
      if (this.code[b] === op.mul && this.isConstant(this.a[b] as number)) {
        const product = v * this.#v(this.a[b] as number)
        if (Math.abs(product) < 1e200 && Math.abs(product) > 1e-200) {
          return this.mul(this.mul(a, this.a[b] as number), this.b[b] as number)
        }
      }
      return this.#node(op.mul, a, b)
    }
    if (this.code[a] === op.neg) return this.neg(this.mul(this.a[a] as number, b))
    if (this.code[b] === op.neg) return this.neg(this.mul(a, this.a[b] as number))
    return a < b ? this.#node(op.mul, a, b) : this.#node(op.mul, b, a)
  }

  div(a: number, b: number): number {
    if (this.is(b, 1)) return a
    if (this.is(b, -1)) return this.neg(a)
    if (this.isConstant(b)) {
      const v = this.#v(b)
      if (this.isConstant(a)) {
        const quotient = this.#v(a) / v
        return this.#fold(quotient, this.#exact(a, b) && isExactQuotient(this.#v(a), v), op.div, a, b)
      }
      // Division by a power of two is a multiplication, digit for digit.
      if (this.isExact(b) && isPowerOfTwo(v)) return this.mul(this.constant(1 / v), a)
    }
    if (this.is(a, 0)) return a
    if (this.code[a] === op.neg && !this.isConstant(a)) return this.neg(this.div(this.a[a] as number, b))
    if (this.code[b] === op.neg && !this.isConstant(b)) return this.neg(this.div(a, this.a[b] as number))
    return this.#node(op.div, a, b)
  }

  pow(a: number, b: number): number {
    if (!this.isConstant(b)) return this.#node(op.pow, a, b)
    const exponent = this.#v(b)
    if (exponent === 0.5) return this.sqrt(a)
    if (exponent === -0.5) return this.div(this.constant(1), this.sqrt(a))
    if (Number.isInteger(exponent) && Math.abs(exponent) <= expandedPower) return this.integerPower(a, exponent)
    if (this.isConstant(a)) return this.#fold(this.#v(a) ** exponent, false, op.pow, a, b)
    return this.#node(op.pow, a, b)
  }

  /** a^k by squarings; odd powers above one keep their own instruction, whose bounds over an interval are exact. */
  integerPower(a: number, k: number): number {
    if (k === 0) return this.constant(1)
    if (k < 0) return this.div(this.constant(1), this.integerPower(a, -k))
    if (k === 1) return a
    if (this.code[a] === op.neg) {
      const power = this.integerPower(this.a[a] as number, k)
      return k % 2 === 0 ? power : this.neg(power)
    }
    if (k % 2 === 0) {
      const half = this.integerPower(a, k / 2)
      return this.isConstant(half) ? this.mul(half, half) : this.#node(op.mul, half, half)
    }
    if (this.isConstant(a)) return this.mul(a, this.integerPower(a, k - 1))
    return this.#node(op.powi, a, k)
  }

  powlog(a: number, b: number): number {
    return this.#node(op.powlog, a, b)
  }

  sqrt(a: number): number {
    if (!this.isConstant(a)) return this.#node(op.sqrt, a)
    const root = Math.sqrt(this.#v(a))
    return this.#fold(root, this.isExact(a) && root * root === this.#v(a) && isExactProduct(root, root), op.sqrt, a)
  }

  /** A function of one argument, by its code. */
  unary(code: number, a: number): number {
    if (!this.isConstant(a)) return this.#node(code, a)
    const exact = this.isExact(a) && (code === op.abs || code === op.sign)
    return this.#fold(evaluateUnary(code, this.#v(a)), exact, code, a)
  }

  /** The `k`-th derivative of exprel or bernoulli. */
  quotient(code: typeof op.exprel | typeof op.bernoulli, a: number, k: number): number {
    if (!this.isConstant(a)) return this.#node(code, a, k)
    const v = this.#v(a)
    return this.#fold(code === op.exprel ? exprelDerivative(v, k) : bernoulliDerivative(v, k), false, code, a, k)
  }

  min(a: number, b: number): number {
    if (this.#exact(a, b)) return this.constant(Math.min(this.#v(a), this.#v(b)))
    if (a === b) return a
    return a < b ? this.#node(op.min, a, b) : this.#node(op.min, b, a)
  }

  max(a: number, b: number): number {
    if (this.#exact(a, b)) return this.constant(Math.max(this.#v(a), this.#v(b)))
    if (a === b) return a
    return a < b ? this.#node(op.max, a, b) : this.#node(op.max, b, a)
  }

  share(a: number, b: number): number {
    if (this.isConstant(a) && this.isConstant(b)) return this.div(a, this.add(a, b))
    return this.#node(op.share, a, b)
  }

  select(test: number, positive: number, negative: number): number {
    return positive === negative ? positive : this.#node(op.select, test, positive, negative)
  }

  #v(id: number): number {
    return this.value[id] as number
  }
}

function isExactProduct(a: number, b: number): boolean {
  return productError(a, b) === 0 && Math.abs(a * b) > 1e-250
}

function isExactQuotient(a: number, b: number): boolean {
  const quotient = a / b
  return quotient * b === a && (a === 0 || isExactProduct(quotient, b))
}

function isPowerOfTwo(v: number): boolean {
  const size = Math.abs(v)
  return size < 1e300 && size > 1e-300 && 2 ** Math.round(Math.log2(size)) === size
}

function hash(code: number, a: number, b: number, c: number): number {
  let h = Math.imul(code + 1, 0x9e3779b1)
  h = Math.imul(h ^ (a + 0x7f4a7c15), 0x85ebca6b)
  h = Math.imul(h ^ (h >>> 13) ^ (b + 0x165667b1), 0xc2b2ae35)
  h = Math.imul(h ^ (h >>> 16) ^ (c + 0x27d4eb2f), 0x9e3779b1)
  return h ^ (h >>> 15)
}

/** One-argument operations on numbers, as folding uses them. */
function evaluateUnary(code: number, x: number): number {
  switch (code) {
    case op.exp:
      return Math.exp(x)
    case op.log:
      return Math.log(x)
    case op.log10:
      return Math.log10(x)
    case op.log1p:
      return Math.log1p(x)
    case op.expm1:
      return Math.expm1(x)
    case op.sin:
      return Math.sin(x)
    case op.cos:
      return Math.cos(x)
    case op.tan:
      return Math.tan(x)
    case op.asin:
      return Math.asin(x)
    case op.acos:
      return Math.acos(x)
    case op.atan:
      return Math.atan(x)
    case op.sinh:
      return Math.sinh(x)
    case op.cosh:
      return Math.cosh(x)
    case op.tanh:
      return Math.tanh(x)
    case op.logistic:
      return 1 / (1 + Math.exp(-x))
    case op.abs:
      return Math.abs(x)
    case op.sign:
      return Math.sign(x)
    default:
      return Number.NaN
  }
}
