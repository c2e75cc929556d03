import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import type { HopfPoint } from '#shared/model/card-document.ts'
import { cardOf, normalForm, type ShortModel, warningCodes } from './documents.ts'

function only(model: ShortModel): HopfPoint {
  const card = cardOf(model)
  const [point, ...more] = card.hopf ?? []
  if (!point || more.length > 0) throw new Error(`wanted one Hopf point, got ${card.hopf?.length}`)
  return point
}

const box = [-2, 2] as const

describe('conventions', () => {
  test('the normal form: a = -1, l1 = -2, b = 0, amplitude sqrt(mu) above', () => {
    // |z|² = (x² + y²)/2 for <q,q> = 1, so Re c1 = -2 and l1 = Re c1/omega; a = Re c1/(4 |q_x|²) with |q_x|² = 1/2
    expect(only(normalForm)).toMatchObject({
      p: 0,
      omega: 1,
      crossing: 1,
      verdict: 'soft',
      operating: true,
      cycleSide: 'above',
    })
    const point = only(normalForm)
    expect(point.cubic).toBeCloseTo(-1, 13)
    expect(point.firstLyapunov).toBeCloseTo(-2, 13)
    expect(point.shift).toBeCloseTo(0, 13)
    expect(point.amplitudeCoefficient).toBeCloseTo(1, 13)
    expect(point.period).toBeCloseTo(2 * Math.PI, 13)
  })

  test("frequency shift: theta' = 1 + 0.7 r² gives b = 0.7", () => {
    const point = only({
      ...normalForm,
      equations: 'q2 = x^2 + y^2\ndx/dt = mu*x - (1+0.7*q2)*y - x*q2\ndy/dt = (1+0.7*q2)*x + mu*y - y*q2',
    })
    expect(point.shift).toBeCloseTo(0.7, 12)
    expect(point.cubic).toBeCloseTo(-1, 12)
  })

  test('the planar formula of Guckenheimer & Holmes 1983 (3.4.11), for a general cubic field in canonical form', () => {
    const coefficient = fc.integer({ min: -8, max: 8 }).map((k) => k / 4)
    const field = fc.array(coefficient, { minLength: 7, maxLength: 7 })
    fc.assert(
      fc.property(field, field, (f, g) => {
        // x' = mu x - y + f(x, y), y' = x + mu y + g(x, y); monomials x², xy, y², x³, x²y, xy², y³
        const text = (c: number[]) =>
          ['x^2', 'x*y', 'y^2', 'x^3', 'x^2*y', 'x*y^2', 'y^3'].map((m, i) => `+ (${c[i]})*${m}`).join(' ')
        const [fxx, fxy, fyy] = [2 * (f[0] ?? 0), f[1] ?? 0, 2 * (f[2] ?? 0)]
        const [gxx, gxy, gyy] = [2 * (g[0] ?? 0), g[1] ?? 0, 2 * (g[2] ?? 0)]
        const cubicTerms = 6 * (f[3] ?? 0) + 2 * (f[5] ?? 0) + 2 * (g[4] ?? 0) + 6 * (g[6] ?? 0)
        const quadratic = fxy * (fxx + fyy) - gxy * (gxx + gyy) - fxx * gxx + fyy * gyy
        const a = cubicTerms / 16 + quadratic / 16
        const card = cardOf({
          equations: `dx/dt = mu*x - y ${text(f)}\ndy/dt = x + mu*y ${text(g)}`,
          control: { mu: [-0.1, -0.2, 0.2] },
          states: { x: [-0.05, 0.05], y: [-0.05, 0.05] },
          observed: 'x',
        })
        const point = card.hopf?.find(({ p, state }) => Math.abs(p) < 1e-9 && Math.abs(state.x ?? 1) < 1e-9)
        expect(point?.cubic).toBeCloseTo(a, 10)
      }),
      { numRuns: 40, seed: 4 },
    )
  })
})

