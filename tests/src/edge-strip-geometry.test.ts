import { describe, expect, test } from 'vitest'
import { stripGeometry, stripHeights, unknownUndercut } from '#src/components/edge-strip-geometry.ts'
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

// Range 0 to 100 drawn 200 px wide: one unit of the control is 2 px.
const width = 200
const { level, floor } = stripHeights

describe('edge strip', () => {
  test('ground, mark and running point stand at their values', () => {
    const strip = stripGeometry(summary(), width)
    expect(strip.ground).toHaveLength(1)
    expect(strip.ground[0]).toMatchObject({ left: { kind: 'range', x: 0 }, right: { kind: 'soft', x: 100 } })
    expect(strip.marks).toEqual([{ x: 100, kind: 'soft', mirrored: false }])
    expect(strip.running).toBe(80)
    expect(strip.dashed).toEqual([{ from: 100, to: 200 }])
  })

  test('a soft end is a ramp of 34 px or 42 % of the gap, the shorter', () => {
    // Gap of 100 px: 42 % would be 42, so 34.
    const long = stripGeometry(summary(), width)
    expect(long.ramps).toEqual([{ path: `M100 ${level}L134 ${floor}` }])
    expect(long.floors).toEqual([{ from: 134, to: 200, kind: 'soft' }])
    // Gap of 20 px: 42 % is 8.4.
    const short = stripGeometry(summary({ ground: [{ from: 0, to: 90 }], onsets: [onset(90, 'soft')] }), width)
    expect(short.ramps).toEqual([{ path: `M180 ${level}L188.4 ${floor}` }])
  })

  test('a hard end has a lip and an undercut of the same depth whatever the range, because no recovery is known', () => {
    const strip = stripGeometry(hardCard, width)
    expect(strip.undercuts).toEqual([{ x: 100 - unknownUndercut }])
    expect(strip.floors).toEqual([{ from: 100 - unknownUndercut, to: 200, kind: 'hard' }])
    expect(strip.marks).toEqual([{ x: 100, kind: 'hard', mirrored: false }])
    const other = stripGeometry(
      summary({
        kind: 'hard',
        control: { low: -1000, high: 1000 },
        ground: [{ from: -1000, to: 0 }],
        onsets: [onset(0, 'hard')],
      }),
      width,
    )
    expect(other.undercuts).toEqual([{ x: 100 - unknownUndercut }])
  })

  test('a short stretch keeps a foot under its hard end', () => {
    const strip = stripGeometry(
      summary({ kind: 'hard', ground: [{ from: 40, to: 50 }], onsets: [onset(50, 'hard')] }),
      width,
    )
    // 20 px of ground: the undercut takes 60 % of it.
    expect(strip.undercuts).toEqual([{ x: 88 }])
  })

  test('a falling onset has its ground on the right and everything mirrored at its true value', () => {
    const strip = stripGeometry(fallingCard, width)
    expect(strip.ground[0]).toMatchObject({ left: { kind: 'hard', x: 120 }, right: { kind: 'range', x: 200 } })
    expect(strip.marks).toEqual([{ x: 120, kind: 'hard', mirrored: true }])
    expect(strip.undercuts).toEqual([{ x: 120 + unknownUndercut }])
    expect(strip.floors).toEqual([{ from: 0, to: 120 + unknownUndercut, kind: 'hard' }])
    expect(strip.dashed).toEqual([{ from: 0, to: 120 }])
  })

  test('ground that begins again is drawn behind a second, mirrored end', () => {
    const strip = stripGeometry(gapCard, width)
    expect(strip.ground).toHaveLength(2)
    // The gap is 80 px wide: 42 % of it is 33.6.
    expect(strip.ramps).toEqual([{ path: `M60 ${level}L93.6 ${floor}` }, { path: `M140 ${level}L106.4 ${floor}` }])
    expect(strip.floors).toEqual([{ from: 93.6, to: 106.4, kind: 'soft' }])
    expect(strip.marks.map((mark) => mark.mirrored)).toEqual([false, true])
  })

  test('between ends of different kind each keeps its mark and the floor takes the hard hue', () => {
    const strip = stripGeometry(
      summary({
        ground: [
          { from: 0, to: 30 },
          { from: 70, to: 100 },
        ],
        onsets: [onset(30, 'soft'), onset(70, 'hard', { direction: -1 })],
      }),
      width,
    )
    expect(strip.marks).toEqual([
      { x: 60, kind: 'soft', mirrored: false },
      { x: 140, kind: 'hard', mirrored: true },
    ])
    expect(strip.floors).toEqual([{ from: 93.6, to: 140 + unknownUndercut, kind: 'hard' }])
  })

  test('an undecided end drops on dots to a dotted floor', () => {
    const strip = stripGeometry(undecidedCard, width)
    expect(strip.faces).toEqual([{ x: 100, dotted: true }])
    expect(strip.floors).toEqual([{ from: 100, to: 200, kind: 'undecided' }])
  })

  test('without an onset the ground runs through and nothing is dashed', () => {
    const strip = stripGeometry(steadyCard, width)
    expect(strip.ground[0]).toMatchObject({ left: { x: 0 }, right: { x: 200 } })
    expect([strip.dashed, strip.floors, strip.marks]).toEqual([[], [], []])
  })

  test('past a turning point no state is drawn, because there is none', () => {
    const strip = stripGeometry(foldCard, width)
    expect(strip.faces).toEqual([{ x: 100, dotted: false }])
    expect(strip.marks).toEqual([{ x: 100, kind: 'turning-point', mirrored: false }])
    expect([strip.dashed, strip.floors]).toEqual([[], []])
  })

  test('ground that ends without a known limit ends with a plain face', () => {
    const strip = stripGeometry(summary({ kind: 'none', onsets: [], main: null }), width)
    expect(strip.faces).toEqual([{ x: 100, dotted: false }])
    expect(strip.marks).toEqual([])
  })

  test('where nothing is stable the whole line is dashed', () => {
    expect(stripGeometry(nowhereCard, width).dashed).toEqual([{ from: 0, to: 200 }])
  })

  test('an onset of the other direction is not taken for the end of a stretch', () => {
    // At 50 stability is gained as the control rises: it cannot be what ends ground at its right side.
    const strip = stripGeometry(summary({ onsets: [onset(50, 'hard', { direction: -1 })] }), width)
    expect(strip.marks).toEqual([])
  })

  test('a running point outside the range is not drawn at its edge', () => {
    expect(stripGeometry(summary({ control: { value: 120 } }), width).running).toBeNull()
  })
})
