import type { ErrorCode } from './errors.ts'

/** A number read from a cell, or why it is none yet. */
export type NumberCell = { ok: true; value: number } | { ok: false; code: ErrorCode; message: string }

const decimal = /^[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?$/
const unclear = /^[+-]?[1-9][0-9]{0,2},[0-9]{3}$/

/**
 * Reads a number as people type it: the true minus sign and a comma as decimal mark are accepted. 1,250 is refused,
 * because half the world reads 1.25 and the other half 1250. Never gives Infinity.
 */
export function readNumberCell(typed: string): NumberCell {
  const text = typed.trim().replaceAll('\u2212', '-')
  const shown = typed.trim().slice(0, 30)
  if (unclear.test(text)) {
    const whole = text.replace(',', '')
    return {
      ok: false,
      code: 'wrong-type',
      message: `${shown} can be read in two ways. Write ${text.replace(',', '.')} or ${whole}.`,
    }
  }
  const plain = text.replace(',', '.')
  if (!decimal.test(plain)) {
    const grouped = /^[+-]?[0-9]{1,3}(?:[ ,.'\u00a0\u2009\u202f][0-9]{3})+/.test(text)
    return {
      ok: false,
      code: 'wrong-type',
      message: grouped
        ? `${shown} is not a number here: leave out the marks between thousands.`
        : `${shown} is not a number.`,
    }
  }
  const value = Number(plain)
  if (!Number.isFinite(value))
    return { ok: false, code: 'not-finite', message: `${shown} is too large (the limit is about 1.8e308).` }
  return { ok: true, value }
}
