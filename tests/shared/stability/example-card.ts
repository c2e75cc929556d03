import type { HopfPoint, StabilityCard } from '#shared/model/card-document.ts'
import type { DescribedModel } from '#shared/stability/summary.ts'

/** A made-up rig with the control v from 0 to 10 m/s, running at 3. Nothing computed: the tests of summary and comparison read what stands here. */
export const document: DescribedModel = {
  timeUnit: 's',
  control: 'v',
  observed: 'x',
  parameters: [
    { symbol: 'v', value: 3, low: 0, high: 10, unit: 'm/s', meaning: 'speed' },
    { symbol: 'mu', value: 1, unit: '1/s' },
  ],
  states: [
    { symbol: 'x', low: -2, high: 2, unit: 'm', meaning: 'sway' },
    { symbol: 'y', low: -2, high: 2 },
  ],
}

export function onset(changes: Partial<HopfPoint> = {}): HopfPoint {
  return {
    p: 5,
    state: { x: 0, y: 0 },
    branch: 0,
    omega: 2,
    period: Math.PI,
    crossing: 0.5,
    firstLyapunov: -2,
    cubic: -1,
    cubicError: 1e-12,
    shift: 0,
    verdict: 'soft',
    operating: true,
    cycleSide: 'above',
    amplitudeCoefficient: Math.SQRT1_2,
    secondLyapunov: null,
    proved: true,
    ...changes,
  }
}

const at = (p: number, stable: boolean) => ({ p, state: { x: 0, y: 0 }, stable, observed: 0, eigenvalues: [] })

export function card(changes: Partial<StabilityCard> = {}): StabilityCard {
  return {
    format: 'brinkbook-card',
    version: 1,
    engine: '0.2.0',
    fingerprint: 'sha256:0',
    control: 'v',
    observed: 'x',
    steadyStates: [{ state: { x: 0, y: 0 }, eigenvalues: [], stable: true, kind: 'stable spiral', residual: 0 }],
    steadyStatesComplete: true,
    branches: [
      {
        id: 0,
        points: [at(0, true), at(2, true), at(4, true), at(6, false), at(8, false), at(10, false)],
        ends: [],
      },
    ],
    folds: [],
    branchPoints: [],
    hopf: [onset()],
    window: {
      branch: 0,
      from: 0,
      to: 5,
      low: { kind: 'range-end' },
      high: { kind: 'onset', index: 0, verdict: 'soft' },
    },
    warnings: [],
    ...changes,
  }
}

/** A branch point for `card({ branches })`. */
export const branchAt = at
