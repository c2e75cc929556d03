import type { CardSummary, PageRow } from '#shared/api/pages.ts'

type Onset = CardSummary['onsets'][number]

/** An onset that ends steady running as the control rises, in invented units. */
export const onset = (p: number, verdict: Onset['verdict'], more: Partial<Onset> = {}): Onset => ({
  p,
  omega: 14.6,
  verdict,
  operating: true,
  direction: 1,
  ...more,
})

/** A card over the range 0 to 100, running at 40, stable up to a soft onset at 50; `more` overrides parts. */
export function summary(
  more: Partial<Omit<CardSummary, 'control'>> & { control?: Partial<CardSummary['control']> } = {},
): CardSummary {
  const { control, ...rest } = more
  return {
    control: { symbol: 'V', meaning: 'running speed', unit: 'm/s', low: 0, high: 100, value: 40, ...control },
    observed: { symbol: 'y', meaning: 'lateral displacement', unit: 'mm' },
    timeUnit: 's',
    kind: 'soft',
    ground: [{ from: 0, to: 50 }],
    onsets: [onset(50, 'soft')],
    main: 0,
    otherEnds: [],
    ...rest,
  }
}

export const hardCard = summary({ kind: 'hard', onsets: [onset(50, 'hard')] })
/** Stable again from 70 on: unstable between a soft onset at 30 and a soft one, falling, at 70. */
export const gapCard = summary({
  control: { value: 20 },
  ground: [
    { from: 0, to: 30 },
    { from: 70, to: 100 },
  ],
  onsets: [onset(30, 'soft'), onset(70, 'soft', { direction: -1 })],
})
/** Loses stability as the control falls through 60. */
export const fallingCard = summary({
  kind: 'hard',
  control: { value: 80, symbol: 'v_o', meaning: 'feed speed', unit: 'mm/s' },
  ground: [{ from: 60, to: 100 }],
  onsets: [onset(60, 'hard', { direction: -1 })],
})
export const undecidedCard = summary({ kind: 'undecided', onsets: [onset(50, 'undetermined')] })
export const steadyCard = summary({ kind: 'none', ground: [{ from: 0, to: 100 }], onsets: [], main: null })
/** The steady state ends at a turning point, without an onset. */
export const foldCard = summary({ kind: 'none', onsets: [], main: null, otherEnds: [{ p: 50, kind: 'fold' }] })
export const nowhereCard = summary({ ground: [], kind: 'none', onsets: [], main: null })

export function row(code: string, title: string, more: Partial<PageRow> = {}): PageRow {
  return {
    code,
    title,
    summary: '',
    field: 'rail vehicles',
    group: { slug: 'fellside-rail', name: 'Fellside Rail' },
    state: 'in-force',
    mark: '1.0.0',
    changedAt: '2026-11-09T09:41:00.000Z',
    card: summary(),
    draftKind: null,
    ...more,
  }
}
