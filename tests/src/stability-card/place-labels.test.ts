import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { type LabelRequest, placeLabels } from '#src/features/stability-card/geometry/place-labels.ts'
import {
  boxAround,
  boxesMeet,
  boxWithin,
  segmentMeetsBox,
  segmentsOf,
} from '#src/features/stability-card/geometry/points.ts'

const plot = { left: 40, top: 20, right: 740, bottom: 420 }
const curve = Array.from({ length: 80 }, (_, i) => ({ x: 40 + i * 8.86, y: 220 - 120 * Math.sin(i / 12) }))
const curves = segmentsOf(curve)
const at = (i: number) => curve[i] ?? { x: 0, y: 0 }
const request = (id: string, i: number, more: Partial<LabelRequest> = {}): LabelRequest => ({
  id,
  at: at(i),
  radius: 7,
  title: `${id} onset 58.00`,
  detail: '2.32 Hz, 14.6 rad/s',
  short: '58.00',
  ...more,
})
const obstaclesFor = (requests: readonly LabelRequest[]) => ({
  curves,
  boxes: requests.map(({ at }) => boxAround(at, 7)),
  plot,
})
const place = (requests: LabelRequest[]) => placeLabels(requests, obstaclesFor(requests))

describe('labels', () => {
  const five = [
    request('soft', 8),
    request('hard', 22),
    request('third', 36),
    request('fourth', 50),
    request('fifth', 70),
  ]

  test('the same input gives the same picture', () => {
    expect(place(five)).toEqual(place(five))
  })

  test('all five find a place, whole, on no curve, mark or other label, inside the plot', () => {
    const placed = place(five)
    expect(placed.map((label) => label.id)).toEqual(five.map(({ id }) => id))
    expect(placed.every((label) => label.lines.length === 2)).toBe(true)
    for (const label of placed) {
      expect(boxWithin(label.box, plot)).toBe(true)
      expect(curves.some((segment) => segmentMeetsBox(segment, label.box))).toBe(false)
      expect(five.some((other) => boxesMeet(boxAround(other.at, 7), label.box))).toBe(false)
      expect(placed.some((other) => other !== label && boxesMeet(other.box, label.box))).toBe(false)
    }
  })

  test('an empty plot gives the place to the right, 8 px from the mark, without a leader', () => {
    const [label] = placeLabels([{ id: 'a', at: { x: 300, y: 200 }, radius: 7, title: 'onset 58' }], {
      curves: [],
      boxes: [boxAround({ x: 300, y: 200 }, 7)],
      plot,
    })
    expect(label).toMatchObject({ slot: 'right', anchor: 'start', leader: null, dot: null, x: 315 })
  })

  test('at the right edge it goes left', () => {
    const [label] = placeLabels([{ id: 'a', at: { x: 735, y: 200 }, radius: 0, title: 'onset 58' }], {
      curves: [],
      boxes: [],
      plot,
    })
    expect(label).toMatchObject({ slot: 'left', anchor: 'end' })
  })

  test('where there is room for a line only, the second line is dropped, then all but the number', () => {
    const strip = { left: 300, top: 188, right: 480, bottom: 212 }
    const [one] = placeLabels([request('a', 0, { at: { x: 310, y: 200 }, radius: 0 })], {
      curves: [],
      boxes: [],
      plot: strip,
    })
    expect(one?.lines).toEqual(['a onset 58.00'])
    const narrow = { left: 300, top: 188, right: 362, bottom: 212 }
    const [short] = placeLabels([request('a', 0, { at: { x: 310, y: 200 }, radius: 0 })], {
      curves: [],
      boxes: [],
      plot: narrow,
    })
    expect(short?.lines).toEqual(['58.00'])
  })

  test('without any room it is left to the list', () => {
    const nothing = { left: 300, top: 190, right: 310, bottom: 195 }
    expect(
      placeLabels([request('a', 0, { at: { x: 305, y: 192 } })], { curves: [], boxes: [], plot: nothing }),
    ).toEqual([])
  })

  test('a leader on a bare curve ends in a dot, one at a mark does not', () => {
    const walls = [10, 20, 30].flatMap((gap) =>
      segmentsOf([
        { x: 300 - gap, y: 200 - gap },
        { x: 300 + gap, y: 200 - gap },
        { x: 300 + gap, y: 200 + gap },
        { x: 300 - gap, y: 200 + gap },
        { x: 300 - gap, y: 200 - gap },
      ]),
    )
    const asked = (radius: number) =>
      placeLabels([{ id: 'a', at: { x: 300, y: 200 }, radius, title: 'onset 58' }], {
        curves: walls,
        boxes: [],
        plot,
      })[0]
    expect(asked(0)?.dot).toEqual({ x: 300, y: 200 })
    expect(asked(0)?.leader?.at(-1)).toEqual({ x: 300, y: 200 })
    expect(asked(7)?.dot).toBeNull()
  })

  test('what moved a little keeps its place', () => {
    const first = place(five)
    const nudged = five.map((one) => ({ ...one, at: { x: one.at.x + 2, y: one.at.y + 1 } }))
    const second = placeLabels(nudged, obstaclesFor(nudged), first)
    expect(second.map((label) => label.slot)).toEqual(first.map((label) => label.slot))
  })

  test('no label ever lies on a curve or on another label, wherever the marks are', () => {
    const marks = fc.array(fc.integer({ min: 0, max: 79 }), { minLength: 1, maxLength: 9 })
    fc.assert(
      fc.property(marks, (indices) => {
        const requests = indices.map((i, k) => request(`m${k}`, i))
        const placed = place(requests)
        for (const [k, label] of placed.entries()) {
          if (curves.some((segment) => segmentMeetsBox(segment, label.box))) return false
          if (placed.slice(k + 1).some((other) => boxesMeet(other.box, label.box))) return false
          if (!boxWithin(label.box, plot)) return false
        }
        return true
      }),
      { numRuns: 60 },
    )
  })
})
