import { describe, expect, test } from 'vitest'
import { eventsOf } from '#src/features/stability-card/geometry/events.ts'
import { controlFigure, gapFigure, safeSide } from '#src/features/stability-card/geometry/figures.ts'
import { piecesOf } from '#src/features/stability-card/geometry/pieces.ts'
import { sameOnset } from '#src/features/stability-card/geometry/readouts.ts'
import {
  distanceWords,
  movedByKey,
  runningWords,
  snapped,
  stepOf,
} from '#src/features/stability-card/geometry/running.ts'
import { statesAt } from '#src/features/stability-card/geometry/states-at.ts'
import { subjectOf } from '#src/features/stability-card/geometry/subject.ts'
import { glyphsOf } from '#src/features/stability-card/geometry/verdict.ts'
import { foldedCurve, onsetOf, straight } from './cards.ts'

const made = straight('hard')
const subject = subjectOf(made.document)
const pieces = piecesOf(made.card)
const events = eventsOf(made.card, subject, pieces)
const key = (name: string, at: number, shift = false) => movedByKey(name, shift, at, subject, events)

describe('keys of the running point', () => {
  test('one step is a round two-hundredth of the range, Shift makes it ten', () => {
    // 30 / 200 = 0.15, and the nearest of 1, 2, 5 times a power of ten is 0.2.
    expect(stepOf(subject)).toBeCloseTo(0.2, 12)
    expect(key('ArrowRight', 55)).toBe(55.2)
    expect(key('ArrowLeft', 55)).toBe(54.8)
    expect(key('ArrowRight', 55, true)).toBe(57)
    expect(key('PageDown', 55)).toBe(53)
  })

  test('Home and End are the ends of the range, beyond which nothing goes', () => {
    expect(key('Home', 55)).toBe(40)
    expect(key('End', 55)).toBe(70)
    expect(key('ArrowLeft', 40)).toBe(40)
    expect(snapped(1000, subject)).toBe(70)
  })

  test('o goes to the onset and, from there, round to it again', () => {
    expect(key('o', 55)).toBe(58)
    expect(key('o', 58)).toBe(58)
    expect(key('o', 65)).toBe(58)
  })

  test('w goes from turning point to turning point', () => {
    const folded = foldedCurve()
    const own = subjectOf(folded.document)
    const turns = eventsOf(folded.card, own, piecesOf(folded.card))
    const next = movedByKey('w', false, -0.7, own, turns)
    // p = x^3 - x at x = 1/sqrt 3.
    expect(next).toBeCloseTo(-2 / (3 * Math.sqrt(3)), 12)
    expect(movedByKey('w', false, next ?? 0, own, turns)).toBeCloseTo(2 / (3 * Math.sqrt(3)), 12)
  })

  test('other keys mean nothing here', () => {
    expect(key('x', 55)).toBeNull()
  })
})

describe('what the running point says', () => {
  const say = (at: number) => runningWords(at, statesAt(pieces, at), events, subject)
  test('its value, what stands there and how far the limit is', () => {
    expect(say(55)).toBe('55.00 m/s, a stable steady state, 3.00 below the hard onset')
    expect(say(60)).toBe('60.00 m/s, no stable steady state, 2.00 above the hard onset')
    expect(say(58)).toBe('58.00 m/s, on the hard onset')
  })

  test('a distance is never rounded up', () => {
    const [event] = events
    expect(event && distanceWords(55.0051, event, subject)).toBe('2.99 below the hard onset')
    expect(gapFigure(0.004, '58.00', subject)).toBe('0.004000')
    expect(gapFigure(0, '58.00', subject)).toBeNull()
  })
})

describe('numbers of the control', () => {
  test('an onset is rounded to the side where nothing happens yet', () => {
    const rising = { crossing: 1, operating: true }
    expect(safeSide(rising)).toBe('down')
    expect(safeSide({ crossing: -1, operating: true })).toBe('up')
    expect(safeSide({ crossing: 1, operating: false })).toBe('nearest')
    expect(controlFigure(58.0099, subject, safeSide(rising))).toBe('58.00')
    expect(controlFigure(58.0001, subject, 'up')).toBe('58.01')
  })

  test('a narrow range far from zero gets the digits that tell its values apart', () => {
    const narrow = { ...subject, control: { ...subject.control, low: 1000, high: 1001 } }
    expect(controlFigure(1000.123, narrow)).toBe('1000.123')
  })
})

describe('verdicts', () => {
  test('the onset of an earlier card is the nearest of the same direction', () => {
    const earlier = [onsetOf({ p: 44, verdict: 'soft', crossing: -1 }), onsetOf({ p: 57, verdict: 'soft' })]
    expect(sameOnset(onsetOf({ p: 50, verdict: 'hard' }), earlier)?.p).toBe(57)
    expect(sameOnset(onsetOf({ p: 50, verdict: 'hard', operating: false }), earlier)).toBeNull()
  })

  test('a window without an onset takes the glyph of its words', () => {
    expect(glyphsOf(foldedCurve().card, 'open')).toEqual(['undecided'])
    expect(glyphsOf(straight('hard').card, 'hard')).toEqual(['hard'])
  })
})
