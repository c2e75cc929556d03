import type { BranchPoint } from './branch-switching.ts'
import { probe, type Vertex, type Walk, type WalkEnd, walk } from './continuation.ts'
import { between, correct, firstTangent, normalise, type Sample, sampleAt } from './corrector.ts'
import type { Forms } from './forms.ts'
import { controlOf, distance, type Frame, inside, observedAt, scaled } from './frame.ts'
import { samePoint } from './hopf.ts'

/** A branch of steady states, walked from end to end; the first vertex is the one at the lower control value. */
export interface BranchPath {
  readonly id: number
  readonly vertices: Vertex[]
  readonly ends: [WalkEnd, WalkEnd]
}

/** Steady states at one control value, from which branches are walked. */
export interface Starts {
  readonly p: number
  readonly states: readonly Float64Array[]
}

/** The branches found so far, added to by `growBranches`. */
export interface BranchSet {
  readonly paths: BranchPath[]
  /** Branch points met, each once, in the order found. */
  readonly branchPoints: BranchPoint[]
  /** Points at which a whole line of steady states stands at one control value: such a line is no branch. */
  readonly lines: Float64Array[]
  /** Steady states through which no branch could be followed: F_x and F_p are of too low rank there. */
  readonly unfollowed: Float64Array[]
}

/** An empty set. */
export function createBranchSet(): BranchSet {
  return { paths: [], branchPoints: [], lines: [], unfollowed: [] }
}

/**
 * Walks every branch through the given steady states that is not yet in the set, and every branch that leaves it at a
 * branch point. Ids are given in the order found, which depends on the model alone.
 */
export function growBranches(frame: Frame, forms: Forms, set: BranchSet, starts: Starts): void {
  for (const x of starts.states) {
    const z = scaled(frame, x, starts.p)
    if (frame.budget.spent()) return
    if (!inside(frame, z) || findOnPaths(frame, set.paths, z)) continue
    const t = firstTangent(frame, z)
    const sample = t && sampleAt(frame, z, t)
    // on a branch point itself no walk can set out: the branches through it are found from other values
    if (!sample || frame.bordered.smallestPivot < 1e-9) {
      set.unfollowed.push(z)
      continue
    }
    const start: Vertex = { sample, mark: null }
    const up = walk(frame, forms, start)
    const down = up.end.kind === 'closed' ? null : walk(frame, forms, reversed(start))
    addPath(frame, set, up, down)
    const met = [...up.branchPoints, ...(down?.branchPoints ?? [])]
    switchBranches(frame, forms, set, met)
  }
}

function switchBranches(frame: Frame, forms: Forms, set: BranchSet, met: BranchPoint[]): void {
  const waiting = met.filter((point) => isNew(frame, set, point))
  for (let point = waiting.shift(); point; point = waiting.shift()) {
    if (!isNew(frame, set, point)) continue
    const at = set.branchPoints.push(point) - 1
    const lines = set.lines.length
    const directions = point.other ? [point.other] : []
    if (point.ownTurns) directions.push(point.own)
    for (const direction of directions) {
      const turns = direction === point.own ? point.ownTurns : point.otherTurns
      const forth = walkFrom(frame, forms, set, point, direction)
      const back = walkFrom(
        frame,
        forms,
        set,
        point,
        direction.map((value) => -value),
      )
      if (turns || !forth || !back) {
        for (const half of [forth, back]) if (half) addPath(frame, set, half, null)
      } else addPath(frame, set, forth, back)
      for (const half of [forth, back]) waiting.push(...(half?.branchPoints ?? []))
    }
    if (set.lines.length > lines) set.branchPoints[at] = { ...point, kind: 'other' }
  }
}

function isNew(frame: Frame, set: BranchSet, point: BranchPoint): boolean {
  return !set.branchPoints.some((known) => samePoint(frame, known.z, point.z))
}

/** A walk from a branch point along one direction; null where that branch is known or does not set out. */
function walkFrom(frame: Frame, forms: Forms, set: BranchSet, point: BranchPoint, t: Float64Array): Walk | null {
  const at = sampleAt(frame, point.z, t)
  if (!at && frame.budget.spent()) return null
  const spectrum = at?.spectrum ?? spectrumNear(frame, point.z)
  if (!spectrum) return null
  const sample: Sample = { z: point.z, t, sign: 0, spectrum }
  const first = probe(frame, sample)
  if (!first || !inside(frame, first.z) || findOnPaths(frame, set.paths, first.z)) return null
  const result = walk(frame, forms, { sample, mark: 'branch-point' })
  if (result.vertices.length < 2) return null
  if (
    result.vertices.some(({ sample: { z } }) => Math.abs((z[frame.n] as number) - (point.z[frame.n] as number)) > 1e-9)
  ) {
    return result
  }
  if (!set.lines.some((known) => samePoint(frame, known, point.z))) set.lines.push(point.z)
  return null
}

