/** Runs a tape on numbers: an interpreter over typed arrays, which works under every content security policy. */

import { bernoulli, bernoulliDerivative, exprel, exprelDerivative } from '#shared/numerics/smooth-quotients.ts'
import type { Tape } from './tape.ts'

/** Registers of one tape; runs are not reentrant, results stand until the next run. */
export interface TapeRunner {
  readonly tape: Tape
  readonly registers: Float64Array
  /** Computes all registers at the states `x` and parameters `p`. */
  run(x: Float64Array, p: Float64Array): void
  /** Value of output `k` after a run. */
  output(k: number): number
}

/** Makes registers for a tape; constants are filled in once. */
export function createRunner(tape: Tape): TapeRunner {
  const { states, inputs } = tape
  const registers = new Float64Array(tape.registers)
  registers.set(tape.constants, inputs)
  let fresh = true
  return {
    tape,
    registers,
    run(x, p) {
      // Instructions of parameters only are run again only when a parameter has changed.
      for (let k = states; k < inputs; k++) {
        const value = p[k - states] as number
        if (registers[k] !== value) {
          registers[k] = value
          fresh = true
        }
      }
      for (let i = 0; i < states; i++) registers[i] = x[i] as number
      runFrom(tape, registers, fresh ? 0 : tape.fixed)
      fresh = false
    },
    output: (k) => registers[tape.outputs[k] as number] as number,
  }
}

/** a^b log a with its limits: 0 at a = 0 for b > 0. */
export function powerTimesLog(a: number, b: number): number {
  if (a === 0 && b > 0) return 0
  return a ** b * Math.log(a)
}

/** Runs the instructions from `start` on; the cases are the codes of op-codes.ts. */
export function runFrom(tape: Tape, r: Float64Array, start: number): void {
  const { code, a, b, c, first } = tape
  const count = code.length
  for (let i = start; i < count; i++) {
    const x = r[a[i] as number] as number
    let value: number
    switch (code[i]) {
      case 0: // add
        value = x + (r[b[i] as number] as number)
        break
      case 1: // sub
        value = x - (r[b[i] as number] as number)
        break
      case 2: // mul
        value = x * (r[b[i] as number] as number)
        break
      case 3: // div
        value = x / (r[b[i] as number] as number)
        break
      case 4: // neg
        value = -x
        break
      case 5: {
        // powi: odd power
        const square = x * x
        value = x * square
        for (let k = b[i] as number; k > 3; k -= 2) value *= square
        break
      }
      case 6: // pow
        value = x ** (r[b[i] as number] as number)
        break
      case 7: // powlog
        value = powerTimesLog(x, r[b[i] as number] as number)
        break
      case 8: // sqrt
        value = Math.sqrt(x)
        break
      case 9: // exp
        value = Math.exp(x)
        break
      case 10: // log
        value = Math.log(x)
        break
      case 11: // log10
        value = Math.log10(x)
        break
      case 12: // log1p
        value = Math.log1p(x)
        break
      case 13: // expm1
        value = Math.expm1(x)
        break
      case 14: // sin
        value = Math.sin(x)
        break
      case 15: // cos
        value = Math.cos(x)
        break
      case 16: // tan
        value = Math.tan(x)
        break
      case 17: // asin
        value = Math.asin(x)
        break
      case 18: // acos
        value = Math.acos(x)
        break
      case 19: // atan
        value = Math.atan(x)
        break
      case 20: // sinh
        value = Math.sinh(x)
        break
      case 21: // cosh
        value = Math.cosh(x)
        break
      case 22: // tanh
        value = Math.tanh(x)
        break
      case 23: // exprel
        value = b[i] === 0 ? exprel(x) : exprelDerivative(x, b[i] as number)
        break
      case 24: // bernoulli
        value = b[i] === 0 ? bernoulli(x) : bernoulliDerivative(x, b[i] as number)
        break
      case 25: // logistic
        value = 1 / (1 + Math.exp(-x))
        break
      case 26: // abs
        value = Math.abs(x)
        break
      case 27: // sign
        value = Math.sign(x)
        break
      case 28: // min
        value = Math.min(x, r[b[i] as number] as number)
        break
      case 29: // max
        value = Math.max(x, r[b[i] as number] as number)
        break
      case 30: {
        // select
        const positive = r[b[i] as number] as number
        const negative = r[c[i] as number] as number
        value = x > 0 ? positive : x < 0 ? negative : x === 0 ? 0.5 * (positive + negative) : Number.NaN
        break
      }
      case 31: // jump
        value = Number.isNaN(x) ? x : 0
        break
      case 32: // share
        value = x / (x + (r[b[i] as number] as number))
        break
      default:
        value = Number.NaN
    }
    r[first + i] = value
  }
}
