import type { BranchPoint } from './branch-switching.ts'
import { findBranchPoint } from './branch-switching.ts'
import {
  axisVector,
  between,
  correct,
  isBetween,
  normalise,
  type Sample,
  sampleAt,
  sampleBetween,
} from './corrector.ts'
import { refineFold } from './folds.ts'
import type { Forms } from './forms.ts'
import { distance, dot, exitOf, type Frame, insideRange, place } from './frame.ts'

/** Why a walk along a branch ended. `state` is the one through which the box was left. */
export type WalkEnd =
  | { kind: 'range-end' | 'closed' | 'budget' | 'branch-point' }
  | { kind: 'box-left'; state: number }
  | { kind: 'not-finite'; lines: number[] }

/** A vertex of a branch: a sample, and what is special about it. */
export interface Vertex {
  readonly sample: Sample
  readonly mark: 'fold' | 'branch-point' | null
}

export interface Walk {
  /** In the order of the walk; the first is the start. */
  readonly vertices: Vertex[]
  readonly end: WalkEnd
  /** Branch points met, in order; each is also a vertex. */
  readonly branchPoints: BranchPoint[]
}

/** Steps in scaled arclength: at most a 96th of the range or box, so that drawings are smooth and features are seen. */
const longestStep = 1 / 96
const shortestStep = 1e-7
const firstStep = 1 / 400
/** Largest turn of the tangent in one step, radians: keeps chords within 1e-3 of the branch. */
const largestTurn = 0.25
const mostVertices = 2000

/**
 * Walks along the branch from `start` in the direction of its tangent until it ends.
 *
 * Predictor along the tangent with the bend of the last step, Newton across it, step length by the turn of the tangent
 * and the work of the corrector. A change of the determinant's sign is either a branch point, which is located, or a
 * jump onto another branch close by: then the step is taken again, shorter.
 * Source: Keller 1977; Allgower & Georg, Numerical Continuation Methods 1990, chapters 3 and 6 (step length), 8.
 */
export function walk(frame: Frame, forms: Forms, start: Vertex): Walk {
  const vertices: Vertex[] = [start]
  const branchPoints: BranchPoint[] = []
  const done = (end: WalkEnd): Walk => ({ vertices, end, branchPoints })
  const outward = leavesAtOnce(frame, start.sample)
  if (outward) return done(outward)
  let current = start.sample
  let step = firstStep
  let bend: Float64Array | null = null
  let lastLines: number[] | null = null
  // a start on a branch point has no sign of its own: the first step takes it from the far side
  let trustSign = start.mark !== 'branch-point'

  while (vertices.length < mostVertices && !frame.budget.spent()) {
    if (step < shortestStep) {
      const corner = lastLines ? null : turnCorner(frame, current)
      if (!corner) return done(lastLines ? { kind: 'not-finite', lines: lastLines } : { kind: 'budget' })
      vertices[vertices.length - 1] = { sample: current, mark: 'fold' }
      vertices.push({ sample: corner, mark: null })
      current = corner
      step = firstStep
      bend = null
      continue
    }
    const attempt = tryStep(frame, current, step, bend)
    if (!attempt.ok) {
      lastLines = attempt.lines
      step /= 2
      continue
    }
    const next = attempt.sample
    const turn = Math.acos(Math.min(1, dot(current.t, next.t)))
    // where the model has kinks the tangent may jump: accept once the step is small
    const mayKink = !frame.model.smooth && step < 1e-4
    if ((turn > largestTurn || attempt.far) && !mayKink && step > 4 * shortestStep) {
      step /= turn > 2 * largestTurn ? 4 : 2
      continue
    }

    const exit = exitBetween(frame, current, next)
    if (exit) {
      const sample = sampleOnBound(frame, current, next, exit)
      if (!sample && step > 4 * shortestStep) {
        step /= 2
        continue
      }
      const marks = sample ? specials(frame, forms, current, sample, trustSign) : null
      if (marks?.kind === 'jump' && step > 1e-5) {
        step /= 2
        continue
      }
      if (marks?.kind === 'found') {
        vertices.push(...marks.vertices)
        branchPoints.push(...marks.branchPoints)
        if (marks.endsHere) return done({ kind: 'branch-point' })
      }
      const last = sample && exit.end.kind === 'range-end' ? branchPointOnBound(frame, forms, sample) : null
      if (last) branchPoints.push(last)
      if (sample) vertices.push({ sample, mark: last ? 'branch-point' : null })
      return done(exit.end)
    }

    const marks = specials(frame, forms, current, next, trustSign)
    if (marks.kind === 'jump' && step > 1e-5) {
      step /= 2
      continue
    }
    if (marks.kind === 'found') {
      vertices.push(...marks.vertices)
      branchPoints.push(...marks.branchPoints)
      if (marks.endsHere) return done({ kind: 'branch-point' })
    }
    if (vertices.length > 8 && closes(start.sample, current, next)) {
      vertices.push({ sample: start.sample, mark: start.mark })
      return done({ kind: 'closed' })
    }
    vertices.push({ sample: next, mark: null })
    bend = next.t.map((value, i) => (value - (current.t[i] as number)) / step)
    current = next
    trustSign = true
    lastLines = null
    const wanted = turn > 1e-9 ? step * Math.min(2, (0.6 * largestTurn) / turn) : 2 * step
    step = Math.min(longestStep, attempt.work > 4 ? 0.7 * step : wanted)
  }
  return done({ kind: 'budget' })
}

