import type { CardSummary } from '#shared/api/pages.ts'

/** Heights in the strip's own pixels: running triangle, level of the ground, underside of a lip, floor, axis numbers. */
export const stripHeights = { tip: 12, level: 14, lip: 22, floor: 40, numbers: 55, all: 58 } as const

/** How a stretch of ground ends. */
export type EndKind = 'range' | 'soft' | 'hard' | 'undecided' | 'turning-point' | 'branch-point' | 'box-left'

export interface StripEnd {
  kind: EndKind
  x: number
  p: number
}
export interface StripGeometry {
  width: number
  ground: { left: StripEnd; right: StripEnd; outline: string }[]
  /** Stretches where the steady state is not stable. */
  dashed: { from: number; to: number }[]
  /** What one lands on: in the hue of the kind, dotted where the kind is undecided. */
  floors: { from: number; to: number; kind: 'soft' | 'hard' | 'undecided' }[]
  ramps: { path: string }[]
  /** Heavy faces of a hard end: edge of the lip and its underside. */
  lips: { path: string }[]
  /** The inner face of an undercut, whose place is not known before cycles are computed. */
  undercuts: { x: number }[]
  /** Plain faces at turning points, and dotted drops at undecided onsets. */
  faces: { x: number; dotted: boolean }[]
  marks: { x: number; kind: 'soft' | 'hard' | 'undecided' | 'turning-point'; mirrored: boolean }[]
  running: number | null
}

/**
 * Depth of an undercut in pixels. It is the same on every strip on purpose: where a jumped system comes back is known
 * only once cycles are computed, and an undercut drawn to some value would state a recovery nobody has worked out.
 */
export const unknownUndercut = 22

const longestRamp = 34
const rampShare = 0.42

/** Lays out an edge strip. The control always rises to the right; every stretch of ground in the range is drawn. */
export function stripGeometry(card: CardSummary, width: number): StripGeometry {
  const { low, high } = card.control
  const span = high - low
  const toX = (p: number) => round(Math.min(width, Math.max(0, ((p - low) / span) * width)))
  const near = span * 1e-3

  const endAt = (p: number, side: 'left' | 'right'): StripEnd => {
    const x = toX(p)
    if (side === 'left' && p - low <= near * 1e-3) return { kind: 'range', x: 0, p: low }
    if (side === 'right' && high - p <= near * 1e-3) return { kind: 'range', x: width, p: high }
    // Stability is lost as the control rises at a right end, and as it falls at a left one.
    const direction = side === 'right' ? 1 : -1
    const distance = (candidate: { p: number }) => Math.abs(candidate.p - p)
    const onset = card.onsets
      .filter((candidate) => candidate.direction === direction && distance(candidate) <= near)
      .sort((a, b) => distance(a) - distance(b))[0]
    if (onset) {
      const kind = onset.verdict === 'hard' || onset.verdict === 'soft' ? onset.verdict : 'undecided'
      return { kind, x: toX(onset.p), p: onset.p }
    }
    const other = card.otherEnds.find((candidate) => distance(candidate) <= near)
    // Ground that ends where no limit was found ends with a plain face: no more was checked.
    const kind = other?.kind === 'fold' ? 'turning-point' : (other?.kind ?? 'box-left')
    return { kind, x, p }
  }

  const stretches = [...card.ground]
    .filter((stretch) => stretch.to > stretch.from)
    .sort((a, b) => a.from - b.from)
    .map((stretch) => ({ left: endAt(stretch.from, 'left'), right: endAt(stretch.to, 'right') }))

  const geometry: StripGeometry = {
    width,
    ground: [],
    dashed: [],
    floors: [],
    ramps: [],
    lips: [],
    undercuts: [],
    faces: [],
    marks: [],
    running: card.control.value >= low && card.control.value <= high ? toX(card.control.value) : null,
  }

  const gapBefore = (index: number) => (stretches[index]?.left.x ?? width) - (stretches[index - 1]?.right.x ?? 0)
  stretches.forEach(({ left, right }, index) => {
    const room = right.x - left.x
    const leftEnd = layEnd(geometry, left, -1, room, gapBefore(index))
    const rightEnd = layEnd(geometry, right, 1, room, gapBefore(index + 1))
    geometry.ground.push({ left, right, outline: outlineOf(left, right, leftEnd, rightEnd) })
  })

  for (let index = 0; index <= stretches.length; index++) {
    layGap(geometry, stretches[index - 1]?.right ?? null, stretches[index]?.left ?? null)
  }
  return geometry
}

