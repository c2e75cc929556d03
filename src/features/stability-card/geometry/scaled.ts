import type { Branch, StabilityCard } from '#shared/model/card-document.ts'

/** A place in the model's own units. */
export interface Place {
  p: number
  state: Readonly<Record<string, number>>
}

/** A card's branches in coordinates in which every quantity spans about 1, so that distances compare unlike units. */
export interface ScaledBranches {
  branches: { branch: Branch; coordinates: number[][] }[]
  scale: (place: Place) => number[]
}

function spanOf(values: number[]): number {
  const low = values.reduce((a, b) => Math.min(a, b), Number.POSITIVE_INFINITY)
  const high = values.reduce((a, b) => Math.max(a, b), Number.NEGATIVE_INFINITY)
  const span = high - low
  return span > 0 && Number.isFinite(span) ? span : Math.max(Math.abs(high), Number.MIN_VALUE * 1e20)
}

export function scaledBranches(card: StabilityCard): ScaledBranches {
  const branches = card.branches ?? []
  const points = branches.flatMap((branch) => branch.points)
  const symbols = Object.keys(points[0]?.state ?? {})
  const spanP = spanOf(points.map((point) => point.p))
  const spans = symbols.map((symbol) => spanOf(points.map((point) => point.state[symbol] ?? 0)))
  const scale = ({ p, state }: Place) => [
    p / spanP,
    ...symbols.map((symbol, k) => (state[symbol] ?? 0) / (spans[k] ?? 1)),
  ]
  return { branches: branches.map((branch) => ({ branch, coordinates: branch.points.map(scale) })), scale }
}

export const gapBetween = (a: readonly number[], b: readonly number[]): number =>
  Math.hypot(...a.map((value, k) => value - (b[k] ?? 0)))

/** Distance of a point from the straight line between two others, and where on it the nearest place lies (0 to 1). */
export function fromChord(point: readonly number[], a: readonly number[], b: readonly number[]) {
  let dot = 0
  let square = 0
  a.forEach((start, k) => {
    const step = (b[k] ?? 0) - start
    dot += ((point[k] ?? 0) - start) * step
    square += step * step
  })
  const share = square > 0 ? Math.max(0, Math.min(1, dot / square)) : 0
  const gap = Math.hypot(...a.map((start, k) => (point[k] ?? 0) - start - ((b[k] ?? 0) - start) * share))
  return { gap, share, length: Math.sqrt(square) }
}

/**
 * The observed quantity at an onset, turning point or branch point. A state is read off the place itself; a helper off
 * the branch that passes nearest (the card lists helpers on branches only). Null where the card holds no branch.
 */
export function observedAt(
  card: StabilityCard,
  scaled: ScaledBranches,
  place: Place,
  branchId?: number,
): number | null {
  const own = place.state[card.observed]
  if (own !== undefined) return own
  const target = scaled.scale(place)
  let nearest: { gap: number; value: number } | null = null
  for (const { branch, coordinates } of scaled.branches) {
    if (branchId !== undefined && branch.id !== branchId) continue
    branch.points.forEach((a, i) => {
      const from = coordinates[i]
      const to = coordinates[i + 1] ?? from
      const b = branch.points[i + 1] ?? a
      if (!from || !to) return
      const { gap, share } = fromChord(target, from, to)
      if (!nearest || gap < nearest.gap) nearest = { gap, value: a.observed + (b.observed - a.observed) * share }
    })
  }
  return (nearest as { value: number } | null)?.value ?? null
}
