import { scaleLinear } from 'd3-scale'
import { withDecimalMark } from '#src/lib/decimal-mark.ts'
import { type Box, pixel } from './points.ts'
import { figuresWidth } from './text-width.ts'

export interface Tick {
  at: number
  text: string
}

/** One axis of a drawing: numbers to pixels, its ticks, and the power of ten its numbers are told in (0: none). */
export interface Axis {
  low: number
  high: number
  toPixel: (value: number) => number
  fromPixel: (position: number) => number
  ticks: Tick[]
  exponent: number
}

/**
 * A linear axis from `low` to `high` laid between two pixel positions. A span of zero (one value only) is widened, so
 * that every value has a place.
 */
export function axisBetween(low: number, high: number, from: number, to: number, ticks: number): Axis {
  const size = Math.max(Math.abs(low), Math.abs(high))
  const tooNarrow = !(high - low > size * 1e-12)
  const half = size > 0 ? size * 0.5 : 1
  const [a, b] = tooNarrow ? [low - half, high + half] : [low, high]
  // Halves, so that a range as wide as numbers go does not overflow.
  const scale = scaleLinear([a / 2, b / 2], [from, to])
  const toPixel = (value: number) => pixel(scale(value / 2))
  const exponent = exponentFor(Math.max(Math.abs(a), Math.abs(b)))
  const factor = 10 ** exponent
  const inFactor = scaleLinear([a / factor, b / factor], [from, to])
  const values = inFactor.ticks(ticks)
  const format = inFactor.tickFormat(ticks, 'f')
  return {
    low: a,
    high: b,
    toPixel,
    fromPixel: (position) => scale.invert(position) * 2,
    ticks: values.map((value) => ({ at: toPixel(value * factor), text: withDecimalMark(format(value)) })),
    exponent,
  }
}

/** Numbers up to 99 999 and down to 0.001 are written out; others are told in a power of ten that is a multiple of 3. */
function exponentFor(size: number): number {
  if (size === 0 || (size < 1e5 && size >= 1e-2)) return 0
  return Math.floor(Math.log10(size) / 3) * 3
}

/** Where the parts of a drawing stand, in pixels. */
export interface Frame {
  width: number
  height: number
  plot: Box
  small: boolean
  /** Depth of the ground under the running steady state, and under any other stable one. */
  depth: number
  otherDepth: number
  x: Axis
  y: Axis
}

export interface Extent {
  low: number
  high: number
}

/** Room over the highest curve for the two dimension lines: steady running, and the running point's margin. */
const headRoom = 56

/**
 * The frame of the main drawing for a given width. Below the lowest curve there is room for the ground, above the
 * highest for the dimension line; so the vertical axis spans more than the curves do.
 */
export function frameFor(width: number, control: Extent, values: Extent): Frame {
  const small = width < 480
  const height = small ? 350 : Math.round(Math.max(400, Math.min(520, width * 0.6)))
  const depth = small ? 26 : 42
  const top = 30
  const bottom = height - (small ? 62 : 58)
  const room = bottom - top - headRoom - depth - 6
  const span = values.high - values.low
  const low = values.low - (span * (depth + 6)) / room
  const high = values.high + (span * headRoom) / room
  const y = axisBetween(low, high, bottom, top, Math.max(3, Math.round((bottom - top) / 50)))
  const widest = y.ticks.reduce((most, tick) => Math.max(most, figuresWidth(tick.text, 11)), 0)
  const left = Math.ceil(Math.max(34, widest + 14))
  const right = width - (small ? 14 : 18)
  const x = axisBetween(control.low, control.high, left, right, Math.max(3, Math.round((right - left) / 70)))
  return { width, height, plot: { left, right, top, bottom }, small, depth, otherDepth: small ? 16 : 22, x, y }
}
