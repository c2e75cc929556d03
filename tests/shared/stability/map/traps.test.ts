import { describe, expect, test } from 'vitest'
import { stabilityCard } from '#shared/model/card-document.ts'
import { analyse } from '#shared/stability/card.ts'
import { documentOf, normalForm } from '../documents.ts'
import { largest, mapOf, onlyCurve, type PlaneModel, planeDocument } from './models.ts'

const box = [-1, 1] as const

const changeover: PlaneModel = {
  equations: 'q2 = x^2 + y^2\ng = mu + k*q2 - q2^2\ndx/dt = g*x - y\ndy/dt = x + g*y',
  control: { mu: [-0.1, -0.5, 0.5] },
  second: { k: [0.6, -1, 1] },
  states: { x: box, y: box },
  observed: 'x',
}

/** 12 lags in a ring, each held down by the one before (invented). */
const ring: PlaneModel = {
  equations: Array.from({ length: 12 }, (_, i) => `dx${i}/dt = a/(1 + x${(i + 11) % 12}^h) - x${i}`).join('\n'),
  control: { a: [1.5, 0.5, 8] },
  second: { h: [2, 1, 5] },
  states: Object.fromEntries(Array.from({ length: 12 }, (_, i) => [`x${i}`, [0, 8] as const])),
  observed: 'x0',
}

