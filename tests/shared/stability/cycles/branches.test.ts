import { describe, expect, test } from 'vitest'
import { integrate } from '#shared/numerics/dormand-prince.ts'
import { cycleAt } from '#shared/stability/cycles/branch-point.ts'
import { turningPoints } from '#shared/stability/cycles/cycle-lists.ts'
import { remeshed } from '#shared/stability/cycles/walk-cycles.ts'
import { normalForm, type ShortModel } from '../documents.ts'
import { branchesOf, cyclesAt } from './walks.ts'

const turn = 2 * Math.PI

const quintic: ShortModel = {
  equations: 'q2 = x^2 + y^2\ng = mu + q2 - q2^2\ndx/dt = g*x - y\ndy/dt = x + g*y',
  control: { mu: [-0.1, -0.5, 0.5] },
  states: { x: [-2, 2], y: [-2, 2] },
  observed: 'x',
}

const vanDerPol: ShortModel = {
  equations: 'dx/dt = y\ndy/dt = (g - x^2)*y - x',
  control: { g: [0.5, -0.5, 2.5] },
  states: { x: [-4, 4], y: [-6, 6] },
  observed: 'x',
}

describe("r' = mu r - r^3, theta' = 1", () => {
  const { space, branches } = branchesOf(normalForm, [{ p: 0, x: [0, 0], omega: 1 }])
  const [branch] = branches

  test('one branch, to the end of the range, without turning', () => {
    expect(branches).toHaveLength(1)
    expect(branch?.end).toEqual({ kind: 'range-end', p: 0.5 })
    expect(branch?.points.every(({ at, mark }) => at.stable && mark === null)).toBe(true)
  })

  // r = sqrt(mu), period 2 pi; deviations from the cycle fall like exp(-2 mu t)
  test.each([0.01, 0.25, 0.81])('radius, period and multiplier at mu = %d', (mu) => {
    const cycles = branch ? cyclesAt(space, branch, mu) : []
    expect(cycles).toHaveLength(1)
    const [cycle] = cycles
    expect((cycle?.measures.amplitude ?? 0) / Math.sqrt(mu)).toBeCloseTo(1, 7)
    expect(cycle?.solution.cycle.period).toBeCloseTo(turn, 9)
    expect(cycle?.solution.re[0]).toBeCloseTo(Math.exp(-2 * mu * turn), 7)
  })

  test('straight lines between its points are within 1 % of sqrt(mu)', () => {
    const unit = space.frame.unit[2] as number
    const points = (branch?.points ?? []).map(({ at }) => ({ p: at.solution.cycle.p * unit, r: at.measures.amplitude }))
    let worst = 0
    points.slice(1).forEach((b, i) => {
      const a = points[i]
      for (const s of [0.2, 0.4, 0.6, 0.8]) {
        if (!a) continue
        worst = Math.max(worst, Math.abs((a.r + s * (b.r - a.r)) / Math.sqrt(a.p + s * (b.p - a.p)) - 1))
      }
    })
    expect(worst).toBeLessThan(0.01)
    expect(points.length).toBeLessThan(80)
  })
})

describe("r' = mu r + r^3 - r^5, theta' = 1", () => {
  const { space, branches } = branchesOf(quintic, [{ p: 0, x: [0, 0], omega: 1 }])
  const points = branches[0]?.points ?? []

  // mu = r^4 - r^2 turns at r^2 = 1/2, mu = -1/4
  test('turns at -1/4 within 1e-10, at radius 1/sqrt(2), the turning point being a point of the branch', () => {
    const folds = turningPoints(space.frame, points)
    expect(folds).toHaveLength(1)
    const fold = folds[0]?.at
    expect(Math.abs((fold?.solution.cycle.p ?? 0) * 1 + 0.25)).toBeLessThan(1e-10)
    expect(fold?.measures.amplitude).toBeCloseTo(Math.SQRT1_2, 7)
    expect(fold?.solution.cycle.period).toBeCloseTo(turn, 9)
    // the multiplier beside the trivial one is 1 there, by itself, not split off a double one
    expect(fold?.solution.re[0]).toBeCloseTo(1, 6)
  })

  test('unstable up to the turning point, stable after it', () => {
    const at = points.findIndex(({ mark }) => mark === 'fold')
    expect(points.slice(0, at).some(({ at: { stable } }) => stable)).toBe(false)
    expect(points.slice(at + 1).every(({ at: { stable } }) => stable)).toBe(true)
  })

  // r^2 = (1 -+ sqrt(1 + 4 mu)) / 2; multiplier exp(2 pi (mu + 3 r^2 - 5 r^4))
  test('both cycles at -0.1 with their multipliers', () => {
    const cycles = branches[0] ? cyclesAt(space, branches[0], -0.1) : []
    expect(cycles).toHaveLength(2)
    cycles.forEach(({ measures, solution }, i) => {
      const square = (1 + (i === 0 ? -1 : 1) * Math.sqrt(0.6)) / 2
      expect(measures.amplitude).toBeCloseTo(Math.sqrt(square), 7)
      const multiplier = Math.exp(turn * (-0.1 + 3 * square - 5 * square * square))
      expect((solution.re[0] ?? 0) - multiplier).toBeCloseTo(0, 6)
    })
  })
})

