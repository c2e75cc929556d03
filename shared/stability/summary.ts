import type { Branch, StabilityCard, Verdict } from '../model/card-document.ts'
import { foldSymbol } from '../model/symbols.ts'

/** What of a model document the summary and the comparison read (shared/model/document.ts has it all). */
export interface DescribedModel {
  timeUnit?: string
  control: string
  observed: string
  parameters: readonly { symbol: string; value: number; low?: number; high?: number; unit?: string; meaning?: string }[]
  states: readonly { symbol: string; low: number; high: number; unit?: string; meaning?: string }[]
}

/** Kind of the onset a row speaks of. `undecided`: degenerate or undetermined. `none`: no onset ends the steady running. */
export type SummaryKind = 'hard' | 'soft' | 'undecided' | 'none'

/**
 * What a list row and its edge strip need of a card. The same shape as `cardSummary` in shared/api/pages.ts (a test holds
 * the two together). `p`, `from`, `to`, `low`, `high` and `value` in the control's unit; `omega` in radians per time unit.
 */
export interface CardSummary {
  control: { symbol: string; meaning: string; unit: string; low: number; high: number; value: number }
  observed: { symbol: string; meaning: string; unit: string }
  timeUnit: string
  kind: SummaryKind
  /** Stretches of the control range where the window's branch (without a window: the first one) is stable, ascending, apart. */
  ground: { from: number; to: number }[]
  /** Positions as in the card's `hopf`. `direction` +1: stability is lost as the control rises through p. */
  onsets: { p: number; omega: number; verdict: Verdict; operating: boolean; direction: 1 | -1 }[]
  /** Position in `onsets` of the one the row speaks of; null where kind is none. */
  main: number | null
  otherEnds: { p: number; kind: 'fold' | 'branch-point' | 'box-left' }[]
}

const kindOf: Record<Verdict, Exclude<SummaryKind, 'none'>> = {
  soft: 'soft',
  hard: 'hard',
  degenerate: 'undecided',
  undetermined: 'undecided',
}
const gravity: Record<SummaryKind, number> = { hard: 0, undecided: 1, soft: 2, none: 3 }

/** True where two spellings are one symbol (μ and mu). */
export function sameSymbol(a: string, b: string): boolean {
  return a === b || (foldSymbol(a) ?? a) === (foldSymbol(b) ?? b)
}

/** The parameter that is swept. @throws {RangeError} if the document has none of that name or no range for it (unchecked document). */
export function controlOf(document: DescribedModel): CardSummary['control'] {
  const row = document.parameters.find((parameter) => sameSymbol(parameter.symbol, document.control))
  if (row?.low === undefined || row.high === undefined)
    throw new RangeError('The document was not checked: its control has no range')
  const { symbol, value, low, high, unit = '', meaning = '' } = row
  return { symbol, meaning, unit, low, high, value }
}

function observedOf(document: DescribedModel): CardSummary['observed'] {
  const row = document.states.find((state) => sameSymbol(state.symbol, document.observed))
  return { symbol: row?.symbol ?? document.observed, meaning: row?.meaning ?? '', unit: row?.unit ?? '' }
}

/**
 * Where a branch loses its stability between two of its points: at the onset, turning point or branch point between them
 * that is next to the stable one; else at the stable one itself, so that no ground is drawn that was not checked.
 */
function edgeBetween(stable: number, unstable: number, limits: readonly number[]): number {
  const [low, high] = stable < unstable ? [stable, unstable] : [unstable, stable]
  const between = limits.filter((p) => p >= low && p <= high)
  return between.sort((a, b) => Math.abs(a - stable) - Math.abs(b - stable))[0] ?? stable
}

/** Stretches of the control on which a branch is stable, ascending, overlapping ones joined. */
function groundOf(branch: Branch | undefined, limits: readonly number[]): { from: number; to: number }[] {
  const stretches: { from: number; to: number }[] = []
  const points = branch?.points ?? []
  for (let i = 0; i < points.length; i++) {
    const here = points[i]
    if (!here?.stable) continue
    const ends = [here.p]
    for (const neighbour of [points[i - 1], points[i + 1]]) {
      if (neighbour) ends.push(neighbour.stable ? neighbour.p : edgeBetween(here.p, neighbour.p, limits))
    }
    stretches.push({ from: Math.min(...ends), to: Math.max(...ends) })
  }
  stretches.sort((a, b) => a.from - b.from)
  const joined: { from: number; to: number }[] = []
  for (const stretch of stretches) {
    const last = joined.at(-1)
    if (last && stretch.from <= last.to) last.to = Math.max(last.to, stretch.to)
    else joined.push(stretch)
  }
  return joined.filter((stretch) => stretch.to > stretch.from)
}

/**
 * Position of the onset a row speaks of: the one that ends the window nearest to the running point; without a window (the
 * running point itself is not steady) the operating onset nearest to it. Equally near: the graver one.
 */
function mainOf(card: StabilityCard, value: number): number | null {
  const hopf = card.hopf ?? []
  const indices = card.window
    ? [card.window.low, card.window.high].flatMap((end) =>
        end.kind === 'onset' && end.index !== undefined ? [end.index] : [],
      )
    : hopf.flatMap((point, index) => (point.operating ? [index] : []))
  let main: number | null = null
  let nearest = Number.POSITIVE_INFINITY
  for (const index of indices) {
    const point = hopf[index]
    if (!point) continue
    const distance = Math.abs(point.p - value)
    const graver = main !== null && gravity[kindOf[point.verdict]] < gravity[kindOf[hopf[main]?.verdict ?? 'soft']]
    if (distance < nearest || (distance === nearest && graver)) {
      main = index
      nearest = distance
    }
  }
  return main
}

function otherEndsOf(card: StabilityCard): CardSummary['otherEnds'] {
  if (!card.window) return []
  const { low, high, from, to } = card.window
  return [
    { end: low, p: from },
    { end: high, p: to },
  ].flatMap(({ end, p }) =>
    end.kind === 'fold' || end.kind === 'branch-point' || end.kind === 'box-left' ? [{ p, kind: end.kind }] : [],
  )
}

/**
 * The row's view of a card. Parts that the card lacks count as empty.
 *
 * @param document  the checked model document the card was computed from.
 * @throws {RangeError} if the control is not among its parameters or has no range.
 */
export function summarise(document: DescribedModel, card: StabilityCard): CardSummary {
  const control = controlOf(document)
  const hopf = card.hopf ?? []
  const branch = card.branches?.find((one) => one.id === card.window?.branch) ?? card.branches?.[0]
  const limits = [
    ...hopf.filter((point) => point.branch === branch?.id),
    ...(card.folds ?? []),
    ...(card.branchPoints ?? []),
  ]
  const main = mainOf(card, control.value)
  const mainVerdict = main === null ? undefined : hopf[main]?.verdict
  return {
    control,
    observed: observedOf(document),
    timeUnit: document.timeUnit ?? '',
    kind: mainVerdict ? kindOf[mainVerdict] : 'none',
    ground: groundOf(
      branch,
      limits.map((point) => point.p),
    ),
    onsets: hopf.map(({ p, omega, verdict, operating, crossing }) => ({
      p,
      omega,
      verdict,
      operating,
      direction: crossing < 0 ? -1 : 1,
    })),
    main,
    otherEnds: otherEndsOf(card),
  }
}