describe('what is no onset curve, and no changeover', () => {
  test('a centre all over the plane has no onset', () => {
    // Lotka 1925, Volterra 1926: ±i sqrt(a b) at (b, a) for all a, b
    const { map } = mapOf(
      planeDocument({
        equations: 'dx/dt = a*x - x*y\ndy/dt = x*y - b*y',
        control: { a: [1, 0.5, 2] },
        second: { b: [1, 0.5, 2] },
        states: { x: [0, 4, 1], y: [0, 4, 1] },
        observed: 'x',
      }),
    )
    expect(map.curves).toEqual([])
    expect(map.points).toEqual([])
  })

  test('beyond a double zero the real pair ±λ is no onset: no point with omega = 0 but the end', () => {
    // x' = y, y' = b2 x + b1 y - x³ - x² y at the origin: trace b1, determinant -b2; onset b1 = 0 only for b2 < 0
    const { map } = mapOf(
      planeDocument({
        equations: 'dx/dt = y\ndy/dt = b2*x + b1*y - x^3 - x^2*y',
        control: { b1: [-0.5, -1, 1] },
        second: { b2: [-0.4, -1, 1] },
        states: { x: [-2, 2], y: [-2, 2] },
        observed: 'x',
      }),
    )
    const onOrigin = map.curves.filter(
      ({ kind, points }) => kind === 'onset' && points.every(({ p }) => Math.abs(p) < 1e-9),
    )
    expect(onOrigin).toHaveLength(1)
    expect(Math.max(...(onOrigin[0]?.points ?? []).map(({ s }) => s))).toBeLessThan(1e-9)
    // on the side branches x² = b2 the trace is b1 - b2
    const onSides = map.curves.filter((curve) => curve.kind === 'onset' && !onOrigin.includes(curve))
    expect(onSides).toHaveLength(1)
    for (const { points } of onSides) {
      expect(largest(points, ({ p, s }) => p - s)).toBeLessThan(1e-9)
      expect(largest(points, ({ s, omega = 0 }) => omega ** 2 - 2 * s)).toBeLessThan(1e-9)
    }
    // the zero eigenvalue there belongs to a pitchfork, for every value of b1: no turning points
    expect(map.curves.filter(({ kind }) => kind === 'fold')).toEqual([])
  })

  test('a line of exchanges of stability is no curve of turning points; onsets pass it on both branches', () => {
    // z' = z (p - z): branches z = 0 and z = p cross at p = 0 whatever s is; onsets s + z = 0 on each, with omega 2
    const { map } = mapOf(
      planeDocument({
        equations: 'q=x^2+y^2\ng=s+z-q\ndx/dt = g*x - 2*y\ndy/dt = 2*x + g*y\ndz/dt = z*(p-z) - 0.5*q',
        control: { p: [0.5, -1, 1] },
        second: { s: [-0.9, -1, 1] },
        states: { x: box, y: box, z: [-2, 2] },
        observed: 'x',
      }),
    )
    expect(map.curves.map(({ kind }) => kind)).toEqual(['onset', 'onset'])
    for (const { points } of map.curves) {
      expect(largest(points, ({ p, s }) => s * (s + p))).toBeLessThan(1e-11)
      expect(Math.abs((points[0]?.p ?? 0) - (points.at(-1)?.p ?? 0))).toBeCloseTo(2, 12)
    }
    // q drives z alone, by q/(2p) on z = 0 and -q/(2p) on z = p: cubics -1 + 1/(2p) and -1 - 1/(2p), zero at
    // p = 1/2 and p = -1/2; at p = 0, where they are infinite, stands a zero-Hopf point and no changeover
    expect(map.points.filter(({ kind }) => kind === 'zero-hopf')).toEqual([
      { kind: 'zero-hopf', p: expect.closeTo(0, 9), s: expect.closeTo(0, 9), omega: expect.closeTo(2, 9) },
    ])
    const changes = map.points.filter(({ kind }) => kind === 'changeover')
    expect(changes.map(({ p }) => p)).toEqual([expect.closeTo(0.5, 9), expect.closeTo(-0.5, 9)])
    expect(changes.map(({ s }) => s)).toEqual([expect.closeTo(0, 9), expect.closeTo(0.5, 9)])
  })

  test('two equal pairs on the axis together: a curve whose points are not decided', () => {
    const { map } = mapOf(
      planeDocument({
        equations:
          'dx/dt = p*x - y - x*(x^2+y^2)\ndy/dt = x + p*y - y*(x^2+y^2)\n' +
          'du/dt = p*u - v - u*(u^2+v^2)\ndv/dt = u + p*v - v*(u^2+v^2) + s*0',
        control: { p: [-0.3, -1, 1] },
        second: { s: [-0.2, -1, 1] },
        states: { x: [-1, 1, 0.1], y: box, u: box, v: box },
        observed: 'x',
      }),
    )
    for (const { points } of map.curves) {
      expect(largest(points, ({ p }) => p)).toBeLessThan(1e-9)
      expect(points.every(({ verdict }) => verdict === 'degenerate')).toBe(true)
    }
    expect(map.points).toEqual([])
  })

  test('a kink at the steady state leaves the verdict undetermined and makes no changeover', () => {
    const { map } = mapOf(
      planeDocument({
        equations: 'dx/dt = p*x - y - x*abs(x) + (s - 0.5)*x^3\ndy/dt = x + p*y',
        control: { p: [-0.2, -1, 1] },
        second: { s: [0.3, 0, 1] },
        states: { x: box, y: box },
        observed: 'x',
      }),
    )
    expect(onlyCurve(map, 'onset').points.every(({ verdict }) => verdict === 'undetermined')).toBe(true)
    expect(map.points).toEqual([])
  })
})