describe('what does not depend on how a model is written', () => {
  const feedback = ['y', 'z', '-alpha*z - 1.25*y - x + x^2 - 0.4*x*y*z'] as const
  const names = ['x', 'y', 'z'] as const
  const direct: ShortModel = {
    equations: names.map((name, i) => `d${name}/dt = ${feedback[i]}`).join('\n'),
    control: { alpha: [1, 0.3, 2] },
    states: { x: [-0.4, 0.4], y: [-0.4, 0.4], z: [-0.4, 0.4] },
    observed: 'x',
  }

  test('verdict, cubic and shift of one quantity are the same in every linear coordinate system', () => {
    const reference = only(direct)
    const entry = fc.double({ min: -0.3, max: 0.3, noNaN: true }).map((v) => Number(v.toFixed(3)))
    fc.assert(
      fc.property(fc.array(entry, { minLength: 9, maxLength: 9 }), fc.integer({ min: -3, max: 3 }), (e, decade) => {
        // new states w = T x with T = diag(10^decade, 1, 1) (1 + E), E small enough to be invertible
        const t = names.map((_, i) => names.map((__, j) => (i === j ? 1 : 0) + (e[3 * i + j] ?? 0)))
        const scale = [10 ** decade, 1, 1]
        const inverse = invert3(t)
        const helpers = names.map(
          (name, i) => `${name} = ${[0, 1, 2].map((j) => `(${inverse[i]?.[j]})*w${j}/(${scale[j]})`).join(' + ')}`,
        )
        const equations = [0, 1, 2].map(
          (i) => `dw${i}/dt = ${scale[i]}*(${[0, 1, 2].map((j) => `(${t[i]?.[j]})*(${feedback[j]})`).join(' + ')})`,
        )
        const point = only({
          ...direct,
          equations: [...helpers, ...equations].join('\n'),
          states: Object.fromEntries(scale.map((s, i) => [`w${i}`, [-0.5 * s, 0.5 * s] as const])),
        })
        expect(point.p).toBeCloseTo(reference.p, 11)
        expect(point.omega).toBeCloseTo(reference.omega, 11)
        expect(point.crossing).toBeCloseTo(reference.crossing, 10)
        expect(point.cubic).toBeCloseTo(reference.cubic ?? Number.NaN, 9)
        expect(point.shift).toBeCloseTo(reference.shift ?? Number.NaN, 9)
        expect(point.verdict).toBe(reference.verdict)
      }),
      { numRuns: 25, seed: 7 },
    )
  })

  test('time in other units scales omega, crossing, cubic and shift alike', () => {
    const reference = only(direct)
    for (const factor of [1e-3, 60, 1e5]) {
      const point = only({
        ...direct,
        equations: names.map((name, i) => `d${name}/dt = ${factor}*(${feedback[i]})`).join('\n'),
      })
      expect(point.p).toBeCloseTo(reference.p, 11)
      for (const key of ['omega', 'crossing', 'cubic', 'shift'] as const) {
        expect((point[key] ?? 0) / factor / (reference[key] ?? 1), key).toBeCloseTo(1, 9)
      }
      expect(point.verdict).toBe(reference.verdict)
      expect(point.firstLyapunov).toBeCloseTo(reference.firstLyapunov ?? Number.NaN, 10)
    }
  })

  test('the cubic coefficient of c·x is that of x over c²', () => {
    const helper = only({ ...normalForm, equations: `${normalForm.equations}\nscaled = 50*x`, observed: 'scaled' })
    expect((helper.cubic ?? 0) * 2500).toBeCloseTo(-1, 12)
    expect((helper.amplitudeCoefficient ?? 0) / 50).toBeCloseTo(1, 12)
  })
})

function invert3(m: number[][]): number[][] {
  const at = (i: number, j: number) => m[i % 3]?.[j % 3] ?? 0
  const cofactor = (i: number, j: number) => at(i + 1, j + 1) * at(i + 2, j + 2) - at(i + 1, j + 2) * at(i + 2, j + 1)
  const det = [0, 1, 2].reduce((sum, j) => sum + at(0, j) * cofactor(0, j), 0)
  return [0, 1, 2].map((i) => [0, 1, 2].map((j) => cofactor(j, i) / det))
}

