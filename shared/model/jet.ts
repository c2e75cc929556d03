/**
 * Truncated Taylor arithmetic on a tape: the expansion of every register along a line through the inputs.
 *
 * Exact up to rounding; registers that do not move along the line are treated as numbers. The rules of the single
 * operations are in taylor-series.ts.
 */

import { arity } from './op-codes.ts'
import { runFrom } from './run-tape.ts'
import type { Tape } from './tape.ts'
import { stepSeries, stride } from './taylor-series.ts'

/** Registers of expansions for one tape; not reentrant. */
export interface JetRunner {
  readonly tape: Tape
  /**
   * Expands all registers along s -> (x + s u; p + s w) up to `order`. `u` has as many entries as the tape has states,
   * `w` is null where the parameters stay.
   */
  run(x: Float64Array, p: Float64Array, u: Float64Array, w: Float64Array | null, order: number): void
  /** Coefficient of s^k in output `index`, after a run of at least that order. */
  coefficient(index: number, k: number): number
}

/** Makes registers of expansions for a tape. */
export function createJetRunner(tape: Tape): JetRunner {
  const values = new Float64Array(tape.registers)
  values.set(tape.constants, tape.inputs)
  const series = new Float64Array(tape.registers * stride)
  const moves = new Uint8Array(tape.registers)
  return {
    tape,
    run(x, p, u, w, order) {
      const { states, inputs } = tape
      for (let i = 0; i < inputs; i++) {
        const slope = i < states ? (u[i] as number) : w === null ? 0 : (w[i - states] as number)
        values[i] = i < states ? (x[i] as number) : (p[i - states] as number)
        moves[i] = slope === 0 ? 0 : 1
        series.fill(0, i * stride, (i + 1) * stride)
        series[i * stride] = values[i] as number
        series[i * stride + 1] = slope
      }
      runFrom(tape, values, 0)
      expand(tape, values, series, moves, order)
    },
    coefficient(index, k) {
      const register = tape.outputs[index] as number
      if (k === 0) return values[register] as number
      return moves[register] === 1 ? (series[register * stride + k] as number) : 0
    },
  }
}

function expand(tape: Tape, values: Float64Array, t: Float64Array, moves: Uint8Array, order: number): void {
  const { code, a, b, c, first } = tape
  // Constants and resting inputs need a series of their own only as operands of moving ones.
  for (let r = tape.inputs; r < first; r++) {
    moves[r] = 0
    rest(t, r, values[r] as number)
  }
  for (let i = 0; i < code.length; i++) {
    const operation = code[i] as number
    const r = first + i
    const ra = a[i] as number
    const operands = arity[operation] as number
    const rb = operands > 1 ? (b[i] as number) : 0
    const rc = operands > 2 ? (c[i] as number) : 0
    const moving =
      (moves[ra] as number) | (operands > 1 ? (moves[rb] as number) : 0) | (operands > 2 ? (moves[rc] as number) : 0)
    moves[r] = moving
    const value = values[r] as number
    if (moving === 0) {
      rest(t, r, value)
      continue
    }
    stepSeries(operation, t, r * stride, ra * stride, rb * stride, rc * stride, b[i] as number, value, order)
  }
}

function rest(t: Float64Array, register: number, value: number): void {
  const at = register * stride
  t[at] = value
  for (let k = 1; k < stride; k++) t[at + k] = 0
}
