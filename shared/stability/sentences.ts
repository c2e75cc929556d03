import type { HopfPoint, RunningWindow, StabilityCard, Verdict } from '#shared/model/card-document.ts'
import { formatFrequency, formatNumber, type Rounding } from './numbers.ts'
import { controlOf, type DescribedModel } from './summary.ts'

/** `limit`: a turning point, branch point or the box ends the steady running. `unstable`: nothing stable is running. */
export type VerdictKind = 'hard' | 'soft' | 'undecided' | 'limit' | 'none' | 'unstable'

/** A verdict in words. The screen colours `kindWord` by `kind` and shows `glyph` beside it. */
export interface VerdictWords {
  kind: VerdictKind
  glyph: 'hard' | 'soft' | 'open' | 'none'
  headline: { kindWord: string; rest: string }
  /** One to three short sentences: what happens to the machine. */
  sentence: string
  /** For the live region: headline and sentence as one text. */
  live: string
}

export interface WordOptions {
  /** The viewer's decimal mark. Default: point. */
  decimalMark?: '.' | ','
}

type DescribedPage = DescribedModel & { quietWord?: string }

interface Voice {
  quiet: string
  unit: string
  low: number
  high: number
  value: number
  number(value: number, rounding: Rounding): string
  frequency(omega: number): string
}

/** Vocabulary: numbers carry four significant digits; frequencies three, which is what they are read for. */
const digits = 4
const frequencyDigits = 3

function voiceOf(page: DescribedPage, { decimalMark = '.' }: WordOptions): Voice {
  const control = controlOf(page)
  const noise = 1e-9 * (control.high - control.low)
  const unit = control.unit === '' || control.unit === '1' ? '' : ` ${control.unit}`
  return {
    quiet: page.quietWord?.trim() || 'Steady',
    unit,
    low: control.low,
    high: control.high,
    value: control.value,
    number: (value, rounding) => formatNumber(value, { digits, rounding, noise, decimalMark }),
    frequency: (omega) => formatFrequency(omega, page.timeUnit ?? null, { digits: frequencyDigits, decimalMark }),
  }
}

/**
 * The verdict of a card in words: headline, sentence, and both for the live region. Onsets are rounded to the safe side:
 * down where the danger lies above, up where it lies below. Never promises what was not computed: without cycles no word
 * of coming back, of how far it jumps, or of what happens past a soft onset.
 *
 * @param page  the document the card was computed from.
 * @throws {RangeError} if the document's control has no range (it was not checked).
 */
export function verdictWords(card: StabilityCard, page: DescribedPage, options: WordOptions = {}): VerdictWords {
  const voice = voiceOf(page, options)
  const words = card.window ? ofWindow(card, card.window, voice) : withoutWindow(card, voice)
  const { kindWord, rest } = words.headline
  return { ...words, live: `${kindWord} ${rest}. ${words.sentence}` }
}

type Words = Omit<VerdictWords, 'live'>

/** One end of the window that is a limit, with the side on which the danger lies. */
interface Limit {
  side: 'below' | 'above'
  p: number
  end: RunningWindow['low']
  onset: HopfPoint | null
}

const kindOfVerdict: Record<Verdict, 'hard' | 'soft' | 'undecided'> = {
  hard: 'hard',
  soft: 'soft',
  degenerate: 'undecided',
  undetermined: 'undecided',
}
const gravity: Record<VerdictKind, number> = { hard: 0, undecided: 1, soft: 2, limit: 3, none: 4, unstable: 4 }
const wordOf: Record<VerdictKind, string> = {
  hard: 'Hard',
  soft: 'Soft',
  undecided: 'Undecided',
  limit: 'Limit',
  none: 'No onset',
  unstable: 'Already unstable',
}

function limitsOf(card: StabilityCard, window: RunningWindow): Limit[] {
  const limit = (side: Limit['side'], p: number, end: RunningWindow['low']): Limit[] => {
    if (end.kind === 'range-end') return []
    const onset = end.kind === 'onset' && end.index !== undefined ? (card.hopf?.[end.index] ?? null) : null
    return [{ side, p, end, onset }]
  }
  return [...limit('above', window.to, window.high), ...limit('below', window.from, window.low)]
}

function kindOfLimit({ end }: Limit): VerdictKind {
  if (end.kind !== 'onset') return 'limit'
  return end.verdict === undefined ? 'undecided' : kindOfVerdict[end.verdict]
}

function safe({ number, unit }: Voice, limit: Limit): string {
  return number(limit.p, limit.side === 'above' ? 'down' : 'up') + unit
}

function ofWindow(card: StabilityCard, window: RunningWindow, voice: Voice): Words {
  const limits = limitsOf(card, window).sort((a, b) => gravity[kindOfLimit(a)] - gravity[kindOfLimit(b)])
  const [main, other] = limits
  if (!main) {
    const between = `between ${voice.number(voice.low, 'nearest')} and ${voice.number(voice.high, 'nearest')}${voice.unit}`
    return {
      kind: 'none',
      glyph: 'none',
      headline: { kindWord: wordOf.none, rest: between },
      sentence: `${voice.quiet} over the whole range.`,
    }
  }
  const kind = kindOfLimit(main)
  const sentence = [opening(limits, voice), ...limits.map((limit) => consequence(limit, limits, voice))].filter(Boolean)
  return {
    kind,
    glyph: kind === 'hard' || kind === 'soft' ? kind : 'open',
    headline: headlineOf(main, other, voice),
    sentence: [...new Set(sentence)].join(' '),
  }
}

