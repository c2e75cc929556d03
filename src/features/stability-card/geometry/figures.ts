import type { HopfPoint } from '#shared/model/card-document.ts'
import { fromSuperscript, type Rounding } from '#shared/stability/numbers.ts'
import { decimalMark, withDecimalMark } from '#src/lib/decimal-mark.ts'
import { readerFrequency, readerNumber } from '#src/lib/figures.ts'
import type { Subject } from './subject.ts'

/** Digits a value of the control carries: those of the list rows and the sentence, so that one onset is one number. */
const controlDigits = 4
/** Digits of everything else: enough to compare, not more than a model warrants. */
const digits = 3

/** A value of the control as the drawing prints it. What is smaller than a billionth of the range is zero. */
export function controlFigure(value: number, { control }: Subject, rounding: Rounding = 'nearest'): string {
  return readerNumber(value, { digits: digitsFor(value, control), rounding, noise: noiseOf(control) })
}

const noiseOf = (range: { low: number; high: number }) => 1e-9 * (range.high - range.low)

/**
 * At least four significant digits, and as many more as tell values apart that lie a thousandth of the range from each
 * other: on a range from 1000 to 1001 four digits would print one number for all.
 */
function digitsFor(value: number, range: { low: number; high: number }): number {
  const step = (range.high - range.low) * 1e-3
  const size = Math.abs(value)
  if (!(step > 0) || size === 0) return controlDigits
  return Math.min(12, Math.max(controlDigits, Math.floor(Math.log10(size)) - Math.floor(Math.log10(step)) + 1))
}

/**
 * A distance to a value of the control, with as many decimals as that value is printed with and never rounded up; null
 * where it is less than the last of them.
 */
export function gapFigure(gap: number, beside: string, subject: Subject): string | null {
  if (gap <= noiseOf(subject.control)) return null
  if (beside.includes('×')) return controlFigure(gap, subject, 'down')
  const decimals = beside.split(decimalMark)[1]?.length ?? 0
  const factor = 10 ** decimals
  const cut = Math.floor(gap * factor * (1 + 1e-9)) / factor
  return cut > 0 ? withDecimalMark(cut.toFixed(decimals)) : controlFigure(gap, subject, 'down')
}

/**
 * Which way an onset is rounded: to its safe side. Where stability is lost as the control rises the danger lies above, so
 * it is rounded down; where it is lost as the control falls, up. A pair that is no limit is rounded to the nearest.
 */
export function safeSide(point: Pick<HopfPoint, 'crossing' | 'operating'>): Rounding {
  if (!point.operating || point.crossing === 0) return 'nearest'
  return point.crossing > 0 ? 'down' : 'up'
}

/** A number of any other kind: three significant digits, to the nearest. */
export const figure = (value: number, count: number = digits): string => readerNumber(value, { digits: count })

/** A value of the observed quantity; what is rounding of its box is zero. */
export function observedFigure(value: number, { box }: Subject, count: number = digits): string {
  return readerNumber(value, { digits: count, noise: boxNoise(box) })
}

/**
 * A number of a table that people copy from: ASCII minus and point, e-notation where a power of ten is needed, so that
 * any program reads it. What is not larger than `noise` is zero.
 */
export function copiedFigure(value: number, count: number, noise = 0): string {
  if (!Number.isFinite(value)) return ''
  return Math.abs(value) <= noise ? '0' : String(Number(value.toPrecision(count)))
}

/** A figure's text for copying: with ASCII minus and point, whatever the reader's own are. */
export const copiedText = (text: string): string =>
  text
    .replaceAll('\u2212', '-')
    .replaceAll(decimalMark, '.')
    .replaceAll(/ ?× ?10([⁻⁰¹²³⁴⁵⁶⁷⁸⁹]+)/g, (_, power: string) => `e${fromSuperscript(power).replace('\u2212', '-')}`)

/** A value of the observed quantity for copying; what is rounding of its box is zero. */
export const copiedObserved = (value: number, { box }: Subject, count: number): string =>
  copiedFigure(value, count, boxNoise(box))

const boxNoise = (box: Subject['box']) => (box ? 1e-12 * (box.high - box.low) : 0)

/** With its sign, for coefficients and rates, where the sign is the message. */
export function signedFigure(value: number, count: number = digits): string {
  return value > 0 ? `+${figure(value, count)}` : figure(value, count)
}

/** "2.32 Hz", or cycles per time unit where the time unit is not known. */
export const frequencyFigure = (omega: number, { timeUnit }: Subject): string =>
  readerFrequency(omega, timeUnit === '' ? null : timeUnit, digits)

/** "14.6 rad/s" or "14.6 rad per time unit". */
export const angularFigure = (omega: number, { timeUnit }: Subject): string =>
  `${figure(omega)} ${timeUnit ? `rad/${timeUnit}` : 'rad per time unit'}`

/** A number with its unit, if it has one. */
export const withUnit = (text: string, unit: string): string => (unit ? `${text} ${unit}` : text)

/** The unit of a rate: one over the time unit. */
export const rateUnit = ({ timeUnit }: Subject): string => (timeUnit ? `1/${timeUnit}` : '1/time')

const compound = (unit: string) => (/[\s*/^()]/.test(unit) ? `(${unit})` : unit)

/** The unit of the crossing rate: growth rate for a unit of the control. */
export function crossingUnit(subject: Subject): string {
  const { unit } = subject.control
  return unit ? `1/${subject.timeUnit || 'time'} per ${unit}` : rateUnit(subject)
}

/** The unit of the cubic coefficient: growth rate over the square of the observed amplitude. */
export function cubicUnit(subject: Subject): string {
  const { unit } = subject.observed
  return unit ? `${compound(unit)}⁻² ${compound(subject.timeUnit || 'time')}⁻¹` : rateUnit(subject)
}
