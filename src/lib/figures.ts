import { formatFrequency, formatNumber, type NumberStyle, superscript } from '#shared/stability/numbers.ts'
import { decimalMark, withDecimalMark } from './decimal-mark.ts'

/** A number as screens show it: shared/stability/numbers.ts with the reader's decimal mark. */
export const readerNumber = (value: number, style: Omit<NumberStyle, 'decimalMark'>): string =>
  formatNumber(value, { ...style, decimalMark })

/** A frequency as screens show it, with the reader's decimal mark. */
export const readerFrequency = (omega: number, timeUnit: string | null, digits: number): string =>
  formatFrequency(omega, timeUnit, { digits, decimalMark })

/**
 * A number in four significant digits without trailing zeros, with the true minus sign: for axis ends and other places
 * where nothing is rounded to a safe side. Very large and very small ones as 1.2×10^n in figures a reader can say.
 */
export function shortFigure(value: number): string {
  return Number.isFinite(value) ? written(Number(value.toPrecision(4))) : ''
}

/** A number as it was entered, every digit of it: what an approver compares. */
export function exactFigure(value: number | undefined): string {
  return value === undefined ? '' : written(value)
}

function written(value: number): string {
  const size = Math.abs(value)
  const text = size !== 0 && (size >= 1e6 || size < 1e-4) ? powerOfTen(value) : String(value)
  return withDecimalMark(text.replaceAll('-', '\u2212'))
}

function powerOfTen(value: number): string {
  const [digits = '', exponent = '0'] = value.toExponential().split('e')
  const power = superscript(Number(exponent))
  return digits === '1' ? `10${power}` : `${digits}×10${power}`
}
