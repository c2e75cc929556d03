/**
 * Contracts a box to the part that can hold a zero of F: forward evaluation in intervals, then each right-hand side is
 * cut with [0, 0] and the cut is passed back through its instructions to the states (hull consistency, HC4).
 *
 * Equations are taken from a queue and come back when a state they use has shrunk. No zero of F inside the box is ever
 * lost; points where F is not defined are cut away. Source: Benhamou, Goualard, Granvilliers & Puget, Revising hull
 * and box consistency, ICLP 1999.
 */

import { none } from '#shared/numerics/interval.ts'
import { projectBack, protect } from './interval-inverse.ts'
import { createIntervalRunner, runIntervals, stepInterval } from './interval-tape.ts'
import { arity } from './op-codes.ts'
import type { Tape } from './tape.ts'
import type { TapeBuilder } from './tape-builder.ts'

/** Contraction for one model; not reentrant. */
export interface Contractor {
  /**
   * Shrinks the box in place at the parameters `p`. False where it holds no zero of F. `effort` counts the interval
   * operations done since the contractor was made; it is what search budgets are measured in.
   */
  contract(xlo: Float64Array, xhi: Float64Array, p: Float64Array): boolean
  readonly effort: { operations: number }
}

/** Share of a state's width that must go before equations that use it are looked at again. */
const worthwhile = 0.05

/** `tape` computes F: one output for each state. */
export function createContractor(tape: Tape, builder: TapeBuilder): Contractor {
  const runner = createIntervalRunner(tape, builder)
  const { lo, hi } = runner
  const { states: n, inputs, first } = tape
  const cones = Array.from(tape.outputs, (output) => cone(tape, output))
  const users: number[][] = Array.from({ length: n }, () => [])
  cones.forEach(({ states }, i) => {
    for (const j of states) users[j]?.push(i)
  })
  const before = new Float64Array(n)
  const shared = sharedRegisters(tape, cones)
  // Last call in which a shared register was written: its cut from one equation holds for the others too.
  const written = new Int32Array(tape.registers)
  let call = 0
  const queue = new Int32Array(n + 1)
  const queued = new Uint8Array(n)
  const effort = { operations: 0 }
  let known = false
  let defined = true

  /** Parameters and what depends on them only, once for each set of parameters. False where that is undefined. */
  const setParameters = (p: Float64Array): boolean => {
    let same = known
    for (let k = n; k < inputs && same; k++) same = lo[k] === p[k - n]
    if (same) return defined
    for (let k = n; k < inputs; k++) {
      lo[k] = p[k - n] as number
      hi[k] = lo[k] as number
    }
    known = true
    defined = runIntervals(tape, lo, hi, 0, tape.fixed) !== none
    return defined
  }

  /** One equation: forward over its cone, cut, backward. False where no zero is left. */
  const revise = (i: number): boolean => {
    const { list } = cones[i] as Cone
    const { code, a, b, c } = tape
    effort.operations += 2 * list.length
    for (const k of list) {
      const n = b[k] as number
      const r = first + k
      const low = lo[r] as number
      const high = hi[r] as number
      if (stepInterval(code[k] as number, lo, hi, r, a[k] as number, n, c[k] as number, n) === none) return false
      if (shared[r] === 0) continue
      if (written[r] === call) {
        if ((lo[r] as number) < low) lo[r] = low
        if ((hi[r] as number) > high) hi[r] = high
        if ((lo[r] as number) > (hi[r] as number)) return false
      }
      written[r] = call
    }
    const output = tape.outputs[i] as number
    if ((lo[output] as number) > 0 || (hi[output] as number) < 0) return false
    if (output >= first + tape.fixed || output < n) {
      lo[output] = 0
      hi[output] = 0
    }
    for (let at = list.length - 1; at >= 0; at--) {
      const k = list[at] as number
      if (!projectBack(code[k] as number, lo, hi, first + k, a[k] as number, b[k] as number)) return false
    }
    return true
  }

  return {
    effort,
    contract(xlo, xhi, p) {
      if (!setParameters(p)) return false
      protect(n, first + tape.fixed)
      for (let j = 0; j < n; j++) {
        lo[j] = xlo[j] as number
        hi[j] = xhi[j] as number
      }
      call++
      let head = 0
      let count = cones.length
      for (let i = 0; i < cones.length; i++) {
        queue[i] = i
        queued[i] = 1
      }
      // A bound on revisits: slow convergence is left to Newton and to bisection.
      for (let visits = 0; count > 0 && visits < 12 * cones.length; visits++) {
        const i = queue[head] as number
        head = (head + 1) % queue.length
        count--
        queued[i] = 0
        const { states } = cones[i] as Cone
        for (const j of states) before[j] = (hi[j] as number) - (lo[j] as number)
        if (!revise(i)) return false
        for (const j of states) {
          const width = (hi[j] as number) - (lo[j] as number)
          if (!(width < (1 - worthwhile) * (before[j] as number))) continue
          for (const user of users[j] as number[]) {
            if (queued[user] === 1 || user === i) continue
            queue[(head + count) % queue.length] = user
            count++
            queued[user] = 1
          }
        }
      }
      for (let j = 0; j < n; j++) {
        xlo[j] = lo[j] as number
        xhi[j] = hi[j] as number
      }
      return true
    },
  }
}

/** 1 for registers of instructions that more than one equation uses. */
function sharedRegisters(tape: Tape, cones: Cone[]): Uint8Array {
  const uses = new Int32Array(tape.registers)
  for (const { list } of cones) for (const k of list) uses[tape.first + k] = (uses[tape.first + k] as number) + 1
  return Uint8Array.from(uses, (count) => (count > 1 ? 1 : 0))
}

/** The instructions that an output needs, in order, and the states it depends on. */
interface Cone {
  list: Int32Array
  states: Int32Array
}

function cone(tape: Tape, output: number): Cone {
  const { first, fixed, code, a, b, c, states: n } = tape
  const needed = new Uint8Array(tape.registers)
  needed[output] = 1
  const list: number[] = []
  for (let r = output; r >= first + fixed; r--) {
    if (needed[r] === 0) continue
    const k = r - first
    list.push(k)
    const operands = arity[code[k] as number] as number
    needed[a[k] as number] = 1
    if (operands > 1) needed[b[k] as number] = 1
    if (operands > 2) needed[c[k] as number] = 1
  }
  const states: number[] = []
  for (let j = 0; j < n; j++) if (needed[j] === 1) states.push(j)
  return { list: Int32Array.from(list.reverse()), states: Int32Array.from(states) }
}
