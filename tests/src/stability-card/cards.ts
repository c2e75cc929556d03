import type { HopfPoint, StabilityCard } from '#shared/model/card-document.ts'
import type { DescribedModel } from '#shared/stability/summary.ts'

/** Cards written down from closed forms, so that every pixel can be worked out by hand. */
type Complex = { re: number; im: number }
type Point = NonNullable<StabilityCard['branches']>[number]['points'][number]

export interface Made {
  document: DescribedModel & { quietWord?: string }
  card: StabilityCard
}

export function cardOf(parts: Partial<StabilityCard>): StabilityCard {
  return {
    format: 'brinkbook-card',
    version: 1,
    engine: '0.1.0',
    fingerprint: `sha256:${'0'.repeat(64)}`,
    control: 'V',
    observed: 'y',
    steadyStates: [],
    steadyStatesComplete: true,
    branches: [],
    folds: [],
    branchPoints: [],
    hopf: [],
    sensitivity: [],
    window: null,
    warnings: [],
    ...parts,
  }
}

export function onsetOf(parts: Partial<HopfPoint> & Pick<HopfPoint, 'p' | 'verdict'>): HopfPoint {
  return {
    state: { y: 0, z: 0 },
    branch: 0,
    omega: 14.5,
    period: (2 * Math.PI) / 14.5,
    crossing: 0.05,
    firstLyapunov: parts.verdict === 'hard' ? 1 : -1,
    cubic: parts.verdict === 'hard' ? 0.0125 : -0.0125,
    cubicError: 1e-12,
    shift: 0,
    operating: true,
    cycleSide: parts.verdict === 'hard' ? 'below' : 'above',
    amplitudeCoefficient: 2,
    secondLyapunov: null,
    proved: false,
    ...parts,
  }
}

export const steps = (from: number, to: number, count: number): number[] =>
  Array.from({ length: count + 1 }, (_, i) => from + ((to - from) * i) / count)

export const point = (p: number, state: Record<string, number>, observed: number, eigenvalues: Complex[]): Point => ({
  p,
  state,
  observed,
  eigenvalues,
  stable: eigenvalues.every(({ re }) => re < 0),
})

/** A zero steady state, V from 40 to 70, growth rate (V - 58)/20, rotation 14.5: one onset at 58 exactly. */
export function straight(verdict: HopfPoint['verdict'], more: Partial<HopfPoint> = {}): Made {
  // 31 steps from 40 to 70 never hit 58: the cut has to come from the card's onset.
  const points = steps(40, 70, 31).map((p) =>
    point(p, { y: 0, z: 0 }, 0, [
      { re: (p - 58) / 20, im: 14.5 },
      { re: (p - 58) / 20, im: -14.5 },
    ]),
  )
  const undecided = verdict !== 'soft' && verdict !== 'hard'
  const onset = onsetOf({
    p: 58,
    verdict,
    ...(undecided ? { cycleSide: null, amplitudeCoefficient: null } : {}),
    ...more,
  })
  return {
    document: {
      timeUnit: 's',
      control: 'V',
      observed: 'y',
      quietWord: 'Runs straight',
      parameters: [{ symbol: 'V', value: 55, low: 40, high: 70, unit: 'm/s', meaning: 'running speed' }],
      states: [
        { symbol: 'y', low: -10, high: 10, unit: 'mm', meaning: 'lateral shift' },
        { symbol: 'z', low: -10, high: 10, unit: 'mm' },
      ],
    },
    card: cardOf({
      branches: [
        {
          id: 0,
          points,
          ends: [
            { kind: 'range-end', p: 40 },
            { kind: 'range-end', p: 70 },
          ],
        },
      ],
      hopf: [onset],
      window:
        onset.operating === false
          ? null
          : { branch: 0, from: 40, to: 58, low: { kind: 'range-end' }, high: { kind: 'onset', index: 0, verdict } },
      steadyStates: [
        {
          state: { y: 0, z: 0 },
          eigenvalues: [
            { re: -0.15, im: 14.5 },
            { re: -0.15, im: -14.5 },
          ],
          stable: true,
          kind: 'stable spiral',
          residual: 0,
        },
      ],
    }),
  }
}

/** x' = p + x - x^3 as a card: p = x^3 - x along the branch, growth rate 1 - 3x^2, turning points at x = +-1/sqrt 3. */
export function foldedCurve(): Made {
  const turn = 1 / Math.sqrt(3)
  const points = steps(-1.3, 1.3, 130).map((x) => point(x ** 3 - x, { x }, x, [{ re: 1 - 3 * x * x, im: 0 }]))
  const inRange = points.filter(({ p }) => p >= -0.8 && p <= 0.8)
  return {
    document: {
      control: 'p',
      observed: 'x',
      parameters: [{ symbol: 'p', value: 0, low: -0.8, high: 0.8 }],
      states: [{ symbol: 'x', low: -2, high: 2 }],
    },
    card: cardOf({
      control: 'p',
      observed: 'x',
      branches: [
        {
          id: 0,
          points: inRange,
          ends: [
            { kind: 'range-end', p: -0.8 },
            { kind: 'range-end', p: 0.8 },
          ],
        },
      ],
      folds: [
        { p: turn ** 3 - turn, state: { x: turn } },
        { p: turn - turn ** 3, state: { x: -turn } },
      ],
      window: {
        branch: 0,
        from: turn ** 3 - turn,
        to: 0.8,
        low: { kind: 'fold', index: 0 },
        high: { kind: 'range-end' },
      },
    }),
  }
}

export const empty: Made = {
  document: straight('soft').document,
  card: cardOf({
    warnings: [{ code: 'no-steady-state', message: 'No steady state was found in the ranges of the states.' }],
  }),
}
