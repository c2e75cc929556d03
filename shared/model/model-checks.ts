/** Two questions about a point that a card has to answer before it trusts a derivative: is it smooth, is it finite? */

import { gradients } from './differentiate.ts'
import type { Expression, ModelSystem } from './expression.ts'
import { kinkTape, type ModelGraph } from './model-graph.ts'
import { arity, op } from './op-codes.ts'
import { createRunner } from './run-tape.ts'
import { cutTape } from './tape.ts'

const kinked = new Set(['abs', 'sign', 'min', 'max'])

/** Does any line of the model call abs, sign, min or max, whether or not a right-hand side depends on it? */
export function usesKinks(system: ModelSystem): boolean {
  const seen = new Set<Expression>()
  const stack = [...system.helpers, ...system.equations].map((definition) => definition.expression)
  for (let e = stack.pop(); e !== undefined; e = stack.pop()) {
    if (seen.has(e)) continue
    seen.add(e)
    if (e.kind === 'negate') stack.push(e.of)
    else if (e.kind === 'binary') stack.push(e.left, e.right)
    else if (e.kind === 'call') {
      if (kinked.has(e.name)) return true
      stack.push(...e.args)
    }
  }
  return false
}

/**
 * Test for kinks near a point. The size of a kink's argument is measured by what it is made of: its two parts, and how
 * far it moves when a state crosses its search range or the control its own.
 */
export function findKinks(graph: ModelGraph): (x: Float64Array, p: Float64Array, tolerance: number) => boolean {
  const { system, n, kinks } = graph
  if (kinks.length === 0) return () => false
  const runner = createRunner(kinkTape(graph))
  const control = system.parameters[system.control]
  const widths = [
    ...system.states.map((state) => state.high - state.low),
    control?.low != null && control.high != null ? control.high - control.low : 0,
  ]
  const block = 3 + widths.length
  return (x, p, tolerance) => {
    runner.run(x, p)
    for (let k = 0; k < kinks.length; k++) {
      const at = k * block
      let scale = Math.abs(runner.output(at + 1)) + Math.abs(runner.output(at + 2))
      let moves = false
      for (let j = 0; j <= n; j++) {
        const slope = Math.abs(runner.output(at + 3 + j)) * (widths[j] as number)
        if (slope > 0) moves = true
        if (Number.isFinite(slope)) scale += slope
      }
      if (moves && Math.abs(runner.output(at)) <= tolerance * scale) return true
    }
    return false
  }
}

/** Lines whose own operations give a value or a slope that is not finite. */
export function nonFiniteLines(graph: ModelGraph): (x: Float64Array, p: Float64Array) => number[] {
  const { builder, n, equations, helpers, lines, system } = graph
  const used = [...new Set([...equations, ...helpers])]
  const runner = createRunner(cutTape(builder, n, used))
  const register = new Map<number, number>()
  runner.tape.node.forEach((node, r) => {
    register.set(node, r)
  })
  const inputs = Array.from({ length: n + 1 }, (_, i) => (i < n ? i : n + system.control))
  const rows = gradients(builder, equations, inputs)
  const slopes = createRunner(
    cutTape(
      builder,
      n,
      rows.flatMap((row) => row.entries),
    ),
  )
  return (x, p) => {
    runner.run(x, p)
    const r = runner.registers
    const value = (node: number): number => r[register.get(node) ?? -1] ?? 0
    const found = new Set<number>()
    for (const { line, nodes } of lines) {
      for (const node of nodes) if (register.has(node) && isFault(graph, node, value)) found.add(line)
    }
    if (found.size === 0) {
      // A slope can overflow although each operation's own derivative is finite: name the equation it belongs to.
      slopes.run(x, p)
      let at = 0
      rows.forEach((row, i) => {
        const finite = row.entries.every((_, k) => Number.isFinite(slopes.output(at + k)))
        at += row.entries.length
        const equation = system.equations[i]
        if (equation !== undefined && (!finite || !Number.isFinite(value(equations[i] as number))))
          found.add(equation.line)
      })
    }
    return [...found].sort((i, j) => i - j)
  }
}

/** Is this the operation where a value or a slope stops being finite, its operands being finite? */
function isFault(graph: ModelGraph, node: number, value: (node: number) => number): boolean {
  const { builder } = graph
  if (builder.isConstant(node)) return false
  const code = builder.code[node] as number
  const operands = [builder.a[node] as number, builder.b[node] as number, builder.c[node] as number].slice(
    0,
    arity[code],
  )
  if (!operands.every((operand) => Number.isFinite(value(operand)))) return false
  if (!Number.isFinite(value(node))) return true
  if (builder.varies[node] === 0) return false
  const [a, b] = [value(operands[0] ?? node), value(operands[1] ?? node)]
  switch (code) {
    case op.sqrt:
      return a === 0
    case op.asin:
    case op.acos:
      return Math.abs(a) === 1
    case op.pow:
      return a === 0 && builder.varies[operands[0] ?? node] === 1 && b < 1 && b !== 0
    default:
      return false
  }
}
