import { describe, expect, test } from 'vitest'
import { frequencyText, onsetText, otherLimit, standsOnGround } from '#src/lib/onset-figures.ts'
import { rowNote } from '#src/lib/row-note.ts'
import { stripText } from '#src/lib/strip-text.ts'
import {
  fallingCard,
  foldCard,
  gapCard,
  hardCard,
  nowhereCard,
  onset,
  steadyCard,
  summary,
  undecidedCard,
} from './fixtures.ts'

describe('figures of a row', () => {
  test('an onset is rounded to the safe side: down where the danger is above, up where it is below', () => {
    expect(onsetText(onset(6.9189, 'hard'))).toBe('6.918')
    expect(onsetText(onset(38.4312, 'hard', { direction: -1 }))).toBe('38.44')
  })

  test('a limit without an onset is rounded away from the danger as well', () => {
    expect(otherLimit(summary({ otherEnds: [{ p: 50.0078, kind: 'fold' }] }))).toEqual({
      text: '50.00',
      word: 'turning point',
    })
    expect(otherLimit(summary({ otherEnds: [{ p: 10.0012, kind: 'branch-point' }] }))).toEqual({
      text: '10.01',
      word: 'branch point',
    })
    expect(otherLimit(summary())).toBeNull()
  })

  test('the nearest of two limits is named', () => {
    const card = summary({
      otherEnds: [
        { p: 0.5, kind: 'box-left' },
        { p: 45, kind: 'fold' },
      ],
    })
    expect(otherLimit(card)?.word).toBe('turning point')
  })

  test('frequencies keep short figures: kHz, Hz, mHz, per day, or per the model’s own time', () => {
    const turns = (cycles: number) => 2 * Math.PI * cycles
    expect(frequencyText(turns(2.32), 's')).toEqual({ figure: '2.32', unit: 'Hz' })
    expect(frequencyText(turns(2.32), 'ms')).toEqual({ figure: '2.32', unit: 'kHz' })
    // 0.96 a minute is 0.016 a second.
    expect(frequencyText(turns(0.96), 'min')).toEqual({ figure: '16.0', unit: 'mHz' })
    expect(frequencyText(turns(0.25), 'd')).toEqual({ figure: '0.250', unit: 'per day' })
    expect(frequencyText(turns(0.032), 'tau')).toEqual({ figure: '0.0320', unit: 'per tau' })
    expect(frequencyText(turns(0.032), '')).toEqual({ figure: '0.0320', unit: 'per time unit' })
  })

  test('the running point stands on ground only between the ends of a stretch', () => {
    expect(standsOnGround(summary())).toBe(true)
    expect(standsOnGround(summary({ control: { value: 60 } }))).toBe(false)
    expect(standsOnGround(nowhereCard)).toBe(false)
  })
})

describe('note of a row', () => {
  const note = (
    card: Parameters<typeof rowNote>[0]['card'],
    draftKind: Parameters<typeof rowNote>[0]['draftKind'] = null,
  ) => rowNote({ card, draftKind })

  test('a draft that changes the verdict says so', () => {
    expect(note(summary(), 'hard')).toBe('Draft turns it hard')
    expect(note(null, 'none')).toBe('Draft leaves it without an onset in range')
  })

  test('a model that is not steady where it runs says that first, and the draft all the same', () => {
    const card = summary({ control: { value: 60 } })
    expect(note(card)).toBe('Not steady where it runs')
    expect(note(card, 'hard')).toBe('Not steady where it runs. Draft turns it hard')
    expect(note(nowhereCard)).toBe('Nowhere steady in its range')
  })

  test('what the figures alone do not show is named', () => {
    expect(note(steadyCard)).toBe('Stable over the whole range')
    expect(note(undecidedCard)).toBe('Soft or hard is too close to call')
    expect(note(gapCard)).toBe('Unstable from 30.00 to 70.00')
    const two = summary({
      ground: [{ from: 20, to: 70 }],
      onsets: [onset(20, 'soft', { direction: -1 }), onset(70, 'hard')],
      main: 1,
    })
    expect(note(two)).toBe('Two limits: soft at 20.00 from below')
  })

  test('where the figures say it all there is no note', () => {
    expect(note(summary())).toBeNull()
    expect(note(hardCard)).toBeNull()
    expect(note(foldCard)).toBeNull()
  })
})

describe('words of a strip', () => {
  test('range, ground, onset with its direction and the running point', () => {
    expect(stripText(summary())).toBe(
      'running speed from 0 to 100 m/s. Stable from 0 to 50. Soft onset at 50, rising. Running at 40.',
    )
    expect(stripText(gapCard)).toContain('Stable from 0 to 30, and from 70 to 100.')
  })

  test('a hard onset never states a recovery before cycles are computed', () => {
    const text = stripText(fallingCard)
    expect(text).toContain('Hard onset at 60, falling. Where it comes back is not computed yet.')
    expect(text).not.toMatch(/recover|at once|any size/i)
  })

  test('an onset where nothing stable is lost is left out', () => {
    expect(stripText(summary({ onsets: [onset(50, 'soft'), onset(80, 'hard', { operating: false })] }))).not.toContain(
      '80',
    )
  })
})
