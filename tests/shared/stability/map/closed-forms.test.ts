import { describe, expect, test } from 'vitest'
import { largest, mapOf, onlyCurve, type PlaneModel, planeDocument } from './models.ts'

const box = [-2, 2] as const

describe('onset curves against closed forms', () => {
  test('normal form of fifth order: changeover at k = 0 on the line mu = 0, soft below, hard above, l2 = -4', () => {
    // r' = mu r + k r³ - r⁵: cubic k. With <q,q> = 1, |w| = r/sqrt 2, so c2 = -4 and l2 = Re c2/omega = -4.
    const { map } = mapOf(
      planeDocument({
        equations: 'q2 = x^2 + y^2\ng = mu + k*q2 - q2^2\ndx/dt = g*x - y\ndy/dt = x + g*y',
        control: { mu: [-0.1, -0.5, 0.5] },
        second: { k: [0.6, -1, 1] },
        states: { x: box, y: box },
        observed: 'x',
      }),
    )
    const { points, closed } = onlyCurve(map, 'onset')
    expect(closed).toBe(false)
    expect(largest(points, ({ p }) => p)).toBeLessThan(1e-14)
    expect(largest(points, ({ omega = 0 }) => omega - 1)).toBeLessThan(1e-13)
    expect([points[0]?.s, points.at(-1)?.s]).toEqual([-1, 1])
    for (const { s, verdict } of points) {
      if (Math.abs(s) > 1e-9) expect(verdict).toBe(s < 0 ? 'soft' : 'hard')
      else expect(verdict).toBe('degenerate')
    }
    expect(map.points).toHaveLength(1)
    expect(map.points[0]).toMatchObject({ kind: 'changeover', p: 0 })
    expect(map.points[0]?.s).toBeCloseTo(0, 12)
    expect(map.points[0]?.secondLyapunov).toBeCloseTo(-4, 10)
  })

  test('two changeovers within one step are both found', () => {
    // cubic (s - 0.503)² - 1e-5: zero at 0.503 -+ sqrt(1e-5)
    const { map } = mapOf(
      planeDocument({
        equations: 'q=x^2+y^2\ng = p + ((s-0.503)^2 - 1e-5)*q - q^2\ndx/dt = g*x - y\ndy/dt = x + g*y',
        control: { p: [-0.2, -1, 1] },
        second: { s: [0.3, 0, 1] },
        states: { x: box, y: box },
        observed: 'x',
      }),
    )
    expect(map.points.map(({ kind }) => kind)).toEqual(['changeover', 'changeover'])
    expect(map.points[0]?.s).toBeCloseTo(0.503 - Math.sqrt(1e-5), 10)
    expect(map.points[1]?.s).toBeCloseTo(0.503 + Math.sqrt(1e-5), 10)
  })

  test('Lorenz: r = s(s+b+3)/(s-b-1), omega² = b(s+r), hard all along; the mirror pair is one curve', () => {
    // Lorenz 1963; Marsden & McCracken 1976 (closed form from memory). The curve turns in r: two s for each r above it.
    const b = 8 / 3
    const { map } = mapOf(
      planeDocument({
        equations: 'dx/dt = s*(y - x)\ndy/dt = r*x - y - x*z\ndz/dt = x*y - b*z',
        control: { r: [20, 10, 100] },
        second: { s: [10, 5, 30] },
        parameters: { b },
        states: { x: [-30, 30, 5], y: [-30, 30, 5], z: [-5, 110, 10] },
        observed: 'x',
      }),
    )
    const { points } = onlyCurve(map, 'onset')
    expect(largest(points, ({ p, s }) => p - (s * (s + b + 3)) / (s - b - 1))).toBeLessThan(1e-9)
    expect(largest(points, ({ p, s, omega = 0 }) => omega ** 2 - b * (s + p))).toBeLessThan(1e-9)
    expect(points.every(({ verdict, operating }) => verdict === 'hard' && operating)).toBe(true)
    expect([points[0]?.s, points.at(-1)?.s]).toEqual([5, 30])
    expect(map.points).toEqual([])
  })

  test('Brusselator: B = 1 + A², omega = A, soft', () => {
    // Prigogine & Lefever 1968 (from memory): trace B - 1 - A², determinant A² at (A, B/A)
    const { map } = mapOf(
      planeDocument({
        equations: 'dx/dt = A - (B+1)*x + x^2*y\ndy/dt = B*x - x^2*y',
        control: { B: [1.5, 0.5, 6] },
        second: { A: [1, 0.4, 2] },
        states: { x: [0, 4], y: [0, 12] },
        observed: 'x',
      }),
    )
    const { points } = onlyCurve(map, 'onset')
    expect(largest(points, ({ p, s }) => p - 1 - s * s)).toBeLessThan(1e-11)
    expect(largest(points, ({ s, omega = 0 }) => omega - s)).toBeLessThan(1e-11)
    expect(points.every(({ verdict }) => verdict === 'soft')).toBe(true)
    expect([points[0]?.s, points.at(-1)?.s]).toEqual([0.4, 2])
  })

  test('plankton: K = h + 2 mz h/(ef g - mz)', () => {
    // Rosenzweig & MacArthur 1963: the onset where the prey nullcline has its top at the predator's own level of prey
    const [ef, g, mz] = [0.6, 1, 0.2]
    const { map } = mapOf(
      planeDocument({
        equations: 'r = g*P/(h+P)\ndP/dt = P*(1-P/K) - r*Z\ndZ/dt = ef*r*Z - mz*Z',
        control: { K: [1, 0.5, 6] },
        second: { h: [0.6, 0.2, 1.5] },
        parameters: { ef, g, mz },
        states: { P: [0, 6, 0.5], Z: [0, 5, 0.5] },
        observed: 'P',
      }),
    )
    const { points } = onlyCurve(map, 'onset')
    expect(largest(points, ({ p, s }) => p - s - (2 * mz * s) / (ef * g - mz))).toBeLessThan(1e-10)
    expect(points.every(({ verdict, operating }) => verdict === 'soft' && operating)).toBe(true)
    expect(points[0]?.p).toBeCloseTo(0.5, 12)
    expect(points.at(-1)?.s).toBe(1.5)
  })

  test('glycolysis: a nose-shaped curve b² = (1 - 2a -+ sqrt(1 - 8a))/2 that turns at a = 1/8', () => {
    // Sel'kov 1968; Strogatz, Nonlinear Dynamics and Chaos, section 7.3 (closed form from memory)
    const { map } = mapOf(
      planeDocument({
        equations: 'dx/dt = -x + a*y + x^2*y\ndy/dt = b - a*y - x^2*y',
        control: { b: [0.6, 0.05, 1.3] },
        second: { a: [0.08, 0.01, 0.2] },
        states: { x: [0, 3], y: [0, 6] },
        observed: 'x',
      }),
    )
    const { points } = onlyCurve(map, 'onset')
    // without the root: (2 b² - 1 + 2a)² = 1 - 8a
    expect(largest(points, ({ p, s }) => (2 * p * p - 1 + 2 * s) ** 2 - 1 + 8 * s)).toBeLessThan(1e-10)
    expect(largest(points, ({ p, s, omega = 0 }) => omega ** 2 - s - p * p)).toBeLessThan(1e-11)
    expect([points[0]?.s, points.at(-1)?.s]).toEqual([0.01, 0.01])
    expect(Math.max(...points.map(({ s }) => s))).toBeGreaterThan(0.125 - 1e-4)
  })

  test('a closed island between the own values and the ends is found, and closed', () => {
    // growth rate 0.04 - (p - 0.3)² - (s - 0.45)²: the onset is the circle of radius 0.2
    const { map } = mapOf(
      planeDocument({
        equations: 'g = 0.04 - (p-0.3)^2 - (s-0.45)^2\nq = x^2 + y^2\ndx/dt = g*x - y - x*q\ndy/dt = x + g*y - y*q',
        control: { p: [0.9, 0, 1] },
        second: { s: [0.95, 0, 1] },
        states: { x: [-1, 1], y: [-1, 1] },
        observed: 'x',
      }),
    )
    const { points, closed } = onlyCurve(map, 'onset')
    expect(closed).toBe(true)
    expect(largest(points, ({ p, s }) => Math.hypot(p - 0.3, s - 0.45) - 0.2)).toBeLessThan(1e-12)
    // once around, without a gap: angles between neighbours, the last to the first included, add up to a full turn
    const angles = points.map(({ p, s }) => Math.atan2(s - 0.45, p - 0.3))
    const steps = angles.map((angle, i) => {
      const step = (angles[(i + 1) % angles.length] ?? 0) - angle
      return Math.atan2(Math.sin(step), Math.cos(step))
    })
    expect(Math.abs(steps.reduce((sum, step) => sum + step, 0))).toBeCloseTo(2 * Math.PI, 10)
    expect(Math.max(...steps.map(Math.abs))).toBeLessThan(0.1)
  })
})

