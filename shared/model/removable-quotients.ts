/**
 * Recognises quotients that are 0/0 at a point but smooth there, and sigmoids that overflow, and rewrites them with the
 * primitives bernoulli(z) = z/(e^z - 1), exprel(z) = (e^z - 1)/z and logistic(z) = 1/(1 + e^-z).
 *
 * Works on products of the builder's nodes in normal form, so the spelling does not matter: 0.1*(V+40)/(1-exp(-(V+40)/10)),
 * (25-V)/(10*(exp((25-V)/10)-1)), u/expm1(u) with a helper u, V^2/(1-exp(-V)) and the like are all seen. A quotient is
 * rewritten only where the numerator has the zero of the denominator as a factor; 1/(1-exp(-V)) keeps its true pole.
 * Factors count as equal when their constants agree to fourteen digits: 0.1*V+4 and V+40 are the same zero.
 */

import { inputCode, op } from './op-codes.ts'
import type { TapeBuilder } from './tape-builder.ts'

/** constant + sum of coefficient * atom; atoms are nodes that are no sums and no multiples. */
interface LinearForm {
  constant: number
  terms: Map<number, number>
}

/** coefficient * product of factors; `scale` times the normalised factor is the node itself. */
interface Monomial {
  coefficient: number
  factors: Map<string, { node: number; scale: number; power: number }>
}

const maxTerms = 24

/** Null where the form is too large to be worth it. */
function linearForm(builder: TapeBuilder, root: number): LinearForm | null {
  const form: LinearForm = { constant: 0, terms: new Map() }
  let budget = maxTerms
  const visit = (node: number, factor: number): void => {
    if (budget-- <= 0) return
    if (builder.isConstant(node)) {
      form.constant += factor * (builder.value[node] as number)
      return
    }
    const [a, b] = [builder.a[node] as number, builder.b[node] as number]
    switch (builder.code[node]) {
      case op.add:
        visit(a, factor)
        visit(b, factor)
        return
      case op.sub:
        visit(a, factor)
        visit(b, -factor)
        return
      case op.neg:
        visit(a, -factor)
        return
      case op.mul:
        if (builder.isConstant(a)) {
          visit(b, factor * (builder.value[a] as number))
          return
        }
        break
      case op.div:
        if (builder.isConstant(b)) {
          visit(a, factor / (builder.value[b] as number))
          return
        }
        break
    }
    form.terms.set(node, (form.terms.get(node) ?? 0) + factor)
  }
  visit(root, 1)
  return budget < 0 ? null : form
}

/** Node = scale (e^argument + shift) with shift -1 or +1, or null. */
interface Exponential {
  argument: number
  scale: number
  shift: 1 | -1
}

function exponentialForm(builder: TapeBuilder, node: number): Exponential | null {
  const code = builder.code[node]
  if (code === op.expm1) return { argument: builder.a[node] as number, scale: 1, shift: -1 }
  if (code !== op.add && code !== op.sub) return null
  const form = linearForm(builder, node)
  if (form === null || form.terms.size !== 1) return null
  for (const [atom, scale] of form.terms) {
    if (builder.code[atom] !== op.exp) return null
    const ratio = form.constant / scale
    if (Math.abs(Math.abs(ratio) - 1) > 1e-14) return null
    return { argument: builder.a[atom] as number, scale, shift: ratio < 0 ? -1 : 1 }
  }
  return null
}

function monomial(
  builder: TapeBuilder,
  root: number,
  power: number,
  into: Monomial,
  budget = { left: maxTerms },
): boolean {
  if (budget.left-- <= 0) return false
  if (builder.isConstant(root)) {
    into.coefficient *= (builder.value[root] as number) ** power
    return true
  }
  const [a, b] = [builder.a[root] as number, builder.b[root] as number]
  switch (builder.code[root]) {
    case op.mul:
      return monomial(builder, a, power, into, budget) && monomial(builder, b, power, into, budget)
    case op.div:
      return monomial(builder, a, power, into, budget) && monomial(builder, b, -power, into, budget)
    case op.neg:
      into.coefficient *= power % 2 === 0 ? 1 : -1
      return monomial(builder, a, power, into, budget)
    case op.powi:
      return monomial(builder, a, power * b, into, budget)
  }
  const factor = normalFactor(builder, root)
  into.coefficient *= factor.scale ** power
  const known = into.factors.get(factor.key)
  if (known === undefined) into.factors.set(factor.key, { node: root, scale: factor.scale, power })
  else known.power += power
  return true
}

