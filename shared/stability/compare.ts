import type { HopfPoint, StabilityCard } from '../model/card-document.ts'
import { foldSymbol } from '../model/symbols.ts'
import { controlOf, type DescribedModel, type SummaryKind, sameSymbol, summarise } from './summary.ts'

/** A checked model document with the card computed from it. */
export interface Judged {
  document: DescribedModel
  card: StabilityCard
}

export type MarkLevel = 'major' | 'minor' | 'patch'
type Value = string | number | null

/** One thing that differs. `what` names it in words; null means it is not there on that side. */
export interface CardDifference {
  what: string
  was: Value
  now: Value
  unit?: string
  /** Which way a position is rounded for people: to its safe side. Absent: to the nearest. */
  rounding?: 'down' | 'up'
  /** What this difference alone does to the mark. */
  change: Exclude<MarkLevel, 'patch'>
}

export interface CardComparison {
  /** By the gravest difference; patch where there is none. */
  level: MarkLevel
  differences: CardDifference[]
  /** The headline's kind on both sides, where it is another one ("was soft"). */
  kind: { was: SummaryKind; now: SummaryKind } | null
}

/** Onsets, turning points and branch points: of the control range. Steady states: of the search range. */
const positionTolerance = 1e-6
/** Everything else: relative. */
const relativeTolerance = 1e-5

/**
 * What differs between two cards, by the product's rule of marks: another verdict, set of onsets, unit, control or observed
 * quantity is major; numbers that moved beyond their tolerance are minor; the rest (words, sources, rounding) is patch.
 *
 * Tolerances: positions on the control 1e-6 of its range (the wider one); frequency, crossing and cubic 1e-5 relative
 * or their error bar, whichever is larger; ends of the window the larger of both; steady states 1e-6 of the search range,
 * and only where the running point is the same. A unit is another one where it is written differently, and also where it
 * is new or gone. Where in doubt the graver level is told: it only makes people look.
 *
 * @throws {RangeError} if a document was not checked (control without a range).
 */
export function compareCards(before: Judged, after: Judged): CardComparison {
  const was = summarise(before.document, before.card)
  const now = summarise(after.document, after.card)
  const differences: CardDifference[] = []
  const major: Tell = (what, from, to) => {
    if (from !== to) differences.push({ what, was: from, now: to, change: 'major' })
  }
  const sameControl = sameSymbol(was.control.symbol, now.control.symbol)
  if (!sameControl) major('Control parameter', was.control.symbol, now.control.symbol)
  if (!sameSymbol(was.observed.symbol, now.observed.symbol)) {
    major('Observed quantity', was.observed.symbol, now.observed.symbol)
  }
  compareUnits(before.document, after.document, major)
  major('Verdict', was.kind, now.kind)
  compareWindowKinds(before.card, after.card, major)
  const range = Math.max(was.control.high - was.control.low, now.control.high - now.control.low)
  const pair = { first: inOrder(before.card, range), second: inOrder(after.card, range), range }
  compareOnsetKinds(pair, major)
  if (sameControl) differences.push(...compareNumbers(before, after, pair))

  const level = differences.some((one) => one.change === 'major') ? 'major' : differences.length > 0 ? 'minor' : 'patch'
  return { level, differences, kind: was.kind === now.kind ? null : { was: was.kind, now: now.kind } }
}

type Tell = (what: string, was: Value, now: Value) => void
interface Paired {
  first: readonly HopfPoint[]
  second: readonly HopfPoint[]
  /** Of the control. */
  range: number
}

const unitText = (unit: string | undefined) => unit?.replace(/\s+/g, ' ').trim() || null

function compareUnits(before: DescribedModel, after: DescribedModel, major: Tell): void {
  major('Unit of time', unitText(before.timeUnit), unitText(after.timeUnit))
  const rows = (document: DescribedModel) => [...document.parameters, ...document.states]
  const earlier = new Map(rows(before).map((row) => [foldSymbol(row.symbol) ?? row.symbol, row]))
  for (const row of rows(after)) {
    const old = earlier.get(foldSymbol(row.symbol) ?? row.symbol)
    if (old) major(`Unit of ${row.symbol}`, unitText(old.unit), unitText(row.unit))
  }
}

const endWords = {
  onset: 'onset',
  fold: 'turning point',
  'branch-point': 'branch point',
  'box-left': 'leaves the search box',
  'range-end': 'end of the range',
} as const

function compareWindowKinds(before: StabilityCard, after: StabilityCard, major: Tell): void {
  const running = (card: StabilityCard) => (card.window ? 'steady' : card.window === null ? 'not steady' : null)
  major('At the running point', running(before), running(after))
  if (!before.window || !after.window) return
  major('What ends steady running below', endWords[before.window.low.kind], endWords[after.window.low.kind])
  major('What ends steady running above', endWords[before.window.high.kind], endWords[after.window.high.kind])
}

const close = (a: number, b: number) => Math.abs(a - b) <= relativeTolerance * Math.max(Math.abs(a), Math.abs(b))
const sumOf = (point: HopfPoint) => Object.values(point.state).reduce((total, value) => total + value, 0)

/** The onsets in an order that rounding does not change: at one position (to its tolerance) by frequency, then by state. */
function inOrder(card: StabilityCard, range: number): HopfPoint[] {
  const groups: HopfPoint[][] = []
  for (const point of (card.hopf ?? []).toSorted((a, b) => a.p - b.p)) {
    const group = groups.at(-1)
    if (group?.[0] && point.p - group[0].p <= positionTolerance * range) group.push(point)
    else groups.push([point])
  }
  return groups.flatMap((group) =>
    group.sort((a, b) => (close(a.omega, b.omega) ? sumOf(a) - sumOf(b) : a.omega - b.omega)),
  )
}

