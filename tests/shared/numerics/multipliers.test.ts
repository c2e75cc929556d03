import { describe, expect, test } from 'vitest'
import { computeMultipliers, createMultipliers } from '#shared/numerics/multipliers.ts'

// M = S D S^-1 with S = [1 1 0; 0 1 1; 0 0 1] and S^-1 = [1 -1 1; 0 1 -1; 0 0 1]; the trivial vector is S e1 = e1.
// Pencil P = -B M, Q = B with any regular B has (P + mu Q) v = 0 exactly for the eigenvalues of M.
function pencil(a: number, b: number, c: number): { first: Float64Array; last: Float64Array } {
  const d = [1, b, c]
  const s = [
    [1, 1, 0],
    [0, 1, 1],
    [0, 0, 1],
  ]
  const inverse = [
    [1, -1, 1],
    [0, 1, -1],
    [0, 0, 1],
  ]
  const mix = [
    [2, 1, 0],
    [1, -1, a],
    [0.5, 0, 1],
  ]
  const product = (x: number[][], y: number[][]): number[][] =>
    x.map((row) => row.map((_, j) => row.reduce((sum, value, k) => sum + value * (y[k]?.[j] ?? 0), 0)))
  const scaled = s.map((row) => row.map((value, j) => value * (d[j] ?? 0)))
  const m = product(scaled, inverse)
  return {
    first: Float64Array.from(product(mix, m).flat(), (value) => -value),
    last: Float64Array.from(mix.flat()),
  }
}

const velocity = Float64Array.of(3, 0, 0)

describe('nontrivial multipliers of a pencil', () => {
  test.each([
    [0.5, -2],
    [-1, 0],
    [1, 0.3],
    [1e-9, 40],
  ])('%d and %d, the trivial one taken out', (b, c) => {
    const ws = createMultipliers(3)
    const { first, last } = pencil(0.3, b, c)
    expect(computeMultipliers(ws, first, last, velocity)).toBe(true)
    const got = [...ws.re].sort((x, y) => x - y)
    const want = [b, c].sort((x, y) => x - y)
    got.forEach((value, i) => {
      expect(Math.abs(value - (want[i] ?? 0))).toBeLessThan(1e-12 * (1 + Math.abs(want[i] ?? 0)) ** 2)
    })
    expect([...ws.im]).toEqual([0, 0])
    if (b !== 1) expect(ws.trivialError).toBeLessThan(1e-12)
  })

  test('one of 1e12 leaves the digits of those that decide stability', () => {
    const ws = createMultipliers(3)
    const { first, last } = pencil(0.3, 1e12, 0.25)
    expect(computeMultipliers(ws, first, last, velocity)).toBe(true)
    // the matrices themselves carry rounding of 1e12 * 2e-16
    expect(Math.min(...ws.re)).toBeCloseTo(0.25, 3)
    expect(Math.max(...ws.re) / 1e12).toBeCloseTo(1, 2)
  })

  test('a velocity of zero or not finite is refused', () => {
    const ws = createMultipliers(3)
    const { first, last } = pencil(0.3, 0.5, 2)
    expect(computeMultipliers(ws, first, last, new Float64Array(3))).toBe(false)
    expect(computeMultipliers(ws, first, last, Float64Array.of(Number.NaN, 0, 0))).toBe(false)
  })
})