/**
 * At a kink of the model two arms of a branch may meet in a corner in which the control turns back. Newton along the
 * tangent finds nothing there; a point of the other arm is looked for across each axis, a short way off.
 */
function turnCorner(frame: Frame, at: Sample): Sample | null {
  if (frame.model.smooth) return null
  const reach = 1e-4
  for (let axis = frame.n; axis >= 0; axis--) {
    for (const way of [reach, -reach]) {
      const z = at.z.slice()
      z[axis] = (z[axis] as number) + way
      if (!correct(frame, z, axisVector(frame, axis)).ok || distance(z, at.z) > 10 * reach) continue
      const chord = z.map((value, i) => value - (at.z[i] as number))
      // not back along the arm it came from, and not further out: the control has turned
      if (!normalise(chord) || dot(chord, at.t) < -0.99) continue
      if ((chord[frame.n] as number) * (at.t[frame.n] as number) > 0) continue
      const sample = sampleAt(frame, z, chord)
      if (sample) return sample
    }
  }
  return null
}

type Attempt = { ok: true; sample: Sample; work: number; far: boolean } | { ok: false; lines: number[] | null }

function tryStep(frame: Frame, from: Sample, step: number, bend: Float64Array | null): Attempt {
  const z = from.z.map((value, i) => {
    const curve = bend ? 0.5 * step * step * (bend[i] as number) : 0
    return value + step * (from.t[i] as number) + curve
  })
  const guess = z.slice()
  const corrected = correct(frame, z, from.t)
  if (!corrected.ok) {
    if (corrected.reason !== 'not-finite') return { ok: false, lines: null }
    place(frame, guess)
    return { ok: false, lines: frame.model.notFiniteLines(frame.x, frame.parameters) }
  }
  const sample = sampleAt(frame, z, from.t)
  if (!sample) return { ok: false, lines: null }
  return { ok: true, sample, work: corrected.steps, far: distance(z, guess) > 0.3 * step }
}

/** The first point a walk from `start` would reach, or null: to see whether that branch is known already. */
export function probe(frame: Frame, start: Sample): Sample | null {
  for (let step = firstStep; step > 1e-6; step /= 4) {
    const attempt = tryStep(frame, start, step, null)
    if (attempt.ok && !attempt.far && dot(attempt.sample.t, start.t) > Math.cos(largestTurn)) return attempt.sample
  }
  return null
}

interface Exit {
  /** Coordinate of z whose bound is met, and the bound in scaled units. */
  index: number
  bound: number
  end: WalkEnd
}

/** At the end of the range or box already, with the tangent pointing out. */
function leavesAtOnce(frame: Frame, start: Sample): WalkEnd | null {
  const ahead = start.z.map((value, i) => value + 1e-6 * (start.t[i] as number))
  const exit = exitBetween(frame, { ...start, z: start.z }, { ...start, z: ahead })
  return exit ? exit.end : null
}

/** The first bound of range or box between two samples, or null. Closed, with 1e-9 of each width to spare. */
function exitBetween(frame: Frame, a: Sample, b: Sample): Exit | null {
  const { n, unit } = frame
  let share = Number.POSITIVE_INFINITY
  let exit: Exit | null = null
  for (let index = 0; index <= n; index++) {
    const low = index === n ? frame.low : (frame.boxLow[index] as number)
    const high = index === n ? frame.high : (frame.boxHigh[index] as number)
    const slack = 1e-9 * (high - low)
    const from = (a.z[index] as number) * (unit[index] as number)
    const to = (b.z[index] as number) * (unit[index] as number)
    const bound = to > high + slack ? high : to < low - slack ? low : null
    if (bound === null) continue
    const at = to === from ? 0 : Math.max(0, (bound - from) / (to - from))
    // of bounds met together the range's end is named
    if (at < share || (at === share && index === n)) {
      share = at
      const end: WalkEnd = index === n ? { kind: 'range-end' } : { kind: 'box-left', state: index }
      exit = { index, bound: bound / (unit[index] as number), end }
    }
  }
  return exit
}

/** The point of the branch on the bound, between two neighbours; null where Newton does not find it there. */
function sampleOnBound(frame: Frame, a: Sample, b: Sample, exit: Exit): Sample | null {
  const from = a.z[exit.index] as number
  const to = b.z[exit.index] as number
  const s = to === from ? 0 : Math.min(1, Math.max(0, (exit.bound - from) / (to - from)))
  const z = between(a, b, s)
  z[exit.index] = exit.bound
  const guess = z.slice()
  if (!correct(frame, z, axisVector(frame, exit.index)).ok) return null
  z[exit.index] = exit.bound
  if (distance(z, guess) > 0.5 * distance(a.z, b.z)) return null
  // another state may be beyond its bound there: then that one was met first
  if (exit.end.kind === 'range-end' && exitOf(frame, z)) return null
  const along = b.z.map((value, i) => value - (a.z[i] as number))
  return normalise(along) ? sampleAt(frame, z, along) : null
}

