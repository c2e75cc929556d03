import { describe, expect, test } from 'vitest'
import { axisBetween, frameFor } from '#src/features/stability-card/geometry/frame.ts'
import { groundUnder, lipDepth } from '#src/features/stability-card/geometry/ground.ts'
import { nearOnsets, reachOfRange, reachOfSpan } from '#src/features/stability-card/geometry/near-onset.ts'
import { piecesOf } from '#src/features/stability-card/geometry/pieces.ts'
import { pathThrough, pixel, rayHit, segmentMeetsBox } from '#src/features/stability-card/geometry/points.ts'
import { evenly } from '#src/features/stability-card/geometry/resample.ts'
import { geometryOf, sceneOf } from '#src/features/stability-card/geometry/scene.ts'
import { cardOf, foldedCurve, onsetOf, straight } from './cards.ts'

const plot = { left: 0, top: 0, right: 600, bottom: 400 }
const level = [
  { x: 0, y: 200 },
  { x: 300, y: 200 },
]
/** All numbers of a path, as points. */
const pointsOf = (path: string) =>
  [...path.matchAll(/[ML](-?[\d.]+) (-?[\d.]+)/g)].map((match) => ({ x: Number(match[1]), y: Number(match[2]) }))
const none = { kind: 'none' } as const

describe('pixels', () => {
  test('are finite and to a tenth, whatever comes in', () => {
    expect(pixel(1.2345)).toBe(1.2)
    expect(pixel(Number.NaN)).toBe(0)
    expect(pixel(Number.POSITIVE_INFINITY)).toBe(1e5)
    expect(Object.is(pixel(-0.01), 0)).toBe(true)
  })

  test('one point makes no path', () => {
    expect(pathThrough([{ x: 1, y: 2 }])).toBe('')
  })

  test('a ray meets a segment where it should', () => {
    // From (0, 0) straight down to the line y = 5.
    const hit = rayHit({ x: 0, y: 0 }, { x: 0, y: 1 }, { a: { x: -1, y: 5 }, b: { x: 1, y: 5 } })
    expect(hit).toBeCloseTo(5, 12)
    expect(rayHit({ x: 0, y: 0 }, { x: 0, y: -1 }, { a: { x: -1, y: 5 }, b: { x: 1, y: 5 } })).toBeNull()
  })

  test('a segment through a box without an end in it is found', () => {
    const box = { left: 0, top: 0, right: 10, bottom: 10 }
    expect(segmentMeetsBox({ a: { x: -5, y: 5 }, b: { x: 15, y: 6 } }, box)).toBe(true)
    // Passes the corner outside.
    expect(segmentMeetsBox({ a: { x: -5, y: 4 }, b: { x: 4, y: -5 } }, box)).toBe(false)
  })

  test('even steps keep the ends and halve a straight line', () => {
    expect(evenly(level, 3)).toEqual([
      { x: 0, y: 200 },
      { x: 150, y: 200 },
      { x: 300, y: 200 },
    ])
  })
})

describe('axes', () => {
  test('a range of one value is widened, so that it has a place', () => {
    const axis = axisBetween(5, 5, 0, 100, 4)
    expect(axis.toPixel(5)).toBe(50)
  })

  test('very large and very small numbers are told in powers of ten that are multiples of three', () => {
    expect(axisBetween(0, 3e6, 0, 100, 4).exponent).toBe(6)
    expect(axisBetween(0, 2e-5, 0, 100, 4).exponent).toBe(-6)
    expect(axisBetween(0, 2e-5, 0, 100, 4).ticks.map((tick) => tick.text)).toEqual(['0', '5', '10', '15', '20'])
    expect(axisBetween(46, 66, 0, 100, 4).exponent).toBe(0)
  })

  test('the widest range there is does not overflow', () => {
    const axis = axisBetween(-1.7e308, 1.7e308, 0, 100, 4)
    expect(axis.toPixel(-1.7e308)).toBe(0)
    expect(axis.toPixel(1.7e308)).toBe(100)
    expect(axis.ticks.every((tick) => Number.isFinite(tick.at))).toBe(true)
  })

  test('below 480 pixels the drawing is 350 high and its ground 26 deep', () => {
    const small = frameFor(358, { low: 0, high: 1 }, { low: 0, high: 1 })
    expect(small).toMatchObject({ width: 358, height: 350, depth: 26, small: true })
    expect(frameFor(760, { low: 0, high: 1 }, { low: 0, high: 1 })).toMatchObject({ depth: 42, small: false })
  })
})

