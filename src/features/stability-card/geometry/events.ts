import type { HopfPoint, StabilityCard, Verdict } from '#shared/model/card-document.ts'
import type { Rounding } from '#shared/stability/numbers.ts'
import { angularFigure, controlFigure, frequencyFigure, safeSide } from './figures.ts'
import type { Piece } from './pieces.ts'
import { observedAt, scaledBranches } from './scaled.ts'
import type { Subject } from './subject.ts'

export type OnsetLook = 'soft' | 'hard' | 'undecided'

/** Something that stands on a branch: an onset, a turning point or a branch point. */
export interface CardEvent {
  /** Unique on the card and the same in drawing, list and table: "onset-0", "turning-point-1", "branch-point-0". */
  id: string
  kind: 'onset' | 'turning-point' | 'branch-point'
  /** Position in the card's list of that kind. */
  index: number
  p: number
  /** Observed quantity there. */
  value: number
  /** Only onsets. */
  look: OnsetLook | null
  /** What it means for the steady running: `limit` ends it, `other` ends another stable state, `none` ends nothing. */
  role: 'limit' | 'other' | 'none'
  /** The fall lies towards lower values of the control. */
  mirrored: boolean
  /** The value of the control as text, rounded to the safe side. */
  text: string
  /** "Hard onset", "Turning point", ... */
  name: string
  /** What is known of it, in a few words. */
  detail: string
  /** The same for the drawing, where room is dear. */
  brief: string
}

export const lookOf = (verdict: Verdict): OnsetLook =>
  verdict === 'soft' || verdict === 'hard' ? verdict : 'undecided'

const roleWords: Record<CardEvent['role'], string> = {
  limit: 'limit',
  other: 'limit of another state',
  none: 'not a limit',
}

/** "limit", "limit of another state" or "not a limit". */
export const roleWord = (event: CardEvent): string => roleWords[event.role]

/** Which side of the window a point bounds: a limit above it is rounded down, one below it up. */
function sideOf(card: StabilityCard, kind: 'fold' | 'branch-point', index: number): Rounding {
  const bounds = (end: { kind: string; index?: number } | undefined) => end?.kind === kind && end.index === index
  if (bounds(card.window?.high)) return 'down'
  return bounds(card.window?.low) ? 'up' : 'nearest'
}

const isLimit = (card: StabilityCard, kind: 'onset' | 'fold' | 'branch-point', index: number) =>
  [card.window?.low, card.window?.high].some((end) => end?.kind === kind && end.index === index)

/** True where a stable piece ends at this point. */
const endsStable = (pieces: readonly Piece[], kind: CardEvent['kind'], index: number) =>
  pieces.some(
    (piece) => piece.stable && [piece.start, piece.end].some((end) => end.kind === kind && end.index === index),
  )

function onsetName(look: OnsetLook, operating: boolean): string {
  if (!operating) return 'Further pair'
  return { soft: 'Soft onset', hard: 'Hard onset', undecided: 'Undecided onset' }[look]
}

function onsetDetail(point: HopfPoint, subject: Subject): string {
  const rhythm = `${frequencyFigure(point.omega, subject)}, ${angularFigure(point.omega, subject)}`
  return point.operating ? rhythm : 'already unstable'
}

const forkWords = {
  pitchfork: 'the steady state splits',
  transcritical: 'two steady states trade stability',
  other: 'two steady states meet',
} as const

/** Everything that stands on the card's branches, lowest value of the control first. */
export function eventsOf(card: StabilityCard, subject: Subject, pieces: readonly Piece[]): CardEvent[] {
  const scaled = scaledBranches(card)
  const events: CardEvent[] = []
  const role = (kind: CardEvent['kind'], index: number, ends: boolean): CardEvent['role'] => {
    if (isLimit(card, kind === 'turning-point' ? 'fold' : kind, index)) return 'limit'
    return ends ? 'other' : 'none'
  }
  card.hopf?.forEach((point, index) => {
    const value = observedAt(card, scaled, point, point.branch)
    if (value === null) return
    const look = lookOf(point.verdict)
    events.push({
      id: `onset-${index}`,
      kind: 'onset',
      index,
      p: point.p,
      value,
      look,
      role: role('onset', index, point.operating),
      mirrored: point.crossing < 0,
      text: controlFigure(point.p, subject, safeSide(point)),
      name: onsetName(look, point.operating),
      detail: onsetDetail(point, subject),
      brief: point.operating ? frequencyFigure(point.omega, subject) : 'already unstable, not a limit',
    })
  })
  card.folds?.forEach((fold, index) => {
    const value = observedAt(card, scaled, fold)
    if (value === null) return
    const ends = endsStable(pieces, 'turning-point', index)
    events.push({
      id: `turning-point-${index}`,
      kind: 'turning-point',
      index,
      p: fold.p,
      value,
      look: null,
      role: role('turning-point', index, ends),
      mirrored: false,
      text: controlFigure(fold.p, subject, sideOf(card, 'fold', index)),
      name: 'Turning point',
      detail: ends ? 'a stable steady state ends' : 'two unstable steady states end',
      brief: ends ? 'a stable steady state ends' : 'two unstable steady states end',
    })
  })
  card.branchPoints?.forEach((point, index) => {
    const value = observedAt(card, scaled, point)
    if (value === null) return
    events.push({
      id: `branch-point-${index}`,
      kind: 'branch-point',
      index,
      p: point.p,
      value,
      look: null,
      role: role('branch-point', index, endsStable(pieces, 'branch-point', index)),
      mirrored: false,
      text: controlFigure(point.p, subject, sideOf(card, 'branch-point', index)),
      name: 'Branch point',
      detail: forkWords[point.kind],
      brief: forkWords[point.kind],
    })
  })
  return events.sort((a, b) => a.p - b.p || a.value - b.value)
}