const nameOf = (thing: string, index: number, count: number) =>
  count === 1 ? `the ${thing}` : `${thing} ${index + 1} of ${count}`
const limitWords = (point: HopfPoint) =>
  point.operating ? `stability, as the control ${point.crossing < 0 ? 'falls' : 'rises'}` : 'nothing, already unstable'

function compareOnsetKinds({ first, second }: Paired, major: Tell): void {
  major('Number of onsets', first.length, second.length)
  if (first.length !== second.length) return
  first.forEach((was, index) => {
    const now = second[index]
    if (!now) return
    const name = nameOf('onset', index, first.length)
    major(`Kind of ${name}`, was.verdict, now.verdict)
    major(`What ${name} ends`, limitWords(was), limitWords(now))
  })
}

/** Collects numbers that moved: `tolerance` in the number's own unit. */
function collector(differences: CardDifference[]) {
  const push = (what: string, was: number | null, now: number | null, unit: string, rounding?: 'down' | 'up') =>
    differences.push({
      what,
      was,
      now,
      ...(unit === '' ? {} : { unit }),
      ...(rounding === undefined ? {} : { rounding }),
      change: 'minor',
    })
  return {
    number(
      what: string,
      was: number | null,
      now: number | null,
      tolerance: number,
      unit = '',
      rounding?: 'down' | 'up',
    ) {
      const moved = was === null || now === null ? was !== now : Math.abs(now - was) > tolerance
      if (moved) push(what, was, now, unit, rounding)
    },
    /** Points of one kind along the control. */
    positions(thing: string, was: readonly number[], now: readonly number[], tolerance: number, unit: string) {
      if (was.length !== now.length) return push(`Number of ${thing}s`, was.length, now.length, '')
      was.forEach((p, index) => {
        this.number(`Position of ${nameOf(thing, index, was.length)}`, p, now[index] ?? null, tolerance, unit)
      })
    },
  }
}

const relative = (was: number | null, now: number | null, ...errorBars: (number | null)[]) =>
  Math.max(
    relativeTolerance * Math.max(Math.abs(was ?? 0), Math.abs(now ?? 0)),
    ...errorBars.map((bar) => Math.abs(bar ?? 0)),
  )
const sorted = (points: readonly { p: number }[] | undefined) =>
  (points ?? []).map((point) => point.p).sort((a, b) => a - b)

function compareNumbers(before: Judged, after: Judged, { first, second, range }: Paired): CardDifference[] {
  const differences: CardDifference[] = []
  const tell = collector(differences)
  const control = controlOf(after.document)
  const { timeUnit = '' } = after.document
  const onControl = positionTolerance * range

  for (const [index, was] of first.entries()) {
    const now = second[index]
    if (!now || first.length !== second.length) break
    const name = nameOf('onset', index, first.length)
    // Down where stability is lost as the control rises (the danger lies above), up where as it falls.
    const safe = was.crossing < 0 ? 'up' : 'down'
    tell.number(`Position of ${name}`, was.p, now.p, onControl, control.unit, safe)
    const frequencyUnit = timeUnit === '' ? '' : `rad/${timeUnit}`
    tell.number(`Frequency at ${name}`, was.omega, now.omega, relative(was.omega, now.omega), frequencyUnit)
    tell.number(`Crossing rate at ${name}`, was.crossing, now.crossing, relative(was.crossing, now.crossing))
    const cubicTolerance = relative(was.cubic, now.cubic, was.cubicError, now.cubicError)
    tell.number(`Cubic coefficient at ${name}`, was.cubic, now.cubic, cubicTolerance)
    if (was.cubic !== null || now.cubic !== null) continue
    const [l, m] = [was.firstLyapunov, now.firstLyapunov]
    tell.number(`First Lyapunov coefficient at ${name}`, l, m, relative(l, m, was.cubicError, now.cubicError))
  }
  const [a, b] = [before.card, after.card]
  tell.positions('turning point', sorted(a.folds), sorted(b.folds), onControl, control.unit)
  tell.positions('branch point', sorted(a.branchPoints), sorted(b.branchPoints), onControl, control.unit)
  if (a.window && b.window) {
    const { window: was } = a
    const { window: now } = b
    tell.number(
      'Steady running from',
      was.from,
      now.from,
      Math.max(onControl, relative(was.from, now.from)),
      control.unit,
      'up',
    )
    const toTolerance = Math.max(onControl, relative(was.to, now.to))
    tell.number('Steady running to', was.to, now.to, toTolerance, control.unit, 'down')
  }
  if (controlOf(before.document).value === control.value) compareSteadyStates(before, after, tell)
  return differences
}

function compareSteadyStates(before: Judged, after: Judged, tell: ReturnType<typeof collector>): void {
  const was = before.card.steadyStates ?? []
  const now = after.card.steadyStates ?? []
  tell.number('Number of steady states at the running point', was.length, now.length, 0)
  if (was.length !== now.length) return
  for (const { symbol, low, high, unit } of after.document.states) {
    const valueIn = (state: Record<string, number>) =>
      Object.entries(state).find(([name]) => sameSymbol(name, symbol))?.[1] ?? null
    for (const [index, steady] of was.entries()) {
      const other = now[index]
      if (!other) break
      const name = `${symbol} in ${nameOf('steady state', index, was.length)}`
      tell.number(name, valueIn(steady.state), valueIn(other.state), positionTolerance * (high - low), unit)
    }
  }
}
