import { describe, expect, test } from 'vitest'
import { type StabilityCard, stabilityCard } from '#shared/model/card-document.ts'
import { analyse } from '#shared/stability/card.ts'
import { type ReferenceCase, referenceCases } from './read-case.ts'

const cases = referenceCases()

function cardOf(reference: ReferenceCase): StabilityCard {
  const result = analyse(reference.model, { parts: ['steady', 'hopf'] })
  if (!result.ok) throw new Error(JSON.stringify(result.errors))
  return stabilityCard.parse(result.card)
}

/** Largest difference of two states, each coordinate as a share of its range. */
function apart(reference: ReferenceCase, a: Record<string, number>, b: Record<string, number>): number {
  return Math.max(
    ...reference.model.states.map(({ symbol, low, high }) =>
      Math.abs(((a[symbol] ?? Number.NaN) - (b[symbol] ?? Number.NaN)) / (high - low)),
    ),
  )
}

function controlRange(reference: ReferenceCase): number {
  const control = reference.model.parameters.find(({ symbol }) => symbol === reference.model.control)
  return (control?.high ?? Number.NaN) - (control?.low ?? Number.NaN)
}

/** Distance of two lists of eigenvalues, nearest paired first, as a share of the largest. */
function eigenvaluesApart(want: [number, number][], got: { re: number; im: number }[]): number {
  if (want.length !== got.length) return Number.POSITIVE_INFINITY
  const size = Math.max(...want.map(([re, im]) => Math.hypot(re, im)), 1e-300)
  const left = [...got]
  let largest = 0
  for (const [re, im] of want) {
    left.sort((a, b) => Math.hypot(b.re - re, b.im - im) - Math.hypot(a.re - re, a.im - im))
    const nearest = left.pop()
    largest = Math.max(largest, nearest ? Math.hypot(nearest.re - re, nearest.im - im) : Number.POSITIVE_INFINITY)
  }
  return largest / size
}

const relative = 1e-7

function expectNear(got: number | null, want: number | null, absolute: number, what: string): void {
  if (want === null || got === null) {
    expect(got, what).toBe(want)
    return
  }
  const slack = absolute + relative * Math.max(Math.abs(want), Math.abs(got)) + 1e-12
  expect(Math.abs(got - want), `${what}: want ${want}, got ${got}`).toBeLessThanOrEqual(slack)
}

test('thirty cases are there', () => {
  expect(cases).toHaveLength(30)
})

describe.each(cases)('$name ($reference.source; $reference.sourceNote)', ({ reference }) => {
  const card = cardOf(reference)
  const { expect: want } = reference
  const range = controlRange(reference)

  test('steady states at the own value, with all eigenvalues and their stability', () => {
    const got = card.steadyStates ?? []
    expect(got).toHaveLength(want.steadyStates.list.length)
    for (const state of want.steadyStates.list) {
      const found = got.find((each) => apart(reference, each.state, state.state) < 1e-9)
      expect(found, JSON.stringify(state.state)).toBeDefined()
      expect(eigenvaluesApart(state.eigenvalues, found?.eigenvalues ?? [])).toBeLessThan(1e-9)
      expect(found?.stable).toBe(state.stable)
    }
  })

  test('every Hopf point and no other, with verdict and operating flag', () => {
    const got = card.hopf ?? []
    expect(got.map(({ p }) => p)).toHaveLength(want.hopf.length)
    for (const point of want.hopf) {
      const found = got.find(
        (each) =>
          Math.abs(each.p - point.p) < 1e-9 * range &&
          apart(reference, each.state, point.state) < 1e-8 &&
          Math.abs(each.omega - point.omega) < 1e-8 * point.omega,
      )
      expect(found, `Hopf point at ${point.p}`).toBeDefined()
      if (!found) continue
      expectNear(found.crossing, point.crossing, point.atol.crossing ?? 0, 'crossing')
      expectNear(found.firstLyapunov, point.firstLyapunov, point.atol.firstLyapunov ?? 0, 'firstLyapunov')
      expectNear(found.cubic, point.cubic, point.atol.cubic ?? 0, 'cubic')
      expectNear(found.shift, point.shift, point.atol.shift ?? 0, 'shift')
      expectNear(found.period, (2 * Math.PI) / point.omega, 0, 'period')
      expect([found.verdict, found.operating]).toEqual([point.verdict, point.operating])
      // an error bar that does not cover the difference to 40 digits would be a false promise
      if (found.cubic !== null && found.cubicError !== null && point.cubic !== null) {
        const bar = found.cubicError + 1e-15 * Math.abs(point.cubic)
        expect(Math.abs(found.cubic - point.cubic)).toBeLessThanOrEqual(bar)
      }
    }
  })

  test('turning points and branch points', () => {
    expect(card.folds?.map(({ p }) => p)).toHaveLength(want.folds.length)
    for (const fold of want.folds) {
      expect(
        card.folds?.some(({ p }) => Math.abs(p - fold.p) < 1e-9 * range),
        `fold at ${fold.p}`,
      ).toBe(true)
    }
    expect(card.branchPoints).toHaveLength(want.branchPoints.length)
    for (const point of want.branchPoints) {
      const found = card.branchPoints?.find(({ p }) => Math.abs(p - point.p) < 1e-9 * range)
      expect(found && apart(reference, found.state, point.state)).toBeLessThan(1e-6)
    }
  })
})
