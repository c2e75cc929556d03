import type { CardEvent } from './events.ts'
import { controlFigure, gapFigure, withUnit } from './figures.ts'
import type { StateAt } from './states-at.ts'
import type { Subject } from './subject.ts'

/** One step of the arrow keys: about a two-hundredth of the range, rounded to 1, 2 or 5 times a power of ten. */
export function stepOf({ control }: Subject): number {
  const rough = (control.high - control.low) / 200
  if (!(rough > 0)) return 1
  const power = 10 ** Math.floor(Math.log10(rough))
  const lead = rough / power
  // The nearest on a logarithmic scale: the bounds are the square roots of 2, 10 and 50.
  return (lead < 1.41 ? 1 : lead < 3.16 ? 2 : lead < 7.07 ? 5 : 10) * power
}

export const withinRange = (p: number, { control }: Subject): number => Math.min(control.high, Math.max(control.low, p))

/** True where the sweep reached `p`. */
export const inRange = (p: number, { control }: Subject): boolean => p >= control.low && p <= control.high

/** The value on the grid of steps that is nearest, so that a drag gives numbers people would type. */
export function snapped(p: number, subject: Subject): number {
  const step = stepOf(subject)
  const places = Math.max(0, -Math.floor(Math.log10(step)))
  const value = Math.round(p / step) * step
  return withinRange(places <= 20 ? Number(value.toFixed(places)) : value, subject)
}

/** Where a key takes the running point; null for keys that mean nothing here. */
export function movedByKey(
  key: string,
  shift: boolean,
  at: number,
  subject: Subject,
  events: readonly CardEvent[],
): number | null {
  const step = stepOf(subject) * (shift ? 10 : 1)
  switch (key) {
    case 'ArrowRight':
    case 'ArrowUp':
      return snapped(at + step, subject)
    case 'ArrowLeft':
    case 'ArrowDown':
      return snapped(at - step, subject)
    case 'PageUp':
      return snapped(at + stepOf(subject) * 10, subject)
    case 'PageDown':
      return snapped(at - stepOf(subject) * 10, subject)
    case 'Home':
      return subject.control.low
    case 'End':
      return subject.control.high
    case 'o':
      return nextOf(
        at,
        events.filter((event) => event.kind === 'onset'),
      )
    case 'w':
      return nextOf(
        at,
        events.filter((event) => event.kind === 'turning-point'),
      )
    default:
      return null
  }
}

/** The next of these above `at`, round to the lowest. */
function nextOf(at: number, events: readonly CardEvent[]): number | null {
  const sorted = events.map((event) => event.p).sort((a, b) => a - b)
  const margin = 1e-9 * Math.max(Math.abs(at), Math.abs(sorted.at(-1) ?? 0))
  return sorted.find((p) => p > at + margin) ?? sorted[0] ?? null
}

/** The limit of steady running nearest to `at`; null where the card has none. */
export function nearestLimit(at: number, events: readonly CardEvent[]): CardEvent | null {
  const limits = events.filter((event) => event.role === 'limit')
  return [...limits].sort((a, b) => Math.abs(a.p - at) - Math.abs(b.p - at))[0] ?? null
}

/** "3.0 below the hard onset", from the running point's side. */
export function distanceWords(at: number, event: CardEvent, subject: Subject): string {
  const name = event.name.charAt(0).toLowerCase() + event.name.slice(1)
  const size = gapFigure(Math.abs(event.p - at), event.text, subject)
  if (size === null) return `on the ${name}`
  return `${size} ${event.p > at ? 'below' : 'above'} the ${name}`
}

/** What the running point's slider says: value, whether something stable stands there, and how far the limit is. */
export function runningWords(
  at: number,
  states: readonly StateAt[],
  events: readonly CardEvent[],
  subject: Subject,
): string {
  const value = withUnit(controlFigure(at, subject), subject.control.unit)
  const stable = states.filter((state) => state.stable).length
  const standing = !inRange(at, subject)
    ? 'outside the range that was swept'
    : states.length === 0
      ? 'no steady state'
      : stable === 0
        ? 'no stable steady state'
        : stable === 1
          ? 'a stable steady state'
          : `${stable} stable steady states`
  const limit = nearestLimit(at, events)
  if (!limit) return `${value}, ${standing}`
  const distance = distanceWords(at, limit, subject)
  // On the limit itself rounding decides what is called stable: it is not said.
  return distance.startsWith('on ') ? `${value}, ${distance}` : `${value}, ${standing}, ${distance}`
}
