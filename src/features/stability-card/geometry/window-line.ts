import type { StabilityCard } from '#shared/model/card-document.ts'
import type { CardEvent } from './events.ts'
import { controlFigure } from './figures.ts'
import type { Frame } from './frame.ts'
import type { Box } from './points.ts'
import type { Subject } from './subject.ts'
import { wordsWidth } from './text-width.ts'

/** The dimension line of steady running at the top of the drawing. */
export interface WindowLine {
  left: number
  right: number
  y: number
  /** False where the end is only the end of what was swept: no arrow, no claim. */
  leftIsLimit: boolean
  rightIsLimit: boolean
  text: string
  textX: number
  anchor: 'start' | 'middle' | 'end'
  box: Box
}

const isLimit = (kind: string) => kind === 'onset' || kind === 'fold' || kind === 'branch-point'

type WindowEnd = NonNullable<StabilityCard['window']>['low']

function endText(
  p: number,
  end: WindowEnd,
  side: 'low' | 'high',
  subject: Subject,
  events: readonly CardEvent[],
): string {
  const kind = end.kind === 'fold' ? 'turning-point' : end.kind
  const event = events.find((candidate) => candidate.kind === kind && candidate.index === end.index)
  return event?.text ?? controlFigure(p, subject, side === 'low' ? 'up' : 'down')
}

/** "steady up to 58.0", "steady from 4.42 to 14.0", "steady over the whole range". */
function wordsFor(
  window: NonNullable<StabilityCard['window']>,
  subject: Subject,
  events: readonly CardEvent[],
): string {
  const low = endText(window.from, window.low, 'low', subject, events)
  const high = endText(window.to, window.high, 'high', subject, events)
  const whole = window.low.kind === 'range-end' && window.high.kind === 'range-end'
  if (whole) return 'steady over the whole range'
  if (window.low.kind === 'range-end') return `steady up to ${high}`
  if (window.high.kind === 'range-end') return `steady from ${low} up`
  return `steady ${low} to ${high}`
}

/** Null where nothing steady runs. Words wider than the window go left of it, else right. */
export function windowLine(
  card: StabilityCard,
  subject: Subject,
  events: readonly CardEvent[],
  frame: Frame,
): WindowLine | null {
  const window = card.window
  if (!window) return null
  const { plot } = frame
  const left = Math.max(plot.left, frame.x.toPixel(window.from))
  const right = Math.min(plot.right, frame.x.toPixel(window.to))
  const y = plot.top + 16
  const text = wordsFor(window, subject, events)
  const width = wordsWidth(text, 13, true)
  const fits = right - left > width + 24
  const fitsLeft = left - plot.left > width + 12
  const anchor = fits ? 'middle' : fitsLeft ? 'end' : 'start'
  const textX = fits ? (left + right) / 2 : fitsLeft ? left - 8 : right + 8
  const from = anchor === 'middle' ? textX - width / 2 : anchor === 'end' ? textX - width : textX
  const lift = fits ? 6 : -4
  return {
    left,
    right,
    y,
    leftIsLimit: isLimit(window.low.kind),
    rightIsLimit: isLimit(window.high.kind),
    text,
    textX,
    anchor,
    box: { left: from - 4, right: from + width + 4, top: y - lift - 12, bottom: y - lift + 4 },
  }
}