describe('Van der Pol', () => {
  const { space, branches } = branchesOf(vanDerPol, [{ p: 0, x: [0, 0], omega: 1 }])
  const [cycle] = branches[0] ? cyclesAt(space, branches[0], 1) : []
  const at = cycle && cycleAt(space.frame, cycle.solution)
  const fine = at && remeshed(space, at, 100)

  test('period 6.6632868593 at mu = 1 (published, from memory), and the cycle closes when it is integrated', () => {
    expect(fine?.solution.cycle.period).toBeCloseTo(6.6632868593, 9)
    const { u, period } = fine?.solution.cycle ?? { u: new Float64Array(2), period: 1 }
    const unit = space.frame.unit
    const start = Float64Array.of((u[0] as number) * (unit[0] as number), (u[1] as number) * (unit[1] as number))
    const field = (y: Float64Array, out: Float64Array): void => {
      out[0] = y[1] as number
      out[1] = (1 - (y[0] as number) ** 2) * (y[1] as number) - (y[0] as number)
    }
    const options = { span: period, relative: 1e-12, absolute: Float64Array.of(1e-12, 1e-12) }
    const result = integrate(field, start, options)
    expect(result.y[0]).toBeCloseTo(start[0] as number, 9)
    expect(result.y[1]).toBeCloseTo(start[1] as number, 9)
  })

  test('trivial multiplier 1 to 1e-8, the other as by shooting at 1e-12 (8.596950646670e-4, computed apart)', () => {
    expect(fine?.solution.trivialError).toBeLessThan(1e-8)
    expect(fine?.solution.re[0]).toBeCloseTo(8.59695064667e-4, 9)
  })

  test('amplitude from the highest point of the polynomial, not of its nodes', () => {
    // 2.00861986087 at mu = 1: published (from memory) and computed apart
    expect(fine?.measures.amplitude).toBeCloseTo(2.00861986087, 8)
    expect(cycle?.measures.amplitude).toBeCloseTo(2.00861986087, 5)
  })
})

describe('the cubic law', () => {
  // Brusselator with A = 1.5 (Strogatz, section 8.3): onset 1 + A^2 at x = A, y = B/A, omega = A; crossing 1/2 and cubic
  // -(1/4 + 1/(2 A^2))/2 from the n-dimensional formula (reference case, computed apart)
  const brusselator: ShortModel = {
    equations: 'dx/dt = A - (B + 1)*x + x^2*y\ndy/dt = B*x - x^2*y',
    control: { B: [2.5, 1, 5] },
    parameters: { A: 1.5 },
    states: { x: [0.01, 10], y: [0.01, 10] },
    observed: 'x',
  }
  const { branches } = branchesOf(brusselator, [{ p: 3.25, x: [1.5, 3.25 / 1.5], omega: 1.5 }])

  test('holds for the first cycles to the order of their size', () => {
    const law = 0.5 / 0.2361111111111111
    const first = branches[0]?.points.slice(0, 4) ?? []
    expect(first).toHaveLength(4)
    for (const { at } of first) {
      const past = at.solution.cycle.p * 4 - 3.25
      expect(at.measures.amplitude ** 2 / past / law).toBeCloseTo(1, 2)
    }
  })
})

test('a branch between two onsets is walked once', () => {
  // Selkov (Strogatz, section 7.3): onsets at b^2 = (1 - 2a -+ sqrt(1 - 8a))/2, x = b, y = b/(a + b^2), omega^2 = a + b^2
  const a = 0.08
  const onsets = [-1, 1].map((sign) => {
    const b = Math.sqrt((1 - 2 * a + sign * Math.sqrt(1 - 8 * a)) / 2)
    return { p: b, x: [b, b / (a + b * b)], omega: Math.sqrt(a + b * b) }
  })
  const selkov: ShortModel = {
    equations: 'dx/dt = -x + a*y + x^2*y\ndy/dt = b - a*y - x^2*y',
    control: { b: [0.6, 0.1, 1.2] },
    parameters: { a },
    states: { x: [0, 3], y: [0, 4] },
    observed: 'x',
  }
  const { branches } = branchesOf(selkov, onsets)
  expect(branches.map(({ hopf, end }) => [hopf, end.kind, end.onset])).toEqual([[0, 'onset', 1]])
  expect(branches[0]?.points.some(({ mark }) => mark !== null)).toBe(false)
})

test('a centre: every cycle at one control value, followed out of the far box, without an invented turning point', () => {
  // Duffing without damping but for p: x'' = -x - x^3 + p x', all cycles at p = 0
  const centre: ShortModel = {
    equations: 'dx/dt = v\ndv/dt = -x - x^3 + p*v',
    control: { p: [0, -1, 1] },
    states: { x: [-1, 1], v: [-1, 1] },
    observed: 'x',
  }
  const { space, branches } = branchesOf(centre, [{ p: 0, x: [0, 0], omega: 1 }])
  const [branch] = branches
  expect(branch?.end.kind).toBe('box-left')
  expect(Math.max(...(branch?.points ?? []).map(({ at }) => Math.abs(at.solution.cycle.p)))).toBeLessThan(1e-9)
  expect(turningPoints(space.frame, branch?.points ?? [])).toEqual([])
})
