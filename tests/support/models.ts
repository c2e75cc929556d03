import type { ModelDocument } from '#shared/model/document.ts'

/**
 * Small models for tests of what is made of a card. Figures in them are invented, except where a source is named.
 */
const base = { format: 'brinkbook-model', version: 1 } as const

/** Convection in three modes (Lorenz, Deterministic nonperiodic flow, 1963): onset at r = 470/19, hard, beyond a pitchfork at r = 1. */
export const lorenz: ModelDocument = {
  ...base,
  title: 'Three-mode convection',
  equations: 'dx/dt = s*(y - x)\ndy/dt = r*x - y - x*z\ndz/dt = x*y - b*z',
  parameters: [
    { symbol: 'r', value: 20, low: 0.2, high: 30, unit: '1', meaning: 'heating' },
    { symbol: 's', value: 10, low: 5, high: 20 },
    { symbol: 'b', value: 8 / 3, low: 1, high: 4 },
  ],
  states: [
    { symbol: 'x', low: -25, high: 25, start: 5 },
    { symbol: 'y', low: -25, high: 25, start: 5 },
    { symbol: 'z', low: -5, high: 50, start: 15 },
  ],
  control: 'r',
  observed: 'x',
}

/** r' = (V - 58)/24 r + c3 r^3 - c5 r^5, turning at a constant rate: onset at 58, soft for c3 < 0 and hard for c3 > 0. */
export function wheelset(c3: number): ModelDocument {
  return {
    ...base,
    title: 'One wheelset on straight track',
    timeUnit: 's',
    equations:
      'mu = (V - V0)/Vs\nq = y^2 + z^2\ndy/dt = (mu + c3*q - c5*q^2)*y - w*z\ndz/dt = (mu + c3*q - c5*q^2)*z + w*y\nds/dt = (y - s)/tau',
    parameters: [
      { symbol: 'V', value: 55, low: 46, high: 66, unit: 'm/s', meaning: 'running speed' },
      { symbol: 'V0', value: 58, unit: 'm/s' },
      { symbol: 'Vs', value: 24, unit: 'm' },
      { symbol: 'c3', value: c3 },
      { symbol: 'c5', value: 0.0005 },
      { symbol: 'w', value: 14.6 },
      { symbol: 'tau', value: 1.4 },
    ],
    states: [
      { symbol: 'y', low: -12, high: 12, start: 0.1, unit: 'mm', meaning: 'lateral shift' },
      { symbol: 'z', low: -12, high: 12, start: 0, unit: 'mm' },
      { symbol: 's', low: -12, high: 12, start: 0, unit: 'mm' },
    ],
    control: 'V',
    observed: 'y',
    quietWord: 'Runs straight',
  }
}

/** x' = p + x - x^3: turning points where 3 x^2 = 1, at p = -+ 2/(3 sqrt 3) = -+ 0.3849; stable above and below, one state. */
export const bistable: ModelDocument = {
  ...base,
  title: 'Two resting levels',
  equations: 'dx/dt = p + x - x^3',
  parameters: [{ symbol: 'p', value: 0, low: -1, high: 1 }],
  states: [{ symbol: 'x', low: -2, high: 2, start: 1.5 }],
  control: 'p',
  observed: 'x',
}

/** x' = p^2 + 1 + x^2 has no steady state at any p. */
export const nowhere: ModelDocument = {
  ...base,
  title: 'Nothing rests',
  equations: 'dx/dt = 1 + p^2 + x^2',
  parameters: [{ symbol: 'p', value: 0, low: -1, high: 1 }],
  states: [{ symbol: 'x', low: -2, high: 2, start: 0 }],
  control: 'p',
  observed: 'x',
}

/** x' = -x + p: steady everywhere, without onset. */
export const calm: ModelDocument = {
  ...base,
  title: 'A lag',
  timeUnit: 'min',
  equations: 'dx/dt = p - x',
  parameters: [{ symbol: 'p', value: 1, low: 0, high: 4, unit: 'kW', meaning: 'feed' }],
  states: [{ symbol: 'x', low: -1, high: 5, start: 0, unit: 'kW', meaning: 'load' }],
  control: 'p',
  observed: 'x',
}

/** An oscillator with onset at mu = 0 that drives a chain of lags, 30 states in all. Soft: r' = mu r - r^3. */
export function chain(states = 30): ModelDocument {
  const lags = Array.from({ length: states - 2 }, (_, i) => `dc${i + 1}/dt = ${i === 0 ? 'x' : `c${i}`} - c${i + 1}`)
  return {
    ...base,
    title: 'Oscillator and chain',
    equations: ['q = x^2 + y^2', 'dx/dt = mu*x - y - x*q', 'dy/dt = x + mu*y - y*q', ...lags].join('\n'),
    parameters: [{ symbol: 'mu', value: -0.5, low: -1, high: 1 }],
    states: [
      { symbol: 'x', low: -2, high: 2, start: 0.1 },
      { symbol: 'y', low: -2, high: 2, start: 0 },
      ...lags.map((_, i) => ({ symbol: `c${i + 1}`, low: -2, high: 2, start: 0 })),
    ],
    control: 'mu',
    observed: 'x',
  }
}
