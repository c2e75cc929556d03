/** A model as nodes of one tape builder, and the tapes that are cut from it. */

import { type Gradient, gradients } from './differentiate.ts'
import type { Definition, ModelSystem } from './expression.ts'
import { lower } from './lower.ts'
import { op } from './op-codes.ts'
import { cutTape, type Tape } from './tape.ts'
import { TapeBuilder } from './tape-builder.ts'

/** A place where the model is not smooth: `argument` is zero there; `parts` are the two quantities that meet. */
export interface Kink {
  argument: number
  parts: number[]
}

/** A model lowered into one builder; further tapes may be cut from it at any time. */
export interface ModelGraph {
  system: ModelSystem
  builder: TapeBuilder
  n: number
  m: number
  /** Node of each helper and of each right-hand side. */
  helpers: number[]
  equations: number[]
  /** Nodes that a line's own text uses, by line. */
  lines: { line: number; nodes: number[] }[]
  /** Kinks that the right-hand sides or the observed quantity depend on. */
  kinks: Kink[]
}

/** Lowers all helpers and right-hand sides into one builder. A symbol that is not declared throws. */
export function buildGraph(system: ModelSystem): ModelGraph {
  const n = system.states.length
  const m = system.parameters.length
  const builder = new TapeBuilder(n, n + m)
  const symbols = new Map<string, number>()
  system.states.forEach((state, i) => {
    symbols.set(state.key, i)
  })
  system.parameters.forEach((parameter, k) => {
    symbols.set(parameter.key, n + k)
  })
  const lines: ModelGraph['lines'] = []
  const define = (definition: Definition): number => {
    const nodes: number[] = []
    builder.onEmit = (node) => {
      nodes.push(node)
    }
    const node = lower(builder, definition.expression, symbols)
    builder.onEmit = null
    lines.push({ line: definition.line, nodes })
    return node
  }
  const helpers = system.helpers.map((helper) => {
    const node = define(helper)
    symbols.set(helper.key, node)
    return node
  })
  const equations = system.equations.map(define)
  const graph = { system, builder, n, m, helpers, equations, lines, kinks: [] }
  return { ...graph, kinks: findKinks(graph) }
}

/** Node of the observed quantity. */
export function observedNode(graph: ModelGraph): number {
  const { kind, index } = graph.system.observed
  return kind === 'state' ? index : (graph.helpers[index] as number)
}

function findKinks(graph: ModelGraph): Kink[] {
  const { builder } = graph
  const tape = cutTape(builder, graph.n, [...graph.equations, observedNode(graph)])
  const kinks: Kink[] = []
  for (let i = 0; i < tape.code.length; i++) {
    const id = tape.node[tape.first + i] as number
    const [a, b] = [builder.a[id] as number, builder.b[id] as number]
    const code = tape.code[i]
    if (code === op.abs || code === op.sign) {
      const inner = builder.code[a]
      const isSum = (inner === op.add || inner === op.sub) && !builder.isConstant(a)
      kinks.push({ argument: a, parts: isSum ? [builder.a[a] as number, builder.b[a] as number] : [a] })
    } else if (code === op.min || code === op.max) kinks.push({ argument: builder.sub(a, b), parts: [a, b] })
  }
  return kinks
}

/** Tape of F alone: outputs are the right-hand sides. */
export function functionTape(graph: ModelGraph): Tape {
  return cutTape(graph.builder, graph.n, graph.equations)
}

/** Tape of all helpers. */
export function helperTape(graph: ModelGraph): Tape {
  return cutTape(graph.builder, graph.n, graph.helpers)
}

/** Tape of F and J: outputs are the right-hand sides, then the Jacobian's entries that are not identically zero. */
export interface JacobianTape {
  tape: Tape
  /** Position i*n + j of each entry that follows the right-hand sides. */
  positions: Int32Array
}

/** One tape that computes F and its Jacobian with respect to the states. */
export function jacobianTape(graph: ModelGraph): JacobianTape {
  const { builder, n, equations } = graph
  const rows = gradients(builder, equations, range(0, n))
  const positions: number[] = []
  const entries: number[] = []
  rows.forEach((row, i) => {
    row.columns.forEach((j, k) => {
      positions.push(i * n + j)
      entries.push(row.entries[k] as number)
    })
  })
  return { tape: cutTape(builder, n, [...equations, ...entries]), positions: Int32Array.from(positions) }
}

/** Tape of dF/dp_k: one output for each right-hand side. */
export function parameterTape(graph: ModelGraph, k: number): Tape {
  const { builder, n, equations } = graph
  const zero = builder.constant(0)
  const columns = gradients(builder, equations, [n + k]).map((row) => row.entries[0] ?? zero)
  return cutTape(builder, n, columns)
}

/** Tape of the observed quantity and its gradient (dense). */
export function observedTape(graph: ModelGraph): Tape {
  const { builder, n } = graph
  const node = observedNode(graph)
  return cutTape(builder, n, [node, ...dense(graph, gradients(builder, [node], range(0, n))[0], n)])
}

/** For each kink: its argument, its parts (two), then the argument's gradient in states and in the control. */
export function kinkTape(graph: ModelGraph): Tape {
  const { builder, n, kinks, system } = graph
  const inputs = [...range(0, n), n + system.control]
  const rows = gradients(
    builder,
    kinks.map((kink) => kink.argument),
    inputs,
  )
  const outputs = kinks.flatMap((kink, k) => [
    kink.argument,
    kink.parts[0] ?? kink.argument,
    kink.parts[1] ?? builder.constant(0),
    ...dense(graph, rows[k], n + 1),
  ])
  return cutTape(builder, n, outputs)
}

function dense(graph: ModelGraph, row: Gradient | undefined, length: number): number[] {
  const out = new Array<number>(length).fill(graph.builder.constant(0))
  row?.columns.forEach((column, k) => {
    out[column] = row.entries[k] as number
  })
  return out
}

function range(from: number, count: number): number[] {
  return Array.from({ length: count }, (_, i) => from + i)
}
