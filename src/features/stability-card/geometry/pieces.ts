import type { Branch, StabilityCard } from '#shared/model/card-document.ts'
import { between, type Complex, growthRate, inOneOrder } from './eigen-paths.ts'
import { fromChord, gapBetween, observedAt, type Place, type ScaledBranches, scaledBranches } from './scaled.ts'

/** A point of a branch in the model's own units; `eigenvalues` are in one order along the branch. */
export interface CurvePoint extends Place {
  value: number
  eigenvalues: readonly Complex[]
}

/** What stands at the end of a piece. `index` is the position in the card's list of that kind. */
export interface PieceEnd {
  kind: 'onset' | 'turning-point' | 'branch-point' | 'range-end' | 'box-left' | 'open'
  index: number | null
}

/** A part of a branch that is stable, or unstable, from end to end. */
export interface Piece {
  branch: number
  stable: boolean
  points: CurvePoint[]
  start: PieceEnd
  end: PieceEnd
}

interface Special extends Place {
  value: number
  at: number[]
  end: PieceEnd
  branch: number | null
}

function specialsOf(card: StabilityCard, scaled: ScaledBranches): Special[] {
  const special = (place: Place, end: PieceEnd, branch: number | null): Special[] => {
    const value = observedAt(card, scaled, place, branch ?? undefined)
    return value === null ? [] : [{ p: place.p, state: place.state, value, at: scaled.scale(place), end, branch }]
  }
  return [
    ...(card.hopf ?? []).flatMap((at, index) => special(at, { kind: 'onset', index }, at.branch)),
    ...(card.folds ?? []).flatMap((at, index) => special(at, { kind: 'turning-point', index }, null)),
    ...(card.branchPoints ?? []).flatMap((at, index) => special(at, { kind: 'branch-point', index }, null)),
  ]
}

export function betweenPoints(a: CurvePoint, b: CurvePoint, t: number): CurvePoint {
  const state = Object.fromEntries(
    Object.entries(a.state).map(([symbol, value]) => [symbol, value + ((b.state[symbol] ?? value) - value) * t]),
  )
  return {
    p: a.p + (b.p - a.p) * t,
    value: a.value + (b.value - a.value) * t,
    state,
    eigenvalues: a.eigenvalues.map((value, k) => between(value, b.eigenvalues[k] ?? value, t)),
  }
}

/** Where between two points stability changes: at the special point that lies there, else where the growth rate is zero. */
function changeBetween(a: CurvePoint, b: CurvePoint, from: number[], to: number[], specials: Special[]) {
  let best: { special: Special; gap: number; share: number } | null = null
  for (const special of specials) {
    const { gap, share, length } = fromChord(special.at, from, to)
    if (gap <= 0.25 * length + 1e-6 && (!best || gap < best.gap)) best = { special, gap, share }
  }
  if (best) {
    const { p, state, value, end } = best.special
    return { point: { p, state, value, eigenvalues: betweenPoints(a, b, best.share).eigenvalues }, end }
  }
  const before = growthRate(a.eigenvalues) ?? 0
  const after = growthRate(b.eigenvalues) ?? 0
  const end: PieceEnd = { kind: 'open', index: null }
  return { point: betweenPoints(a, b, before * after < 0 ? before / (before - after) : 0.5), end }
}

function endOf(branch: Branch, which: 0 | 1, at: readonly number[], specials: Special[]): PieceEnd {
  const kind = branch.ends[which]?.kind
  if (kind === 'range-end' || kind === 'box-left') return { kind, index: null }
  if (kind !== 'branch-point') return { kind: 'open', index: null }
  const nearest = specials
    .filter((special) => special.end.kind === 'branch-point')
    .sort((a, b) => gapBetween(a.at, at) - gapBetween(b.at, at))[0]
  return nearest?.end ?? { kind: 'branch-point', index: null }
}

function piecesOfBranch(
  branch: Branch,
  coordinates: number[][],
  all: Special[],
  scale: ScaledBranches['scale'],
): Piece[] {
  const specials = all.filter((special) => special.branch === null || special.branch === branch.id)
  const orders = inOneOrder(branch.points.map((point) => point.eigenvalues))
  const points = branch.points.map(({ p, state, observed, stable, eigenvalues }, i) => ({
    stable,
    point: { p, state, value: observed, eigenvalues: orders[i] ?? eigenvalues } satisfies CurvePoint as CurvePoint,
  }))
  const first = points[0]
  const [start, end] = [coordinates[0], coordinates.at(-1)]
  if (!first || !start || !end) return []
  const final = endOf(branch, 1, end, specials)
  let piece: Piece = {
    branch: branch.id,
    stable: first.stable,
    points: [first.point],
    start: endOf(branch, 0, start, specials),
    end: final,
  }
  const pieces: Piece[] = []
  for (let i = 1; i < points.length; i++) {
    const [a, b, from, to] = [points[i - 1], points[i], coordinates[i - 1], coordinates[i]]
    if (!a || !b || !from || !to) continue
    if (b.stable === piece.stable) {
      piece.points.push(b.point)
      continue
    }
    const change = changeBetween(a.point, b.point, from, to, specials)
    pieces.push({ ...piece, points: [...piece.points, change.point], end: change.end })
    piece = { branch: branch.id, stable: b.stable, points: [change.point, b.point], start: change.end, end: final }
  }
  return joined([...pieces, piece], scale)
}

const samePlace = (a: CurvePoint, b: CurvePoint) => a.p === b.p && a.value === b.value

/** Shorter than this, in coordinates in which every quantity spans 1, a piece is one place. */
const onePlace = 1e-6

/** Drops pieces that are one place (a zero real part met at one point of the sweep) and joins what they parted. */
function joined(pieces: Piece[], scale: ScaledBranches['scale']): Piece[] {
  const kept: Piece[] = []
  let skipped: PieceEnd | null = null
  for (const piece of pieces) {
    const first = piece.points[0]
    if (!first) continue
    const points = piece.points.filter((point, i) => {
      const before = piece.points[i - 1]
      return !before || !samePlace(before, point)
    })
    const before = kept.at(-1)
    const from = scale(first)
    const short = points.every((point) => gapBetween(scale(point), from) < onePlace)
    if (short && pieces.length > 1) {
      if (before) kept[kept.length - 1] = { ...before, end: piece.end }
      else skipped = piece.start
      continue
    }
    if (before?.stable === piece.stable) {
      kept[kept.length - 1] = { ...before, points: [...before.points, ...points], end: piece.end }
    } else kept.push({ ...piece, points, start: before ? piece.start : (skipped ?? piece.start) })
  }
  return kept
}

/**
 * The card's branches, cut where stability changes. The cut lies exactly at the card's own onset, turning point or branch
 * point, so that the solid line ends where the mark stands and not at the nearest computed point.
 */
export function piecesOf(card: StabilityCard): Piece[] {
  const scaled = scaledBranches(card)
  const specials = specialsOf(card, scaled)
  return scaled.branches.flatMap(({ branch, coordinates }) =>
    piecesOfBranch(branch, coordinates, specials, scaled.scale),
  )
}