describe('verdicts that are withheld', () => {
  test("degenerate where the cubic coefficient is zero: r' = mu r - r⁵", () => {
    const card = cardOf({
      ...normalForm,
      equations: 'q4 = (x^2+y^2)^2\ndx/dt = mu*x - y - x*q4\ndy/dt = x + mu*y - y*q4',
    })
    expect(card.hopf?.[0]).toMatchObject({ verdict: 'degenerate', cycleSide: null, amplitudeCoefficient: null })
    expect(card.hopf?.[0]?.cubic).toBeCloseTo(0, 12)
    expect(warningCodes(card)).toEqual(['degenerate'])
    expect(card.window?.high).toMatchObject({ kind: 'onset', verdict: 'degenerate' })
  })

  test('never by an absolute number: a volt-sized state with a tiny coefficient is decided', () => {
    // x in units of 1e-4: the coefficient is 1e-8 of the normal form's, the verdict the same
    const point = only({
      ...normalForm,
      equations: 'q2 = 1e-8*(x^2+y^2)\ndx/dt = mu*x - y + x*q2\ndy/dt = x + mu*y + y*q2',
      states: { x: [-2e4, 2e4], y: [-2e4, 2e4] },
    })
    expect((point.cubic ?? 0) * 1e8).toBeCloseTo(1, 10)
    expect(point.verdict).toBe('hard')
  })

  test('undetermined at a kink, with the crossing rate all the same; a kink elsewhere does no harm', () => {
    const kinked = cardOf({
      equations: 'dx/dt = v\ndv/dt = mu*v - 0.5*abs(v)*v - x',
      control: { mu: [-0.1, -0.3, 0.3] },
      states: { x: box, v: box },
      observed: 'x',
    })
    expect(kinked.hopf?.[0]).toMatchObject({
      verdict: 'undetermined',
      cubic: null,
      firstLyapunov: null,
      operating: true,
    })
    expect(kinked.hopf?.[0]?.crossing).toBeCloseTo(0.5, 12)
    expect(kinked.warnings).toMatchObject([{ code: 'not-smooth', line: 2 }])
    const elsewhere = cardOf({ ...normalForm, equations: `${normalForm.equations} - 0.001*max(x - 1.5, 0)` })
    expect(elsewhere.hopf?.[0]?.verdict).toBe('soft')
    expect(elsewhere.hopf?.[0]?.cubic).toBeCloseTo(-1, 12)
    expect(elsewhere.warnings).toEqual([])
  })

  test('where the observed quantity is silent the verdict comes from the first Lyapunov coefficient', () => {
    const card = cardOf({
      ...normalForm,
      equations: `${normalForm.equations}\nsize = x^2 + y^2`,
      observed: 'size',
    })
    expect(card.hopf?.[0]).toMatchObject({
      cubic: null,
      cubicError: null,
      shift: null,
      verdict: 'soft',
      cycleSide: null,
    })
    expect(card.hopf?.[0]?.firstLyapunov).toBeCloseTo(-2, 12)
    expect(warningCodes(card)).toEqual(['observed-silent'])
  })

  test('degenerate where a real eigenvalue is zero at the same value; the coefficient stands where that mode is not driven', () => {
    const zeroHopf = (z: string) =>
      cardOf({
        equations: `dz/dt = ${z}\ndx/dt = mu*x - y - x*(x^2+y^2) + z*x\ndy/dt = x + mu*y - y*(x^2+y^2) + z*y`,
        control: { mu: [-0.5, -1, 1] },
        states: { z: [-0.2, 0.2], x: box, y: box },
        observed: 'x',
      })
    const alone = zeroHopf('mu*z - z^3')
    expect(alone.hopf?.filter(({ p }) => p === 0)).toMatchObject([{ verdict: 'degenerate', operating: false }])
    expect(alone.hopf?.find(({ p }) => p === 0)?.cubic).toBeCloseTo(-1, 10)
    // driven by x² + y²: the coefficient is infinite
    const driven = zeroHopf('mu*z - z^3 + x^2 + y^2')
    expect(driven.hopf?.filter(({ p }) => Math.abs(p) < 1e-9)).toMatchObject([
      { verdict: 'degenerate', cubic: null, firstLyapunov: null },
    ])
    expect(JSON.stringify([alone, driven])).not.toMatch(/NaN|Infinity/)
    expect(warningCodes(alone)).toContain('degenerate')
  })
})

