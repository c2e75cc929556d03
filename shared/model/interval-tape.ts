/**
 * Runs a tape on intervals: an enclosure of every register over a box of states and parameters.
 *
 * Constants that were rounded when they were folded (8/3, pi/2) are enclosed, so what is proved holds for the model as
 * it is written, with its decimal numbers read as doubles.
 */

import {
  absInterval,
  addInterval,
  type Coverage,
  divInterval,
  full,
  jumpInterval,
  maxInterval,
  minInterval,
  mulInterval,
  negInterval,
  none,
  oddPowerInterval,
  partial,
  selectInterval,
  shareInterval,
  signInterval,
  subInterval,
} from '#shared/numerics/interval.ts'
import {
  acosInterval,
  asinInterval,
  atanInterval,
  circularInterval,
  coshInterval,
  expInterval,
  expm1Interval,
  log1pInterval,
  log10Interval,
  logInterval,
  logisticInterval,
  powInterval,
  powlogInterval,
  sinhInterval,
  sqrtInterval,
  tanhInterval,
  tanInterval,
} from '#shared/numerics/interval-functions.ts'
import { bernoulliInterval, exprelInterval } from '#shared/numerics/interval-quotients.ts'
import { arity, constantCode } from './op-codes.ts'
import type { Tape } from './tape.ts'
import type { TapeBuilder } from './tape-builder.ts'

/** Interval registers of one tape; not reentrant, results stand until the next run. */
export interface IntervalRunner {
  readonly tape: Tape
  readonly lo: Float64Array
  readonly hi: Float64Array
  /**
   * Encloses all registers over the box. `full`: every operation is defined and continuous on all of it; `partial`:
   * somewhere on it one is not; `none`: one is defined nowhere on it (registers after it are meaningless).
   */
  run(xlo: Float64Array, xhi: Float64Array, plo: Float64Array, phi: Float64Array): Coverage
}

/** `builder` is the one the tape was cut from; it knows how the constants came about. */
export function createIntervalRunner(tape: Tape, builder: TapeBuilder): IntervalRunner {
  const lo = new Float64Array(tape.registers)
  const hi = new Float64Array(tape.registers)
  encloseConstants(tape, builder, lo, hi)
  const { states, inputs } = tape
  let fresh = true
  let fixedCoverage: Coverage = full
  return {
    tape,
    lo,
    hi,
    run(xlo, xhi, plo, phi) {
      for (let k = states; k < inputs; k++) {
        const low = plo[k - states] as number
        const high = phi[k - states] as number
        if (lo[k] !== low || hi[k] !== high) {
          lo[k] = low
          hi[k] = high
          fresh = true
        }
      }
      for (let i = 0; i < states; i++) {
        lo[i] = xlo[i] as number
        hi[i] = xhi[i] as number
      }
      if (fresh) {
        fixedCoverage = runIntervals(tape, lo, hi, 0, tape.fixed)
        fresh = false
      }
      if (fixedCoverage === none) return none
      const coverage = runIntervals(tape, lo, hi, tape.fixed, tape.code.length)
      return coverage > fixedCoverage ? coverage : fixedCoverage
    },
  }
}

/** Bounds of the constants: exact ones are points, folded ones are computed again in intervals. */
function encloseConstants(tape: Tape, builder: TapeBuilder, lo: Float64Array, hi: Float64Array): void {
  const known = new Map<number, { low: number; high: number }>()
  const bounds = (id: number): { low: number; high: number } => {
    const value = builder.value[id] as number
    if (builder.isExact(id)) return { low: value, high: value }
    const done = known.get(id)
    if (done !== undefined) return done
    const code = builder.code[id] as number
    let result: { low: number; high: number }
    if (code === constantCode) {
      const slack = Math.abs(value) * 2 ** -52
      result = { low: value - slack, high: value + slack }
    } else {
      const operands = arity[code] as number
      const list = [builder.a[id] as number, builder.b[id] as number].slice(0, operands).map(bounds)
      const slo = Float64Array.of(list[0]?.low ?? 0, list[1]?.low ?? 0, 0)
      const shi = Float64Array.of(list[0]?.high ?? 0, list[1]?.high ?? 0, 0)
      stepInterval(code, slo, shi, 2, 0, 1, 1, builder.b[id] as number)
      result = { low: slo[2] as number, high: shi[2] as number }
    }
    known.set(id, result)
    return result
  }
  for (let r = tape.inputs; r < tape.first; r++) {
    const { low, high } = bounds(tape.node[r] as number)
    lo[r] = low
    hi[r] = high
  }
}

