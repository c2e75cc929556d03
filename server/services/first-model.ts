import type { ModelDocument } from '#shared/model/document.ts'

/**
 * What a new page begins with: a small model that works, so that the first card is there before the first line is typed,
 * with comments that say how lines are written.
 */
export function firstModel(words: { title: string; summary?: string; field?: string }): ModelDocument {
  return {
    format: 'brinkbook-model',
    version: 1,
    title: words.title,
    ...(words.summary ? { summary: words.summary } : {}),
    ...(words.field ? { field: words.field } : {}),
    timeUnit: 's',
    equations: [
      '# A mass on a spring that is fed with energy. Put your own model in its place:',
      '# one line for each state, dx/dt = ...; the tables hold values, ranges and units.',
      'drag = d + k*v^2          # a helper quantity, usable on any line',
      'dx/dt = v',
      'dv/dt = -w^2*x + (g - drag)*v',
    ].join('\n'),
    parameters: [
      { symbol: 'g', value: 0.2, low: 0, high: 1, unit: '1/s', meaning: 'feed, the control' },
      { symbol: 'd', value: 0.4, low: 0.2, high: 0.6, unit: '1/s', meaning: 'damping at rest' },
      { symbol: 'k', value: 1, low: 0.5, high: 2, unit: 's/m^2', meaning: 'growth of damping with speed' },
      { symbol: 'w', value: 2, low: 1, high: 4, unit: '1/s', meaning: 'natural frequency' },
    ],
    states: [
      { symbol: 'x', low: -2, high: 2, start: 0.1, unit: 'm', meaning: 'displacement' },
      { symbol: 'v', low: -4, high: 4, start: 0, unit: 'm/s', meaning: 'speed' },
    ],
    control: 'g',
    observed: 'x',
  }
}