/** Where the ground's outline meets the floor at this end. */
interface Foot {
  /** x at the underside of the lip, or null where there is no lip. */
  lip: number | null
  floor: number
}

function layEnd(geometry: StripGeometry, end: StripEnd, out: 1 | -1, room: number, gap: number): Foot {
  const { level, lip, floor } = stripHeights
  const { kind, x } = end
  if (kind === 'hard') {
    const inner = round(x - out * Math.min(unknownUndercut, room * 0.6))
    geometry.lips.push({ path: `M${x} ${level}V${lip}H${inner}` })
    geometry.undercuts.push({ x: inner })
    geometry.marks.push({ x, kind, mirrored: out < 0 })
    return { lip: inner, floor: inner }
  }
  if (kind === 'soft') {
    const foot = round(x + out * rampLength(gap))
    geometry.ramps.push({ path: `M${x} ${level}L${foot} ${floor}` })
    geometry.marks.push({ x, kind, mirrored: out < 0 })
    return { lip: null, floor: foot }
  }
  if (kind === 'undecided') {
    geometry.faces.push({ x, dotted: true })
    geometry.marks.push({ x, kind, mirrored: out < 0 })
  } else if (kind !== 'range') {
    geometry.faces.push({ x, dotted: false })
    if (kind !== 'box-left') geometry.marks.push({ x, kind: 'turning-point', mirrored: out < 0 })
  }
  return { lip: null, floor: x }
}

const rampLength = (gap: number) => Math.min(longestRamp, gap * rampShare)

function outlineOf(left: StripEnd, right: StripEnd, leftFoot: Foot, rightFoot: Foot): string {
  const { level, lip, floor } = stripHeights
  const rightSide = rightFoot.lip === null ? '' : `V${lip}H${rightFoot.lip}`
  const leftSide = leftFoot.lip === null ? '' : `V${lip}H${left.x}`
  return `M${left.x} ${level}H${right.x}${rightSide}L${rightFoot.floor} ${floor}H${leftFoot.floor}${leftSide}z`
}

/** The gap between two stretches of ground (or a stretch and an end of the range): dashed line above, floor below. */
function layGap(geometry: StripGeometry, before: StripEnd | null, after: StripEnd | null): void {
  const from = before?.x ?? 0
  const to = after?.x ?? geometry.width
  if (to - from < 0.5) return
  const kinds = [before?.kind, after?.kind].filter((kind) => kind !== undefined)
  const onsetHere = kinds.some((kind) => kind === 'soft' || kind === 'hard' || kind === 'undecided')
  // Past a turning point the steady state does not exist any more: nothing is drawn there.
  if (kinds.length === 0 || onsetHere) geometry.dashed.push({ from, to })
  if (!onsetHere) return
  const kind = kinds.includes('hard') ? 'hard' : kinds.includes('undecided') ? 'undecided' : 'soft'
  const gap = to - from
  const foot = (end: StripEnd | null, out: 1 | -1, otherwise: number) => {
    if (end?.kind === 'soft') return round(end.x + out * rampLength(gap))
    if (end?.kind !== 'hard') return otherwise
    // The undercut laid for this end: the nearest inner face behind the lip.
    const inner = geometry.undercuts.map((undercut) => undercut.x).filter((x) => (end.x - x) * out > 0)
    return inner.sort((a, b) => Math.abs(a - end.x) - Math.abs(b - end.x))[0] ?? end.x
  }
  geometry.floors.push({ from: foot(before, 1, from), to: foot(after, -1, to), kind })
}

const round = (value: number) => Math.round(value * 100) / 100