/** Runs instructions from .. to - 1; stops at the first that is defined nowhere. */
export function runIntervals(tape: Tape, lo: Float64Array, hi: Float64Array, from: number, to: number): Coverage {
  const { code, a, b, c, first } = tape
  let coverage: Coverage = full
  for (let i = from; i < to; i++) {
    const n = b[i] as number
    const result = stepInterval(code[i] as number, lo, hi, first + i, a[i] as number, n, c[i] as number, n)
    if (result === full) continue
    if (result === none) return none
    coverage = partial
  }
  return coverage
}

/** One instruction: register r from registers x, y, z; `n` is the plain second operand of those that have one. */
export function stepInterval(
  code: number,
  lo: Float64Array,
  hi: Float64Array,
  r: number,
  x: number,
  y: number,
  z: number,
  n: number,
): Coverage {
  switch (code) {
    case 0: // add
      addInterval(lo, hi, r, x, y)
      return full
    case 1: // sub
      subInterval(lo, hi, r, x, y)
      return full
    case 2: // mul
      mulInterval(lo, hi, r, x, y)
      return full
    case 3: // div
      return divInterval(lo, hi, r, x, y)
    case 4: // neg
      negInterval(lo, hi, r, x)
      return full
    case 5: // powi
      oddPowerInterval(lo, hi, r, x, n)
      return full
    case 6: // pow
      return powInterval(lo, hi, r, x, y)
    case 7: // powlog
      return powlogInterval(lo, hi, r, x, y)
    case 8: // sqrt
      return sqrtInterval(lo, hi, r, x)
    case 9: // exp
      expInterval(lo, hi, r, x)
      return full
    case 10: // log
      return logInterval(lo, hi, r, x)
    case 11: // log10
      return log10Interval(lo, hi, r, x)
    case 12: // log1p
      return log1pInterval(lo, hi, r, x)
    case 13: // expm1
      expm1Interval(lo, hi, r, x)
      return full
    case 14: // sin
      circularInterval(lo, hi, r, x, 0)
      return full
    case 15: // cos
      circularInterval(lo, hi, r, x, 1)
      return full
    case 16: // tan
      return tanInterval(lo, hi, r, x)
    case 17: // asin
      return asinInterval(lo, hi, r, x)
    case 18: // acos
      return acosInterval(lo, hi, r, x)
    case 19: // atan
      atanInterval(lo, hi, r, x)
      return full
    case 20: // sinh
      sinhInterval(lo, hi, r, x)
      return full
    case 21: // cosh
      coshInterval(lo, hi, r, x)
      return full
    case 22: // tanh
      tanhInterval(lo, hi, r, x)
      return full
    case 23: // exprel
      exprelInterval(lo, hi, r, x, n)
      return full
    case 24: // bernoulli
      bernoulliInterval(lo, hi, r, x, n)
      return full
    case 25: // logistic
      logisticInterval(lo, hi, r, x)
      return full
    case 26: // abs
      absInterval(lo, hi, r, x)
      return full
    case 27: // sign
      return signInterval(lo, hi, r, x)
    case 28: // min
      minInterval(lo, hi, r, x, y)
      return full
    case 29: // max
      maxInterval(lo, hi, r, x, y)
      return full
    case 30: // select
      selectInterval(lo, hi, r, x, y, z)
      return full
    case 31: // jump
      return jumpInterval(lo, hi, r, x)
    case 32: // share
      return shareInterval(lo, hi, r, x, y)
    default:
      lo[r] = Number.NEGATIVE_INFINITY
      hi[r] = Number.POSITIVE_INFINITY
      return partial
  }
}