type Specials =
  | { kind: 'none' | 'jump' }
  | { kind: 'found'; vertices: Vertex[]; branchPoints: BranchPoint[]; endsHere: boolean }

/** Branch points and turning points between two neighbours of the walk. */
function specials(frame: Frame, forms: Forms, a: Sample, b: Sample, trustSign: boolean): Specials {
  const length = distance(a.z, b.z)
  if (trustSign && a.sign * b.sign < 0) {
    const point = branchPointBetween(frame, forms, a, b, length)
    if (!point) return { kind: 'jump' }
    const sample: Sample = { ...a, z: point.z, t: point.own, spectrum: spectrumAt(frame, point.z, a) }
    const vertex: Vertex = { sample, mark: 'branch-point' }
    return { kind: 'found', vertices: [vertex], branchPoints: [point], endsHere: point.ownTurns }
  }
  // from a pitchfork the new branch sets out without a component along the control: no turning point
  const folds = trustSign ? foldsBetween(frame, forms, a, b, 0) : []
  if (folds.length === 0) return { kind: 'none' }
  return { kind: 'found', vertices: folds, branchPoints: [], endsHere: false }
}

/** A branch point on the end of the range itself: the walk ends there and cannot see the sign change. */
function branchPointOnBound(frame: Frame, forms: Forms, last: Sample): BranchPoint | null {
  const { re, im, size, n } = last.spectrum
  for (let i = 0; i < n; i++) {
    if (im[i] !== 0 || Math.abs(re[i] as number) > 1e-6 * size) continue
    const point = findBranchPoint(frame, forms, last, 1e-8)
    if (point && insideRange(frame, point.z)) return point
  }
  return null
}

function spectrumAt(frame: Frame, z: Float64Array, near: Sample): Sample['spectrum'] {
  return sampleAt(frame, z, near.t)?.spectrum ?? near.spectrum
}

function branchPointBetween(frame: Frame, forms: Forms, a: Sample, b: Sample, length: number): BranchPoint | null {
  for (const s of [0.5, 0.25, 0.75, 0, 1]) {
    const guess: Sample = { ...a, z: between(a, b, s) }
    const point = findBranchPoint(frame, forms, guess, 0.8 * length + 1e-9)
    if (!point) continue
    if (isBetween(point.z, a, b)) return point
  }
  return null
}

/** Tangent components along the control that are rounding, as on a vertical line of steady states. */
const noTurn = 1e-9

/** Turning points between neighbours: one where dp/ds changes sign, two where it dips through zero and back. */
function foldsBetween(frame: Frame, forms: Forms, a: Sample, b: Sample, depth: number): Vertex[] {
  const n = frame.n
  const ta = a.t[n] as number
  const tb = b.t[n] as number
  const length = distance(a.z, b.z)
  if (ta * tb < 0) {
    if (Math.abs(ta) < noTurn && Math.abs(tb) < noTurn) return []
    const s = Math.abs(ta) / (Math.abs(ta) + Math.abs(tb))
    const start = sampleBetween(frame, a, b, s) ?? (s < 0.5 ? a : b)
    const refined = refineFold(frame, forms, start, length)
    const sample = refined && isBetween(refined.z, a, b) ? refined : turnBetween(frame, a, b)
    return sample ? [{ sample, mark: 'fold' }] : []
  }
  // dp/ds of the cubic through both: -> a dip to zero in between although both ends have one sign
  const chord = ((b.z[n] as number) - (a.z[n] as number)) / length
  const middle = 1.5 * chord - 0.25 * (ta + tb)
  const small = Math.min(Math.abs(ta), Math.abs(tb))
  if (depth > 30 || Math.abs(ta) < noTurn || length < shortestStep) return []
  const dips = middle * ta < 0 || (Math.abs(middle) < 0.7 * small && Math.abs(middle) < 0.2)
  if (!dips) return []
  const half = sampleBetween(frame, a, b, 0.5)
  if (!half || Math.sign(half.t[n] as number) === 0) return []
  return [...foldsBetween(frame, forms, a, half, depth + 1), ...foldsBetween(frame, forms, half, b, depth + 1)]
}

/** Without Newton (a kink, a flat turning point, two close together): halve towards the change of direction. */
function turnBetween(frame: Frame, from: Sample, to: Sample): Sample | null {
  let a = from
  let b = to
  for (let pass = 0; pass < 40; pass++) {
    const half = sampleBetween(frame, a, b, 0.5)
    if (!half) break
    if ((half.t[frame.n] as number) * (a.t[frame.n] as number) < 0) b = half
    else a = half
  }
  return distance(a.z, b.z) < 1e-6 ? b : null
}

/** True where the step from a to b passes the start in the direction in which the walk began. */
function closes(start: Sample, a: Sample, b: Sample): boolean {
  const length = distance(a.z, b.z)
  if (distance(start.z, a.z) > length || distance(start.z, b.z) > length) return false
  return dot(start.t, b.t) > 0.9
}
