import type { DraftContent } from '#shared/model/draft.ts'

/** A planar oscillator with one onset: it walks through every part of an analysis. */
export const warmUpDraft: DraftContent = {
  equations: 'q = x^2 + y^2\ndx/dt = mu*x - y - x*q\ndy/dt = x + mu*y - y*q',
  parameters: [{ id: 'mu', symbol: 'mu', value: '-0.5', low: '-1', high: '1', unit: '', meaning: '' }],
  states: [
    { id: 'x', symbol: 'x', low: '-2', high: '2', start: '0.1', unit: '', meaning: '' },
    { id: 'y', symbol: 'y', low: '-2', high: '2', start: '0', unit: '', meaning: '' },
  ],
  settings: { title: 'Warm-up', control: 'mu', observed: 'x' },
}