describe('ground', () => {
  test('is a strip of constant depth under a level line', () => {
    const shape = groundUnder(level, 42, none, none, [], plot)
    const ys = pointsOf(shape?.hatch ?? '').map(({ y }) => y)
    expect(new Set(ys)).toEqual(new Set([200, 242]))
    expect(shape?.edges).toEqual([])
  })

  test('is laid below, whichever way the branch was walked', () => {
    const shape = groundUnder([...level].reverse(), 42, none, none, [], plot)
    expect(Math.max(...pointsOf(shape?.hatch ?? '').map(({ y }) => y))).toBe(242)
  })

  test('follows the normal of a slope', () => {
    // A slope of 3 in 4: the normal that points down is (-3, 4)/5 for a line that falls to the right on the screen.
    const slope = [
      { x: 0, y: 0 },
      { x: 200, y: 150 },
    ]
    const shape = groundUnder(slope, 40, none, none, [], plot)
    const foot = pointsOf(shape?.hatch ?? '').at(-1)
    expect(foot?.x).toBeCloseTo(-24, 1)
    expect(foot?.y).toBeCloseTo(32, 1)
  })

  test('a hard end thins to a lip and is undercut; where the way back is not computed the inner face is dashed', () => {
    const shape = groundUnder(level, 42, none, { kind: 'hard', recovery: null }, [], plot)
    const dashed = shape?.edges.filter((edge) => edge.dashed) ?? []
    expect(dashed).toHaveLength(1)
    // 72 px back from the edge, from the lip's underside to the floor.
    expect(pointsOf(dashed[0]?.path ?? '')).toEqual([
      { x: 228, y: 242 },
      { x: 228, y: 200 + lipDepth },
    ])
  })

  test('a hard end whose recovery is known is undercut back to it, with a solid face', () => {
    const shape = groundUnder(level, 42, none, { kind: 'hard', recovery: 100 }, [], plot)
    expect(shape?.edges.some((edge) => edge.dashed)).toBe(false)
    const face = shape?.edges.map((edge) => pointsOf(edge.path)).find((points) => points.length === 2)
    expect(face?.every(({ x }) => Math.abs(x - 100) <= 8)).toBe(true)
  })

  test('a soft end runs out in a ramp, 24 px out and 10 px deeper than the strip, to the side of the fall', () => {
    const right = groundUnder(level, 42, none, { kind: 'soft' }, [], plot)
    expect(pointsOf(right?.edges[0]?.path ?? '')).toEqual([
      { x: 300, y: 200 },
      { x: 324, y: 252 },
    ])
    const left = groundUnder(level, 42, { kind: 'soft' }, none, [], plot)
    expect(pointsOf(left?.edges[0]?.path ?? '')).toEqual([
      { x: 0, y: 200 },
      { x: -24, y: 252 },
    ])
  })

  test('keeps off another stable line below it', () => {
    const other = { a: { x: 0, y: 220 }, b: { x: 300, y: 220 } }
    const shape = groundUnder(level, 42, none, none, [other], plot)
    expect(Math.max(...pointsOf(shape?.hatch ?? '').map(({ y }) => y))).toBeLessThan(220)
  })

  test('a bend tighter than the strip never makes it run backwards', () => {
    // A half circle of radius 20 open to the right: its inside is where the ground lies.
    const arc = Array.from({ length: 41 }, (_, i) => {
      const angle = Math.PI / 2 + (Math.PI * i) / 40
      return { x: 200 + 20 * Math.cos(angle), y: 200 + 20 * Math.sin(angle) }
    })
    const shape = groundUnder([...arc, { x: 400, y: 180 }], 42, none, none, [], plot)
    const inside = pointsOf(shape?.hatch ?? '').filter(({ x }) => x < 200)
    expect(inside.every(({ x, y }) => Math.hypot(x - 200, y - 200) <= 20.2)).toBe(true)
  })

  test('a piece of a few pixels stands on nothing', () => {
    expect(
      groundUnder(
        [
          { x: 0, y: 0 },
          { x: 4, y: 0 },
        ],
        42,
        none,
        none,
        [],
        plot,
      ),
    ).toBeNull()
  })
})

