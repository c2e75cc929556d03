import { describe, expect, test } from 'vitest'
import { branchRows, sortedRows } from '#src/features/stability-card/geometry/branch-rows.ts'
import { inOneOrder } from '#src/features/stability-card/geometry/eigen-paths.ts'
import { eigenTexts } from '#src/features/stability-card/geometry/eigen-text.ts'
import { eventsOf } from '#src/features/stability-card/geometry/events.ts'
import { piecesOf } from '#src/features/stability-card/geometry/pieces.ts'
import { statesAt } from '#src/features/stability-card/geometry/states-at.ts'
import { subjectOf } from '#src/features/stability-card/geometry/subject.ts'
import { empty, foldedCurve, straight } from './cards.ts'

describe('pieces of a branch', () => {
  test('the solid line ends at the onset itself, not at the nearest computed point', () => {
    const [stable, unstable, ...rest] = piecesOf(straight('hard').card)
    expect(rest).toEqual([])
    expect(stable?.stable).toBe(true)
    expect(stable?.points.at(-1)?.p).toBe(58)
    expect(stable?.end).toEqual({ kind: 'onset', index: 0 })
    expect(unstable?.points[0]?.p).toBe(58)
    expect(unstable?.end).toEqual({ kind: 'range-end', index: null })
  })

  test('an S-shaped branch is cut at both turning points', () => {
    const made = foldedCurve()
    const pieces = piecesOf(made.card)
    expect(pieces.map((piece) => piece.stable)).toEqual([true, false, true])
    // Turning points of p = x^3 - x at x = -+1/sqrt 3.
    expect(pieces[0]?.points.at(-1)?.value).toBeCloseTo(-1 / Math.sqrt(3), 12)
    expect(pieces[0]?.end).toEqual({ kind: 'turning-point', index: 1 })
    expect(pieces[2]?.start).toEqual({ kind: 'turning-point', index: 0 })
  })

  test('a change of stability without a listed point is cut where the growth rate is zero', () => {
    const made = straight('soft')
    const [stable] = piecesOf({ ...made.card, hopf: [], window: null })
    // The growth rate (V - 58)/20 is linear, so its zero between two points is exact.
    expect(stable?.points.at(-1)?.p).toBeCloseTo(58, 10)
    expect(stable?.end.kind).toBe('open')
  })

  test('one point of zero growth between stable points makes no gap', () => {
    const made = straight('soft')
    const branch = made.card.branches?.[0]
    if (!branch) throw new Error('the fixture has a branch')
    const points = branch.points
      .filter(({ p }) => p < 57)
      .map((point, i) =>
        i === 5
          ? {
              ...point,
              stable: false,
              eigenvalues: [
                { re: 0, im: 1 },
                { re: 0, im: -1 },
              ],
            }
          : point,
      )
    const pieces = piecesOf({ ...made.card, hopf: [], branches: [{ ...branch, points }] })
    const gaps = pieces.filter((piece) => !piece.stable)
    // What is left of the gap is at most the two steps beside the point.
    expect(gaps.every((piece) => Math.abs((piece.points.at(-1)?.p ?? 0) - (piece.points[0]?.p ?? 0)) < 2)).toBe(true)
    expect(pieces[0]?.stable).toBe(true)
    expect(pieces.at(-1)?.stable).toBe(true)
  })

  test('a card without branches has no pieces', () => {
    expect(piecesOf(empty.card)).toEqual([])
  })
})

describe('steady states between computed points', () => {
  test('value and eigenvalues are read linearly between the points', () => {
    const pieces = piecesOf(straight('hard').card)
    const [state, ...rest] = statesAt(pieces, 51.3)
    expect(rest).toEqual([])
    expect(state?.stable).toBe(true)
    expect(state?.growth).toBeCloseTo((51.3 - 58) / 20, 12)
    expect(state?.eigenvalues.map(({ im }) => im)).toEqual([14.5, -14.5])
  })

  test('exactly on the onset there is one state, and it is not stable', () => {
    const states = statesAt(piecesOf(straight('hard').card), 58)
    expect(states).toHaveLength(1)
    expect(states[0]?.stable).toBe(false)
  })

  test('inside an S there are three, lowest first, the middle one unstable', () => {
    const states = statesAt(piecesOf(foldedCurve().card), 0)
    // x^3 - x = 0 at -1, 0, 1.
    expect(states.map((state) => Math.round(state.value * 1e6) / 1e6)).toEqual([-1, 0, 1])
    expect(states.map((state) => state.stable)).toEqual([true, false, true])
  })

  test('a computed point that is hit exactly counts once', () => {
    const made = straight('soft')
    const p = made.card.branches?.[0]?.points[7]?.p ?? 0
    expect(statesAt(piecesOf(made.card), p)).toHaveLength(1)
  })

  test('outside the range there is none', () => {
    expect(statesAt(piecesOf(straight('soft').card), 80)).toEqual([])
  })
})

describe('eigenvalues along a branch', () => {
  test('keep their place when the lists come sorted another way', () => {
    // Two real eigenvalues that pass each other: -1 + t and -1 - t.
    const lists = [-0.2, -0.1, 0, 0.1, 0.2].map((t) =>
      [
        { re: -1 + t, im: 0 },
        { re: -1 - t, im: 0 },
      ].sort((a, b) => b.re - a.re),
    )
    const ordered = inOneOrder(lists)
    const first = ordered.map((list) => list[0]?.re ?? 0)
    expect(first.map((re) => Math.round(re * 10) / 10)).toEqual([-0.8, -0.9, -1, -1.1, -1.2])
  })

  test('are told with a pair once, slowest first, true minus', () => {
    const texts = eigenTexts([
      { re: -0.714, im: 0 },
      { re: -0.2, im: 13.8 },
      { re: -0.2, im: -13.8 },
    ])
    expect(texts.map(({ text }) => text)).toEqual(['−0.200 ± 13.8i', '−0.714'])
  })
})

describe('rows of the table', () => {
  const made = straight('hard')
  const pieces = piecesOf(made.card)
  const rows = branchRows(pieces, eventsOf(made.card, subjectOf(made.document), pieces))

  test('the onset stands once, with its name and a growth rate of zero', () => {
    const onsets = rows.filter((row) => row.event)
    expect(onsets).toHaveLength(1)
    expect(onsets[0]).toMatchObject({ p: 58, growth: 0, stable: null })
  })

  test('sort by growth rate, falling and rising', () => {
    const growths = sortedRows(rows, 'growth', true).map((row) => row.growth ?? 0)
    expect(growths).toEqual([...growths].sort((a, b) => a - b))
    expect(sortedRows(rows, 'growth', false)[0]?.p).toBe(70)
  })
})
