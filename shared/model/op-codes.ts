/**
 * The instruction set of the tapes. Interpreters switch over the numbers themselves (a switch over literals becomes a
 * jump table, one over imported constants a chain of comparisons), each case naming its operation beside the number;
 * tests/shared/model/tape.test.ts runs every operation through every backend, so that they cannot drift apart.
 */
export const op = {
  add: 0,
  sub: 1,
  mul: 2,
  div: 3,
  neg: 4,
  /** a to the odd integer power `b >= 3` (b is the number itself, not a register). */
  powi: 5,
  /** General power. A negative base with an integer exponent is exact, with any other it is NaN. */
  pow: 6,
  /** a^b log a, the derivative of the power in its exponent; 0 at a = 0 for b > 0. */
  powlog: 7,
  sqrt: 8,
  exp: 9,
  log: 10,
  log10: 11,
  log1p: 12,
  expm1: 13,
  sin: 14,
  cos: 15,
  tan: 16,
  asin: 17,
  acos: 18,
  atan: 19,
  sinh: 20,
  cosh: 21,
  tanh: 22,
  /** `b`-th derivative of (e^a - 1)/a. */
  exprel: 23,
  /** `b`-th derivative of a/(e^a - 1). */
  bernoulli: 24,
  /** 1/(1 + e^-a). */
  logistic: 25,
  abs: 26,
  /** -1, 0 or 1. */
  sign: 27,
  min: 28,
  max: 29,
  /** b where a > 0, c where a < 0, their mean at a = 0: derivatives of min and max. */
  select: 30,
  /** Derivative of sign: 0, without bound in an interval that holds 0. */
  jump: 31,
  /** a/(a + b): saturation terms such as x^n/(K^n + x^n). As a unit its bounds over a box are sharp. */
  share: 32,
} as const

/** A constant or an input is a node of the builder, never an instruction. */
export const constantCode = 254
/** A state or parameter. */
export const inputCode = 255

/** Number of register operands by code; `powi`, `exprel` and `bernoulli` have a plain number as second operand. */
export const arity = Uint8Array.from({ length: 33 }, (_, code) => {
  if (code === op.select) return 3
  if (
    code <= op.div ||
    code === op.pow ||
    code === op.powlog ||
    code === op.min ||
    code === op.max ||
    code === op.share
  )
    return 2
  return 1
})