test('the crossing rate is the total derivative: the steady state moves with the control', () => {
  // u = x - p²; in u the pair is (p - 1) ± i, so d = 1 at p = 1, although dA/dp at fixed x is not the identity there
  const point = only({
    equations: 'u = x - p^2\ndx/dt = (p-1)*u - y - u*(u^2+y^2) + 0.5*u*y\ndy/dt = u + (p-1)*y - y*(u^2+y^2)',
    control: { p: [0.5, 0, 2] },
    states: { x: [-1, 6, 0.3], y: [-2, 2, 0.1] },
    observed: 'x',
  })
  expect(point.p).toBeCloseTo(1, 12)
  expect(point.crossing).toBeCloseTo(1, 12)
})

describe('the second Lyapunov coefficient, where the first is zero', () => {
  test("x' = -y + mu x - x r⁴, y' = x + mu y - y r⁴ has l2 = -4 (|z| = r/sqrt 2 for <q,q> = 1)", () => {
    const card = cardOf({
      ...normalForm,
      equations: 'q4 = (x^2+y^2)^2\ndx/dt = mu*x - y - x*q4\ndy/dt = x + mu*y - y*q4',
    })
    expect(card.hopf?.[0]?.secondLyapunov).toBeCloseTo(-4, 12)
    expect(only(normalForm).secondLyapunov).toBeNull()
  })

  test('the nerve model of FitzHugh 1961 at its changeover b = (1 - sqrt(1 - eps))/eps', () => {
    // value computed apart from this project, homological equation at 50 digits, and from small cycles
    const eps = 0.08
    const card = cardOf({
      equations: 'dv/dt = v - v^3/3 - w + I\ndw/dt = eps*(v + a - b*w)',
      control: { I: [0, -0.5, 3] },
      parameters: { eps, a: 0.7, b: (1 - Math.sqrt(1 - eps)) / eps },
      states: { v: [-3, 3, -1], w: [-2, 5, -0.5] },
      observed: 'v',
    })
    expect(card.hopf?.map(({ verdict }) => verdict)).toEqual(['degenerate', 'degenerate'])
    expect(card.hopf?.[0]?.p).toBeCloseTo(0.11891101275944907, 12)
    expect(card.hopf?.[0]?.secondLyapunov).toBeCloseTo(-0.8871249174759299, 9)
  })

  test('does not depend on the linear coordinates but for <q,q>: c2 / |q_x|⁴ stays', () => {
    // x and y stretched by s and 1: l2 <q,q>² / |q_x|⁴ is the coefficient of x's own amplitude
    const stretched = (s: number) => {
      const card = cardOf({
        ...normalForm,
        equations:
          'x = X/s\nq2 = x^2+y^2\ndX/dt = s*(mu*x - y - x*q2^2 + 0.3*x^2 + 0.2*c*x*q2)\ndy/dt = x + mu*y - y*q2^2 + 0.2*c*y*q2',
        parameters: { s, c: 0 },
        states: { X: [-2 * s, 2 * s], y: [-2, 2] },
        observed: 'x',
      })
      const point = card.hopf?.find(({ p, state }) => Math.abs(p) < 1e-9 && Math.abs(state.X ?? 1) < 1e-9)
      // q = (s, ∓i)/sqrt(s² + 1) in (X, y): q_x = 1/sqrt(s² + 1)
      return (point?.secondLyapunov ?? Number.NaN) * (s * s + 1) ** 2
    }
    expect(stretched(7) / stretched(1)).toBeCloseTo(1, 8)
  })
})
