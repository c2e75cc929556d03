/**
 * Numbers as people read them: significant digits, rounding to the safe side, a true minus sign, the reader's decimal
 * mark. Fields, copying and files do not use this (ASCII minus and point there).
 */
export type Rounding = 'nearest' | 'down' | 'up'

export interface NumberStyle {
  /** Significant digits, 1 to 15. */
  digits: number
  /** `down` where the danger lies above the value, `up` where it lies below; both in the sense of the number line. */
  rounding?: Rounding
  /** Size below which a value is rounding noise and reads as 0 (for an onset: 1e-9 of the control range). */
  noise?: number
  decimalMark?: '.' | ','
}

/** Rounding error of a computed value, relative: 57.999999999999 is 58, not "57.9 to be safe". */
const snap = 1e-9

const plainDigits = '-0123456789'
const raisedDigits = '⁻⁰¹²³⁴⁵⁶⁷⁸⁹'

function exponentOf(size: number): number {
  const exponent = Math.floor(Math.log10(size))
  // log10 may be off by one unit in the last place at powers of ten
  if (size >= 10 ** (exponent + 1)) return exponent + 1
  return size < 10 ** exponent ? exponent - 1 : exponent
}

function scaledTo(value: number, decimals: number, rounding: Rounding): number {
  const scaled = decimals >= 0 ? value * 10 ** decimals : value / 10 ** -decimals
  const nearest = Math.round(scaled)
  if (rounding === 'nearest' || Math.abs(scaled - nearest) <= snap * Math.abs(scaled)) return nearest
  return rounding === 'down' ? Math.floor(scaled) : Math.ceil(scaled)
}

/**
 * Rounds to `digits` significant digits in the given direction and returns the number (not text).
 * Within 1e-9 relative of a representable step the value is taken to be that step.
 */
export function roundTo(value: number, digits: number, rounding: Rounding = 'nearest'): number {
  if (value === 0 || !Number.isFinite(value)) return value
  const decimals = digits - 1 - exponentOf(Math.abs(value))
  const scaled = scaledTo(value, decimals, rounding)
  return decimals >= 0 ? scaled / 10 ** decimals : scaled * 10 ** -decimals
}

/** Text of a number with its warranted digits kept ("7.10"); very large and very small ones in powers of ten. */
export function formatNumber(value: number, style: NumberStyle): string {
  const { digits, rounding = 'nearest', noise = 0, decimalMark = '.' } = style
  if (!Number.isFinite(value)) return '–'
  if (Math.abs(value) <= noise) return '0'
  const rounded = roundTo(value, digits, rounding)
  if (rounded === 0) return '0'
  const size = Math.abs(rounded)
  const exponent = exponentOf(size)
  const sign = rounded < 0 ? '\u2212' : ''
  const plain = exponent >= -4 && exponent < 6
  const text = plain
    ? size.toFixed(Math.max(0, digits - 1 - exponent))
    : `${(size / 10 ** exponent).toFixed(digits - 1)} × 10${superscript(exponent)}`
  return sign + text.replace('.', decimalMark)
}

/** An integer in raised digits: -6 is "⁻⁶". */
export function superscript(exponent: number): string {
  return [...String(exponent)].map((digit) => raisedDigits.charAt(plainDigits.indexOf(digit))).join('')
}

/** Raised digits as plain ones, with the true minus sign: "⁻⁶" is "−6". Other characters are left out. */
export function fromSuperscript(raised: string): string {
  const digits = [...raised].map((digit) => plainDigits.charAt(raisedDigits.indexOf(digit)))
  return digits.join('').replace('-', '\u2212')
}

const secondsIn = new Map([
  ['ms', 1e-3],
  ['s', 1],
  ['min', 60],
  ['h', 3600],
  ['d', 86_400],
])

/**
 * Cycles of an angular frequency (radians per time unit): per second (`hertz`) where the time unit is one of ms, s, min,
 * h or d, else per time unit of the model.
 */
export function cyclesOf(omega: number, timeUnit: string | null): { value: number; hertz: boolean } {
  const cycles = omega / (2 * Math.PI)
  const seconds = timeUnit === null ? undefined : secondsIn.get(timeUnit)
  return seconds === undefined ? { value: cycles, hertz: false } : { value: cycles / seconds, hertz: true }
}

/**
 * An angular frequency (radians per time unit) as people read it: hertz where the time unit is known, else cycles per
 * time unit. Rounded to the nearest, as frequencies are.
 */
export function formatFrequency(omega: number, timeUnit: string | null, style: Omit<NumberStyle, 'rounding'>): string {
  const { value, hertz } = cyclesOf(omega, timeUnit)
  return `${formatNumber(value, style)} ${hertz ? 'Hz' : `per ${timeUnit ?? 'time unit'}`}`
}