const takensBogdanov: PlaneModel = {
  equations: 'dx/dt = y\ndy/dt = b1 + b2*x + x^2 - x*y',
  control: { b1: [0, -0.5, 1] },
  second: { b2: [-1, -2, 0.5] },
  states: { x: [-3, 3], y: [-3, 3] },
  observed: 'x',
}

describe('turning points and what lies on both kinds of curve', () => {
  test('double zero: the onset b1 = 0 ends at (0, 0), the fold b1 = b2²/4 passes it', () => {
    // Bogdanov 1975, Takens 1974; Kuznetsov, Elements of Applied Bifurcation Theory, section 8.4
    const { map } = mapOf(planeDocument(takensBogdanov))
    const onset = onlyCurve(map, 'onset').points
    expect(largest(onset, ({ p }) => p)).toBeLessThan(1e-12)
    expect(largest(onset, ({ s, omega = 0 }) => omega ** 2 + s)).toBeLessThan(1e-12)
    expect(onset[0]?.s).toBe(-2)
    expect(onset.at(-1)?.s).toBeCloseTo(0, 12)
    expect(onset.slice(0, -1).every(({ verdict, operating }) => verdict === 'soft' && operating)).toBe(true)
    const fold = onlyCurve(map, 'fold').points
    expect(largest(fold, ({ p, s }) => p - (s * s) / 4)).toBeLessThan(1e-12)
    expect([fold[0]?.s, fold.at(-1)?.s]).toEqual([-2, 0.5])
    expect(map.points.map(({ kind }) => kind)).toEqual(['double-zero'])
    expect(map.points[0]?.p).toBeCloseTo(0, 12)
    expect(map.points[0]?.s).toBeCloseTo(0, 12)
  })

  test('cusp of x³: 27 p² = 4 s³ with its point at (0, 0)', () => {
    // x' = p + s x - x³ has a double root where p² = 4 s³/27
    const { map } = mapOf(
      planeDocument({
        equations: 'dx/dt = p + s*x - x^3',
        control: { p: [0.1, -1, 1] },
        second: { s: [0.5, -0.5, 1.3] },
        states: { x: [-3, 3] },
        observed: 'x',
      }),
    )
    const { points } = onlyCurve(map, 'fold')
    expect(largest(points, ({ p, s }) => 27 * p * p - 4 * s ** 3)).toBeLessThan(1e-11)
    expect([points[0]?.s, points.at(-1)?.s]).toEqual([1.3, 1.3])
    expect(map.points.map(({ kind }) => kind)).toEqual(['cusp'])
    expect(map.points[0]?.p).toBeCloseTo(0, 10)
    expect(map.points[0]?.s).toBeCloseTo(0, 7)
  })

  test('double Hopf: two onset curves cross, operating up to the crossing', () => {
    // two oscillators, growth rates p and s, frequencies 1 and 2.3; their coupling is of third order only
    const { map } = mapOf(
      planeDocument({
        equations:
          'a = x^2 + y^2\nb = u^2 + v^2\ndx/dt = (p - a - b)*x - y\ndy/dt = x + (p - a - b)*y\n' +
          'du/dt = (s - a - b)*u - 2.3*v\ndv/dt = 2.3*u + (s - a - b)*v',
        control: { p: [-0.3, -1, 1] },
        second: { s: [-0.2, -1, 1] },
        states: { x: [-1, 1, 0.1], y: [-1, 1], u: [-1, 1], v: [-1, 1] },
        observed: 'x',
      }),
    )
    const [first, second, ...more] = map.curves
    expect(more).toEqual([])
    if (!first || !second) throw new Error('wanted two curves')
    const [upright, level] = (first.points[0]?.omega ?? 0) < 2 ? [first, second] : [second, first]
    expect(largest(upright.points, ({ p }) => p)).toBeLessThan(1e-13)
    expect(largest(level.points, ({ s }) => s)).toBeLessThan(1e-13)
    for (const { s, operating } of upright.points) if (Math.abs(s) > 1e-6) expect(operating).toBe(s < 0)
    expect(map.points.map(({ kind }) => kind)).toEqual(['double-hopf'])
    expect(map.points[0]?.p).toBeCloseTo(0, 10)
    expect(map.points[0]?.s).toBeCloseTo(0, 10)
  })

  test('zero-Hopf: the cubic passes through infinity there, which is no changeover', () => {
    // Langford 1979 (form from memory): onset z = beta, lam = -beta + beta³/3, cubic (1 + beta/4)/(1 - beta²); folds lam = -+2/3
    const { map } = mapOf(
      planeDocument({
        equations:
          'dx/dt = (z - beta)*x - 3.5*y\ndy/dt = 3.5*x + (z - beta)*y\n' +
          'dz/dt = lam + z - z^3/3 - (x^2 + y^2)*(1 + 0.25*z)',
        control: { lam: [0, -1, 1.5] },
        second: { beta: [0.7, -1.6, 1.6] },
        states: { x: box, y: box, z: [-3, 3] },
        observed: 'x',
      }),
    )
    const { points } = onlyCurve(map, 'onset')
    expect(largest(points, ({ p, s }) => p + s - s ** 3 / 3)).toBeLessThan(1e-12)
    for (const { s, verdict, operating } of points) {
      if (Math.abs(Math.abs(s) - 1) < 1e-6) continue
      expect([verdict, operating]).toEqual(Math.abs(s) > 1 ? ['soft', true] : ['hard', false])
    }
    const folds = map.curves.filter(({ kind }) => kind === 'fold')
    expect(folds).toHaveLength(2)
    for (const fold of folds) expect(largest(fold.points, ({ p }) => Math.abs(p) - 2 / 3)).toBeLessThan(1e-12)
    expect(map.points.map(({ kind }) => kind)).toEqual(['zero-hopf', 'zero-hopf'])
    expect(map.points[0]?.s).toBeCloseTo(-1, 10)
    expect(map.points[1]?.s).toBeCloseTo(1, 10)
    expect(map.points[1]?.p).toBeCloseTo(-2 / 3, 10)
  })
})