function headlineOf(main: Limit, other: Limit | undefined, voice: Voice): VerdictWords['headline'] {
  const kind = kindOfLimit(main)
  const kindWord = kind === 'limit' ? limitWord(main) : wordOf[kind]
  const noun = kind === 'hard' || kind === 'soft' ? 'onset ' : ''
  if (!other || kindOfLimit(other) === 'limit') return { kindWord, rest: `${noun}at ${safe(voice, main)}` }
  const second = kindOfLimit(other)
  const [first, last] = [`${main.side} ${safe(voice, main)}`, `${other.side} ${safe(voice, other)}`]
  if (second === kind) return { kindWord, rest: `${noun}${first} and ${last}` }
  return { kindWord, rest: `${noun}${first}, ${wordOf[second].toLowerCase()} ${last}` }
}

function limitWord({ end }: Limit): string {
  if (end.kind === 'fold') return 'Turning point'
  return end.kind === 'branch-point' ? 'Branch point' : 'Search ends'
}

/** "Runs straight up to 58.0 m/s" or "Steady between 4.4 and 14 m/s". */
function opening(limits: readonly Limit[], voice: Voice): string {
  const above = limits.find((limit) => limit.side === 'above')
  const below = limits.find((limit) => limit.side === 'below')
  if (above && below) {
    return `${voice.quiet} between ${voice.number(below.p, 'up')} and ${voice.number(above.p, 'down')}${voice.unit}.`
  }
  const only = above ?? below
  if (!only) return ''
  const way = only.side === 'above' ? 'up to' : 'down to'
  return `${voice.quiet} ${way} ${safe(voice, only)}${only.onset ? `, then swings at ${voice.frequency(only.onset.omega)}` : ''}.`
}

const onsetSentence: Record<'hard' | 'soft' | 'undecided', string> = {
  hard: 'Jumps; how far, and where it comes back, is not computed yet.',
  soft: 'Grows gradually at first; what happens further on is not computed yet.',
  undecided: 'Whether it grows gradually or jumps cannot be decided here.',
}

function consequence(limit: Limit, limits: readonly Limit[], voice: Voice): string {
  const kind = kindOfLimit(limit)
  const where = limits.length > 1 ? `${limit.side === 'above' ? 'Above' : 'Below'}: ` : ''
  const lower = (text: string): string => (where ? text.charAt(0).toLowerCase() + text.slice(1) : text)
  if (kind === 'hard' || kind === 'soft' || kind === 'undecided') {
    const swing = where && limit.onset ? `swings at ${voice.frequency(limit.onset.omega)}; ` : ''
    return `${where}${swing}${lower(onsetSentence[kind])}`
  }
  if (limit.end.kind === 'fold') {
    return `${where}${lower('The steady state ends there; where it goes is not computed yet.')}`
  }
  if (limit.end.kind === 'branch-point') {
    return `${where}${lower('There it gives way to another steady state.')}`
  }
  return `${where}${lower('There the steady state leaves the range that was searched.')}`
}

function withoutWindow(card: StabilityCard, voice: Voice): Words {
  const at = `at ${voice.number(voice.value, 'nearest')}${voice.unit}`
  const states = card.steadyStates ?? []
  if (voice.value < voice.low || voice.value > voice.high) {
    return open('Undecided', at, 'The running point lies outside the range that was swept.')
  }
  if (states.length === 0 && card.steadyStates) {
    return open('No steady state', at, 'None was found in the ranges of the states.')
  }
  if (states.some((state) => state.stable)) {
    return open('Undecided', at, 'From its start values the model does not settle on a steady state here.')
  }
  return alreadyUnstable(card, voice, at)
}

function open(kindWord: string, rest: string, sentence: string): Words {
  return { kind: 'undecided', glyph: 'open', headline: { kindWord, rest }, sentence }
}

/** Nothing stable at the running point: never an onset as its limit, but where stability is found again. */
function alreadyUnstable(card: StabilityCard, voice: Voice, at: string): Words {
  const limits = (card.hopf ?? []).filter((point) => point.operating)
  const above = limits.filter((point) => point.crossing < 0 && point.p >= voice.value).sort((a, b) => a.p - b.p)[0]
  const below = limits.filter((point) => point.crossing > 0 && point.p <= voice.value).sort((a, b) => b.p - a.p)[0]
  const upper = above && voice.number(above.p, 'up')
  const lower = below && voice.number(below.p, 'down')
  const rest =
    upper && lower
      ? `between ${lower} and ${upper}${voice.unit}`
      : upper
        ? `below ${upper}${voice.unit}`
        : lower
          ? `above ${lower}${voice.unit}`
          : at
  return {
    kind: 'unstable',
    glyph: 'open',
    headline: { kindWord: wordOf.unstable, rest },
    sentence: `At the running point no steady state is stable; what the model does there is not computed yet.`,
  }
}