describe('scales', () => {
  test('controls and states in units of 1e-9, 1e7 and 1e-6, rates of 1e6: vertical line and changeover', () => {
    // growth (p - 0.25e-9) 1e15, cubic -(s - 0.5e7) 1e11 per square of x, omega 1e6
    const { map } = mapOf(
      planeDocument({
        equations:
          'm = (p - 0.25e-9)*1e9\nk = (s - 0.5e7)*1e5\nq = x^2 + y^2\n' +
          'dx/dt = 1e6*(m*x - y - k*q*x)\ndy/dt = 1e6*(x + m*y - k*q*y)',
        control: { p: [0, 0, 1e-9] },
        second: { s: [3e6, 0, 1e7] },
        states: { x: [-1e-6, 1e-6], y: [-1e-6, 1e-6] },
        observed: 'x',
      }),
    )
    const { points } = onlyCurve(map, 'onset')
    expect(largest(points, ({ p }) => (p - 0.25e-9) / 1e-9)).toBeLessThan(1e-12)
    expect(largest(points, ({ omega = 0 }) => omega / 1e6 - 1)).toBeLessThan(1e-12)
    for (const { s, verdict } of points) {
      if (Math.abs(s - 5e6) > 1) expect(verdict).toBe(s < 5e6 ? 'hard' : 'soft')
    }
    expect(map.points.map(({ kind }) => kind)).toEqual(['changeover'])
    expect((map.points[0]?.s ?? 0) / 5e6).toBeCloseTo(1, 10)
  })

  test('rates from 1e-6 to 1e6: the onset p = s of the slow pair, to 1e-5', () => {
    // x follows y within a microsecond, w follows x in 1e6 time units; x in place of y delays by 1e-6, which moves p by as much
    const { map } = mapOf(
      planeDocument({
        equations:
          'dx/dt = 1e6*(y-x)\ndy/dt = (p-s)*x - z - y*(y^2+z^2)\ndz/dt = y + (p-s)*z - z*(y^2+z^2)\ndw/dt = 1e-6*(x-w)',
        control: { p: [0.1, -1, 1] },
        second: { s: [0.3, -1, 1] },
        states: { x: box, y: box, z: box, w: box },
        observed: 'y',
      }),
    )
    const { points } = onlyCurve(map, 'onset')
    expect(largest(points, ({ p, s }) => p - s)).toBeLessThan(1e-5)
    expect(points.every(({ verdict, operating }) => verdict === 'soft' && operating)).toBe(true)
  })
})

describe('edges and ends', () => {
  test('a curve ends on the end of the range exactly, and goes on where it comes back', () => {
    // growth rate p - 0.2 - 0.5 s (1 - s): at s = 0 and 1 on p = 0.2, between them up to 0.325, so it leaves p <= 0.3 and returns
    const { map } = mapOf(
      planeDocument({
        equations: 'm = p - 0.2 - 0.5*s*(1-s)\nq = x^2+y^2\ndx/dt = m*x - y - x*q\ndy/dt = x + m*y - y*q',
        control: { p: [0.1, 0, 0.3] },
        second: { s: [0.05, 0, 1] },
        states: { x: box, y: box },
        observed: 'x',
      }),
    )
    // s (1 - s) = 0.2 at the end p = 0.3
    const bound = (1 - Math.sqrt(0.2)) / 2
    expect(map.curves).toHaveLength(2)
    const ends = map.curves.flatMap(({ points }) => [points[0]?.s ?? 0, points.at(-1)?.s ?? 0]).sort((a, b) => a - b)
    for (const [i, want] of [0, bound, 1 - bound, 1].entries()) expect(ends[i]).toBeCloseTo(want, 11)
    expect(map.curves.flatMap(({ points }) => points).every(({ p }) => p <= 0.3)).toBe(true)
  })

  test('the box cuts a curve, and the map says where', () => {
    // onset at p = s on the steady state x = 4 s, box to 2: cut at s = 0.5
    const { map, warnings } = mapOf(
      planeDocument({
        equations: 'm = p - s\nu = x - 4*s\nq = u^2+y^2\ndx/dt = m*u - y - u*q\ndy/dt = u + m*y - y*q',
        control: { p: [0.1, 0, 1] },
        second: { s: [0.3, 0, 1] },
        states: { x: [-1, 2], y: box },
        observed: 'x',
      }),
    )
    const { points } = onlyCurve(map, 'onset')
    expect(points.at(-1)?.s).toBeCloseTo(0.5, 10)
    const told = warnings.filter(({ code }) => code === 'branch-left-box')
    expect(told.map(({ message }) => message)).toEqual([
      expect.stringContaining('A curve of the map leaves the range of x at s = 0.5, p = 0.5'),
    ])
  })

  test('where the model has no value beyond the end of a range the curve reaches that end', () => {
    // m = sqrt(p) - s: p = s², not defined below p = 0
    const { map } = mapOf(
      planeDocument({
        equations: 'q=x^2+y^2\nm = sqrt(p) - s\ndx/dt = m*x - y - x*q\ndy/dt = x + m*y - y*q',
        control: { p: [0.2, 0, 1] },
        second: { s: [0.3, 0, 1] },
        states: { x: box, y: box },
        observed: 'x',
      }),
    )
    const { points } = onlyCurve(map, 'onset')
    // the slope of sqrt grows without bound towards the end: what rounding leaves of p there is not 1e-12
    expect(largest(points, ({ p, s }) => p - s * s)).toBeLessThan(1e-9)
    expect(points[0]?.s).toBeLessThan(1e-4)
    expect(points.at(-1)?.s).toBe(1)
  })
})

