import type { HopfPoint } from '#shared/model/card-document.ts'
import { readerNumber } from '#src/lib/figures.ts'
import { type CardEvent, lookOf } from './events.ts'
import {
  angularFigure,
  controlFigure,
  crossingUnit,
  cubicUnit,
  figure,
  frequencyFigure,
  gapFigure,
  rateUnit,
  safeSide,
  signedFigure,
} from './figures.ts'
import { inRange } from './running.ts'
import type { StateAt } from './states-at.ts'
import type { Subject } from './subject.ts'

/** One number under the drawing: what it is, the figure, its unit, and one line that puts it in proportion. */
export interface Readout {
  label: string
  figure: string
  unit: string
  note: string
  /** It is not what the earlier revision had. */
  changed: boolean
}

/** The error, where it reaches the digits shown. */
function errorText({ cubic, cubicError }: HopfPoint): string {
  return cubicError === null || cubicError <= 5e-4 * Math.abs(cubic ?? 0)
    ? ''
    : `± ${readerNumber(cubicError, { digits: 1, rounding: 'up' })}`
}

function cubicNote(point: HopfPoint): string {
  if (point.cubic === null) return 'the observed quantity does not move to first order'
  const sign = { soft: 'below zero: soft', hard: 'above zero: hard', undecided: 'not told from zero' }[
    lookOf(point.verdict)
  ]
  return [sign, errorText(point)].filter(Boolean).join(', ')
}

function distanceReadout(point: HopfPoint, at: number, subject: Subject): Readout {
  const size = gapFigure(Math.abs(point.p - at), controlFigure(point.p, subject), subject)
  const side = point.p > at ? 'the onset lies above' : 'the onset lies below'
  return {
    label: 'From running to onset',
    figure: size ?? '0',
    unit: subject.control.unit,
    note: size === null ? 'running at the onset' : side,
    changed: false,
  }
}

const safeWords = { down: 'rounded down', up: 'rounded up', nearest: 'not a limit' } as const

const cubicFigure = ({ cubic }: HopfPoint) => (cubic === null ? 'none' : signedFigure(cubic))

/** The numbers of one onset. `before` is the same onset on the earlier card: then each says what it was. */
export function onsetReadouts(point: HopfPoint, before: HopfPoint | null, at: number, subject: Subject): Readout[] {
  const readout = (label: string, unit: string, note: string, read: (of: HopfPoint) => string): Readout => {
    const now = read(point)
    const was = before && read(before)
    const changed = was !== null && was !== now
    return { label, figure: now, unit, note: changed ? `was ${was}` : note, changed }
  }
  const unitOfFrequency = frequencyFigure(point.omega, subject).split(' ').slice(1).join(' ')
  return [
    readout('Onset', subject.control.unit, safeWords[safeSide(point)], (of) =>
      controlFigure(of.p, subject, safeSide(of)),
    ),
    distanceReadout(point, at, subject),
    readout(
      'Frequency',
      unitOfFrequency,
      angularFigure(point.omega, subject),
      (of) => frequencyFigure(of.omega, subject).split(' ')[0] ?? '',
    ),
    readout('Cubic coefficient', point.cubic === null ? '' : cubicUnit(subject), cubicNote(point), cubicFigure),
    readout('Crossing rate', crossingUnit(subject), 'of the growth rate', (of) => signedFigure(of.crossing)),
  ]
}

/** The numbers of a limit that is no onset: a turning point, a branch point. */
export function limitReadouts(limit: CardEvent, at: number, subject: Subject): Readout[] {
  const { unit } = subject.control
  const size = gapFigure(Math.abs(limit.p - at), limit.text, subject)
  const side = limit.p > at ? 'it lies above' : 'it lies below'
  return [
    { label: limit.name, figure: limit.text, unit, note: limit.detail, changed: false },
    {
      label: `From running to ${limit.name.toLowerCase()}`,
      figure: size ?? '0',
      unit,
      note: size === null ? 'running at it' : side,
      changed: false,
    },
  ]
}

/** The growth rate of the slowest disturbance at the running point, and how long it takes to halve or double. */
export function growthReadout(state: StateAt | null, at: number, subject: Subject): Readout {
  const label = `Growth rate at ${controlFigure(at, subject)}`
  const { timeUnit } = subject
  if (!state || state.growth === null)
    return {
      label,
      figure: 'none',
      unit: '',
      note: inRange(at, subject) ? 'no steady state here' : 'outside the range that was swept',
      changed: false,
    }
  const { growth } = state
  const time = growth === 0 ? '' : `${figure(Math.LN2 / Math.abs(growth))} ${timeUnit || 'time units'}`
  const note = growth === 0 ? 'neither grows nor dies out' : `${growth < 0 ? 'halves' : 'doubles'} in ${time}`
  return { label, figure: signedFigure(growth), unit: rateUnit(subject), note, changed: false }
}

/** The onset of the earlier card that stands where this one stands: of the same direction, the nearest. */
export function sameOnset(point: HopfPoint, earlier: readonly HopfPoint[]): HopfPoint | null {
  const alike = earlier.filter(
    (other) => other.operating === point.operating && Math.sign(other.crossing) === Math.sign(point.crossing),
  )
  return alike.sort((a, b) => Math.abs(a.p - point.p) - Math.abs(b.p - point.p))[0] ?? null
}
