/**
 * A tape: straight-line code over registers, each written once, cut from the builder for a chosen list of outputs.
 *
 * Registers in order: inputs (states, then parameters), constants, then one for each instruction. Instructions that
 * depend on parameters only come first, so that a backend may skip them while the parameters stay the same.
 */

import { arity, constantCode, inputCode } from './op-codes.ts'
import type { TapeBuilder } from './tape-builder.ts'

/** Straight-line code, see above; immutable. */
export interface Tape {
  /** Number of input registers. */
  readonly inputs: number
  /** Number of states: registers 0 .. states - 1; the parameters follow. */
  readonly states: number
  /** Values of the constant registers, which begin at `inputs`. */
  readonly constants: Float64Array
  /** Register of instruction 0. */
  readonly first: number
  /** Number of leading instructions that depend on parameters and constants only. */
  readonly fixed: number
  /** Total number of registers. */
  readonly registers: number
  readonly code: Uint8Array
  /** Operand registers; for `powi`, `exprel` and `bernoulli` b is a plain number. -1 where there is none. */
  readonly a: Int32Array
  readonly b: Int32Array
  readonly c: Int32Array
  /** Registers of the outputs. */
  readonly outputs: Int32Array
  /** Builder node of each register, for attribution and for the enclosure of rounded constants. */
  readonly node: Int32Array
}

/** Cuts a tape that computes the nodes `outputs`. Nothing that they do not need is on it. */
export function cutTape(builder: TapeBuilder, states: number, outputs: readonly number[]): Tape {
  const size = builder.size
  const needed = new Uint8Array(size)
  for (const id of outputs) needed[id] = 1
  for (let id = size - 1; id >= builder.inputs; id--) {
    if (needed[id] === 0 || builder.isConstant(id)) continue
    const operands = arity[builder.code[id] as number] as number
    needed[builder.a[id] as number] = 1
    if (operands > 1) needed[builder.b[id] as number] = 1
    if (operands > 2) needed[builder.c[id] as number] = 1
  }
  const register = new Int32Array(size).fill(-1)
  for (let id = 0; id < builder.inputs; id++) register[id] = id
  const constants: number[] = []
  const fixedNodes: number[] = []
  const variedNodes: number[] = []
  for (let id = builder.inputs; id < size; id++) {
    if (needed[id] === 0) continue
    if (builder.isConstant(id)) {
      register[id] = builder.inputs + constants.length
      constants.push(id)
    } else if (builder.varies[id] === 0) fixedNodes.push(id)
    else variedNodes.push(id)
  }
  const instructions = [...fixedNodes, ...variedNodes]
  const first = builder.inputs + constants.length
  const count = instructions.length
  const tape: Tape = {
    inputs: builder.inputs,
    states,
    constants: Float64Array.from(constants, (id) => builder.value[id] as number),
    first,
    fixed: fixedNodes.length,
    registers: first + count,
    code: new Uint8Array(count),
    a: new Int32Array(count).fill(-1),
    b: new Int32Array(count).fill(-1),
    c: new Int32Array(count).fill(-1),
    outputs: new Int32Array(outputs.length),
    node: new Int32Array(first + count),
  }
  for (let id = 0; id < builder.inputs; id++) tape.node[id] = id
  constants.forEach((id, k) => {
    tape.node[builder.inputs + k] = id
  })
  instructions.forEach((id, k) => {
    const code = builder.code[id] as number
    if (code === inputCode || code === constantCode) throw new Error('Inputs and constants are no instructions')
    register[id] = first + k
    tape.node[first + k] = id
    tape.code[k] = code
    const operands = arity[code] as number
    tape.a[k] = register[builder.a[id] as number] as number
    const b = builder.b[id] as number
    tape.b[k] = operands > 1 ? (register[b] as number) : b
    if (operands > 2) tape.c[k] = register[builder.c[id] as number] as number
  })
  outputs.forEach((id, k) => {
    tape.outputs[k] = register[id] as number
  })
  return tape
}