/** Sums are divided by the coefficient of their first atom, so that proportional ones share a key. */
function normalFactor(builder: TapeBuilder, node: number): { key: string; scale: number } {
  const code = builder.code[node]
  if (code !== op.add && code !== op.sub) return { key: `${node}`, scale: 1 }
  const form = linearForm(builder, node)
  if (form === null) return { key: `${node}`, scale: 1 }
  const terms = [...form.terms].filter(([, coefficient]) => coefficient !== 0).sort(([i], [j]) => i - j)
  const scale = terms[0]?.[1] ?? 1
  const key = terms.map(([atom, coefficient]) => `${atom}:${(coefficient / scale).toPrecision(14)}`).join(' ')
  return { key: `${key} ${(form.constant / scale).toPrecision(14)}`, scale }
}

/** Cheap test before the normal forms are made: is the divisor a sum, or does the quotient hold an exponential? */
export function holdsPattern(builder: TapeBuilder, a: number, b: number): boolean {
  if (builder.isConstant(b)) return false
  return builder.code[b] === op.add || holdsExponential(builder, a) || holdsExponential(builder, b)
}

/** Does the product hold a sum with an exponential? */
export function holdsExponential(builder: TapeBuilder, node: number, depth = 0): boolean {
  const code = builder.code[node] as number
  if (code === inputCode || builder.isConstant(node) || depth > 12) return false
  const [a, b] = [builder.a[node] as number, builder.b[node] as number]
  switch (code) {
    case op.expm1:
      return true
    case op.add:
    case op.sub:
      return isMultipleOfExponential(builder, a) || isMultipleOfExponential(builder, b)
    case op.mul:
    case op.div:
      return holdsExponential(builder, a, depth + 1) || holdsExponential(builder, b, depth + 1)
    case op.neg:
    case op.powi:
      return holdsExponential(builder, a, depth + 1)
    default:
      return false
  }
}

function isMultipleOfExponential(builder: TapeBuilder, node: number): boolean {
  let at = node
  for (;;) {
    const code = builder.code[at]
    if (code === op.exp) return true
    if (code === op.mul && builder.isConstant(builder.a[at] as number)) at = builder.b[at] as number
    else if ((code === op.div && builder.isConstant(builder.b[at] as number)) || code === op.neg)
      at = builder.a[at] as number
    else return false
  }
}

/**
 * The quotient a / b (or the product, with b = 1 written as null) in smooth primitives; null where nothing is to be
 * gained and the caller should emit the plain operation.
 */
export function smoothQuotient(
  builder: TapeBuilder,
  a: number,
  b: number | null,
  product: number | null,
): number | null {
  const all: Monomial = { coefficient: 1, factors: new Map() }
  if (!monomial(builder, a, 1, all)) return null
  if (b !== null && !monomial(builder, b, -1, all)) return null
  if (product !== null && !monomial(builder, product, 1, all)) return null
  const primitives: { node: number; power: number }[] = []
  for (const [key, factor] of [...all.factors]) {
    if (factor.power === 0) continue
    const form = exponentialForm(builder, factor.node)
    if (form === null) {
      const share = factor.power === -1 ? takeShare(builder, all, key, factor) : null
      if (share !== null) primitives.push({ node: share, power: 1 })
      continue
    }
    const count = Math.abs(factor.power)
    if (form.shift === 1) {
      if (factor.power > 0) continue
      // 1/(s (1 + e^E))^k = logistic(-E)^k / s^k; with e^E above it, logistic(E).
      const exponential = findExponential(builder, all, form.argument, count)
      const argument = exponential ? form.argument : builder.neg(form.argument)
      primitives.push({ node: builder.unary(op.logistic, argument), power: count })
    } else {
      const zero: Monomial = { coefficient: 1, factors: new Map() }
      if (!monomial(builder, form.argument, 1, zero)) continue
      const sign = factor.power < 0 ? 1 : -1
      if (!cancels(builder, all, zero, sign, count)) continue
      take(all, zero, sign * count)
      if (factor.power < 0) {
        const exponential = findExponential(builder, all, form.argument, count)
        const argument = exponential ? builder.neg(form.argument) : form.argument
        primitives.push({ node: builder.quotient(op.bernoulli, argument, 0), power: count })
      } else {
        primitives.push({ node: builder.quotient(op.exprel, form.argument, 0), power: count })
      }
    }
    all.coefficient *= (form.scale / factor.scale) ** factor.power
    all.factors.delete(key)
  }
  return primitives.length === 0 ? null : rebuild(builder, all, primitives)
}