describe('bad input, budgets and stopping', () => {
  test.each([
    ['a continuum', 'dx/dt = x*y*p\ndy/dt = s*x*y'],
    ['no value anywhere', 'dx/dt = log(-1-p^2-s^2)*x - y\ndy/dt = x/(x-x)'],
    ['no steady state', 'dx/dt = 1 + x^2 + p^2\ndy/dt = 1 + y^2 + s^2'],
  ])('%s: an empty map, finite and with warnings', (_, equations) => {
    const model = {
      equations,
      control: { p: [0.2, 0, 1] },
      second: { s: [0.3, 0, 1] },
      states: { x: box, y: box },
    } as const
    const result = analyse(planeDocument({ ...model, observed: 'x' }), { parts: ['map'] })
    if (!result.ok) throw new Error(JSON.stringify(result.errors))
    const card = stabilityCard.parse(result.card)
    expect(card.map).toEqual({ control: 'p', second: 's', curves: [], points: [] })
    expect(card.warnings.length).toBeGreaterThan(0)
  })

  test('one state, one fold: no onsets are looked for', () => {
    const { map } = mapOf(
      planeDocument({
        equations: 'dx/dt = p + s - x^2',
        control: { p: [0.5, -1, 1] },
        second: { s: [0.5, -1, 1] },
        states: { x: [-2, 2] },
        observed: 'x',
      }),
    )
    expect(largest(onlyCurve(map, 'fold').points, ({ p, s }) => p + s)).toBeLessThan(1e-12)
  })

  test('without a second control the part is absent, and the card says what is missing', () => {
    const result = analyse(documentOf(normalForm), { parts: ['hopf', 'map'] })
    if (!result.ok) throw new Error('no card')
    expect(result.card).not.toHaveProperty('map')
    expect(result.card.hopf).toHaveLength(1)
    expect(result.card.warnings.map(({ code }) => code)).toContain('no-second-control')
  })

  test('it is computed only where it is asked for', () => {
    const result = analyse(planeDocument(changeover), { parts: ['steady', 'hopf'] })
    if (!result.ok) throw new Error('no card')
    expect(result.card).not.toHaveProperty('map')
    expect(result.card.warnings.map(({ code }) => code)).not.toContain('searched-not-proved')
  })

  test('the same document gives the same map', () => {
    expect(mapOf(planeDocument(changeover))).toEqual(mapOf(planeDocument(changeover)))
  })

  test('curves are handed out one by one, and progress runs from 0 to 1', () => {
    const sizes: number[] = []
    const shares: number[] = []
    const { map } = mapOf(
      planeDocument({
        ...changeover,
        equations: 'dx/dt = y\ndy/dt = mu + k*x + x^2 - x*y',
        states: { x: [-3, 3], y: box },
      }),
      { onMap: ({ curves }) => sizes.push(curves.length), onProgress: (_, share) => shares.push(share) },
    )
    expect(sizes).toEqual(map.curves.map((_, i) => i + 1))
    expect(map.curves.map(({ kind }) => kind)).toEqual(['onset', 'fold'])
    expect(shares[0]).toBe(0)
    expect(shares.at(-1)).toBe(1)
    expect(Math.max(...shares.slice(1).map((share, i) => (shares[i] ?? 0) - share))).toBeLessThan(0.5)
  })

  test('asked to stop, it ends after little more work with what it has, told as incomplete', () => {
    let asked = 0
    const stopAfter = (count: number) => () => ++asked > count
    const first = mapOf(planeDocument(ring), { shouldStop: stopAfter(400) })
    // one more question at most for each line and search under way
    expect(asked).toBeLessThan(400 + 80)
    expect(first.warnings.map(({ code }) => code)).toContain('budget-spent')
    for (const { points } of first.map.curves) {
      for (const { verdict, operating } of points) expect(verdict === undefined).toBe(operating === undefined)
    }
  })
})