function spectrumNear(frame: Frame, z: Float64Array): Sample['spectrum'] | null {
  // exactly singular at the point itself: the eigenvalues a rounding away are the same
  const near = z.map((value) => value * (1 + 1e-14) + 1e-15)
  const t = firstTangent(frame, near)
  return t ? (sampleAt(frame, near, t)?.spectrum ?? null) : null
}

function reversed({ sample, mark }: Vertex): Vertex {
  return { sample: { ...sample, t: sample.t.map((value) => -value), sign: -sample.sign }, mark }
}

/** Joins two walks from one start (or takes one as it is) and files the path with its lower end first. */
function addPath(frame: Frame, set: BranchSet, forth: Walk, back: Walk | null): void {
  const vertices = back ? [...back.vertices.slice(1).reverse().map(reversed), ...forth.vertices] : forth.vertices
  if (vertices.length < 2) return
  const startEnd: WalkEnd = back ? back.end : startOf(forth)
  const path = {
    id: set.paths.length,
    vertices: markStart(frame, vertices, back),
    ends: [startEnd, forth.end] as [WalkEnd, WalkEnd],
  }
  set.paths.push(lowerFirst(frame, path))
}

function startOf(forth: Walk): WalkEnd {
  if (forth.end.kind === 'closed') return forth.end
  return forth.vertices[0]?.mark === 'branch-point' ? { kind: 'branch-point' } : { kind: 'budget' }
}

/** A walk that sets out exactly from a turning point sees it in neither direction: it is marked here. */
function markStart(frame: Frame, vertices: Vertex[], back: Walk | null): Vertex[] {
  if (!back) return vertices
  const at = back.vertices.length - 1
  const [before, here, after] = [vertices[at - 1], vertices[at], vertices[at + 1]]
  if (!before || !here || !after || here.mark !== null || before.mark === 'fold' || after.mark === 'fold')
    return vertices
  const left = (before.sample.z[frame.n] as number) - (here.sample.z[frame.n] as number)
  const right = (after.sample.z[frame.n] as number) - (here.sample.z[frame.n] as number)
  const flat = Math.abs(here.sample.t[frame.n] as number) < 1e-6
  if (flat && left * right > 0) vertices[at] = { ...here, mark: 'fold' }
  return vertices
}

function lowerFirst(frame: Frame, path: BranchPath): BranchPath {
  const first = path.vertices[0] as Vertex
  const last = path.vertices[path.vertices.length - 1] as Vertex
  const [p, q] = [controlOf(frame, first.sample.z), controlOf(frame, last.sample.z)]
  const slack = 1e-9 * (frame.high - frame.low)
  const swap = q < p - slack || (q <= p + slack && observedAt(frame, last.sample.z) < observedAt(frame, first.sample.z))
  if (!swap) return path
  return { id: path.id, vertices: path.vertices.map(reversed).reverse(), ends: [path.ends[1], path.ends[0]] }
}

/** Where a point lies on one of the paths. */
export interface PathPosition {
  readonly path: BranchPath
  /** The point lies between vertices `segment` and `segment + 1`. */
  readonly segment: number
}

/**
 * The path a point lies on, or null. The point is compared with the branch itself (Newton in the plane through it
 * across the chord), not with the chord: 1e-6 of box and range.
 */
export function findOnPaths(frame: Frame, paths: readonly BranchPath[], z: Float64Array): PathPosition | null {
  for (const path of paths) {
    const { vertices } = path
    for (let segment = 0; segment + 1 < vertices.length; segment++) {
      const a = (vertices[segment] as Vertex).sample
      const b = (vertices[segment + 1] as Vertex).sample
      if (samePoint(frame, z, a.z) || samePoint(frame, z, b.z)) return { path, segment }
      if (isOn(frame, z, a, b)) return { path, segment }
    }
  }
  return null
}

function isOn(frame: Frame, z: Float64Array, a: Sample, b: Sample): boolean {
  let length = 0
  let along = 0
  let away = 0
  for (let i = 0; i < z.length; i++) {
    const chord = (b.z[i] as number) - (a.z[i] as number)
    const offset = (z[i] as number) - (a.z[i] as number)
    length += chord * chord
    along += chord * offset
    away += offset * offset
  }
  if (length === 0) return false
  const s = along / length
  if (s < -1e-6 || s > 1 + 1e-6) return false
  if (away - s * along > 0.01 * length) return false
  const on = between(a, b, s)
  const chord = b.z.map((value, i) => value - (a.z[i] as number))
  if (!normalise(chord)) return false
  // the plane through z itself
  let shift = 0
  for (let i = 0; i < z.length; i++) shift += ((z[i] as number) - (on[i] as number)) * (chord[i] as number)
  for (let i = 0; i < z.length; i++) on[i] = (on[i] as number) + shift * (chord[i] as number)
  const guess = on.slice()
  if (!correct(frame, on, chord).ok || distance(on, guess) > 0.3 * Math.sqrt(length)) return samePoint(frame, z, guess)
  return samePoint(frame, z, on)
}