describe('near-onset prediction', () => {
  const range = { low: 40, high: 70, span: 20 }

  test('is the coefficient times the root of the distance, on the side of the cycle', () => {
    const made = straight('soft')
    const [curve, ...rest] = nearOnsets(made.card, piecesOf(made.card), range)
    expect(rest).toEqual([])
    expect(curve).toMatchObject({ stable: true, side: 'above' })
    for (const point of curve?.points ?? []) expect(point.amplitude).toBeCloseTo(2 * Math.sqrt(point.p - 58), 9)
  })

  test('reaches over 15 % of the range at most', () => {
    const made = straight('hard')
    const [curve] = nearOnsets(made.card, piecesOf(made.card), range)
    // 15 % of 30 is 4.5, and 2 sqrt(4.5) = 4.24 is within a quarter of the span, 5.
    expect(reachOfRange).toBe(0.15)
    expect(curve?.points.at(-1)?.p).toBeCloseTo(58 - 4.5, 9)
  })

  test('ends where the amplitude would pass a quarter of the span', () => {
    const made = straight('soft', { amplitudeCoefficient: 10 })
    const [curve] = nearOnsets(made.card, piecesOf(made.card), range)
    // 10 sqrt(d) = 5 at d = 0.25.
    expect(reachOfSpan).toBe(0.25)
    expect(curve?.points.at(-1)?.p).toBeCloseTo(58.25, 9)
    expect(curve?.points.at(-1)?.amplitude).toBeCloseTo(5, 9)
  })

  test('is not drawn for a pair that is no limit, nor where the kind is undecided', () => {
    const hollow = straight('soft', { operating: false })
    expect(nearOnsets(hollow.card, piecesOf(hollow.card), range)).toEqual([])
    const open = straight('degenerate')
    expect(nearOnsets(open.card, piecesOf(open.card), range)).toEqual([])
  })

  test('stops where its steady state turns back', () => {
    // Swings about the upper level of p = x^3 - x, whose turning point lies at p = -0.3849.
    const made = foldedCurve()
    const onset = onsetOf({
      p: -0.3,
      verdict: 'hard',
      state: { x: 0.7863 },
      cycleSide: 'below',
      amplitudeCoefficient: 0.1,
    })
    const card = { ...made.card, hopf: [onset] }
    const [curve] = nearOnsets(card, piecesOf(made.card), { low: -0.8, high: 0.8, span: 4 })
    expect(Math.min(...(curve?.points.map(({ p }) => p) ?? []))).toBeGreaterThanOrEqual(-0.385)
    // x^3 - x = -0.3 at x = 0.7863 on the upper level; the lower one at -1.1254 is another state.
    expect(curve?.points[0]?.middle).toBeCloseTo(0.7863, 3)
  })
})

describe('the picture as a whole', () => {
  test('a zero steady state gives one amplitude line from zero up', () => {
    const made = straight('soft')
    const geometry = geometryOf(made.document, made.card)
    expect(geometry.flat).toBe(true)
    const scene = sceneOf(geometry, made.card, 760)
    expect(scene.near[0]?.lines).toHaveLength(1)
  })

  test('a curved steady state gives highest and lowest', () => {
    const made = foldedCurve()
    const onset = onsetOf({ p: 0.4, verdict: 'soft', state: { x: 1.16 }, amplitudeCoefficient: 0.3 })
    const card = { ...made.card, hopf: [onset] }
    const scene = sceneOf(geometryOf(made.document, card), card, 760)
    expect(scene.geometry.flat).toBe(false)
    expect(scene.near[0]?.lines).toHaveLength(2)
  })

  test('the running branch stands on deep ground, another stable one on shallow', () => {
    const made = foldedCurve()
    const scene = sceneOf(geometryOf(made.document, made.card), made.card, 760)
    expect(scene.grounds.map((ground) => ground.main)).toEqual([false, true])
  })

  test('the same card gives the same picture', () => {
    const made = foldedCurve()
    const draw = () => JSON.stringify(sceneOf(geometryOf(made.document, made.card), made.card, 700).grounds)
    expect(draw()).toBe(draw())
  })

  test('numbers at the ends of what a double holds still give finite pixels', () => {
    const made = straight('soft')
    const huge = made.card.branches?.map((branch) => ({
      ...branch,
      points: branch.points.map((point, i) => ({ ...point, observed: i % 2 === 0 ? 1.7e308 : -1.7e308 })),
    }))
    const card = cardOf({ ...made.card, branches: huge })
    const scene = sceneOf(geometryOf(made.document, card), card, 760)
    expect(
      scene.curves.every((curve) => curve.points.every(({ x, y }) => Number.isFinite(x) && Number.isFinite(y))),
    ).toBe(true)
    expect(JSON.stringify(scene.curves)).not.toMatch(/NaN|null/)
  })
})