/** Takes e^argument to the `count`-th power out of the product, where it is a factor. */
function findExponential(builder: TapeBuilder, all: Monomial, argument: number, count: number): boolean {
  for (const [key, factor] of all.factors) {
    if (builder.code[factor.node] !== op.exp || builder.a[factor.node] !== argument || factor.power < count) continue
    factor.power -= count
    if (factor.power === 0) all.factors.delete(key)
    return true
  }
  return false
}

/** Are all factors of the exponent that depend on a state (or, where none does, on anything) there to be cancelled? */
function cancels(builder: TapeBuilder, all: Monomial, zero: Monomial, sign: number, count: number): boolean {
  const positive = [...zero.factors].filter(([, factor]) => factor.power > 0)
  const varying = positive.filter(([, factor]) => builder.varies[factor.node] === 1)
  const needed = varying.length > 0 ? varying : positive
  return (
    needed.length > 0 &&
    needed.every(([key, factor]) => (all.factors.get(key)?.power ?? 0) * sign >= factor.power * count)
  )
}

/**
 * Saturation terms: P/(P + Q) with P a factor of the product becomes share(P, Q). Returns that node and takes the sum
 * and P out of the product, or null. P is a term of the sum that depends on a state.
 */
function takeShare(
  builder: TapeBuilder,
  all: Monomial,
  key: string,
  factor: { node: number; scale: number },
): number | null {
  const leaves: number[] = []
  const stack = [factor.node]
  for (let node = stack.pop(); node !== undefined; node = stack.pop()) {
    if (builder.code[node] === op.add && !builder.isConstant(node))
      stack.push(builder.a[node] as number, builder.b[node] as number)
    else leaves.push(node)
    if (leaves.length > 8) return null
  }
  if (leaves.length < 2) return null
  for (const [at, leaf] of leaves.entries()) {
    if (builder.varies[leaf] === 0) continue
    const part: Monomial = { coefficient: 1, factors: new Map() }
    if (!monomial(builder, leaf, 1, part) || part.factors.has(key)) continue
    // A parameter in P that is no factor of the product would divide, and may be zero.
    const fits = [...part.factors].every(([name, { node, power }]) =>
      power > 0 ? (all.factors.get(name)?.power ?? 0) >= power : builder.varies[node] === 0,
    )
    if (!fits) continue
    const rest = leaves.filter((_, other) => other !== at).reduce((sum, other) => builder.add(sum, other))
    take(all, part, 1)
    all.coefficient *= factor.scale
    all.factors.delete(key)
    return builder.share(leaf, rest)
  }
  return null
}

/** Divides the product by the exponent to the power `times`. */
function take(all: Monomial, zero: Monomial, times: number): void {
  all.coefficient /= zero.coefficient ** times
  for (const [key, factor] of zero.factors) {
    const known = all.factors.get(key)
    if (known === undefined) all.factors.set(key, { ...factor, power: -factor.power * times })
    else known.power -= factor.power * times
  }
}

function rebuild(builder: TapeBuilder, all: Monomial, primitives: { node: number; power: number }[]): number {
  let above = -1
  let below = -1
  let coefficient = all.coefficient
  const multiply = (node: number, by: number): number => (node < 0 ? by : builder.mul(node, by))
  for (const { node, scale, power } of all.factors.values()) {
    if (power === 0) continue
    coefficient /= scale ** power
    const factor = builder.integerPower(node, Math.abs(power))
    if (power > 0) above = multiply(above, factor)
    else below = multiply(below, factor)
  }
  for (const { node, power } of primitives) above = multiply(above, builder.integerPower(node, power))
  // The coefficient came out of quotients such as 0.1/0.1: take back what rounding has left of a short number.
  const short = Number(coefficient.toPrecision(15))
  if (Math.abs(short - coefficient) <= 4 * 2 ** -52 * Math.abs(coefficient)) coefficient = short
  const result = builder.mul(builder.constant(coefficient), above)
  return below < 0 ? result : builder.div(result, below)
}
