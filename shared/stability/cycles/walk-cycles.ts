import { degree } from '#shared/numerics/gauss-collocation.ts'
import { equidistributed, errorDensity, valueAt } from '#shared/numerics/mesh.ts'
import type { Frame } from '../frame.ts'
import { type CycleAt, cycleAt, pointAtControl, type Stretch, stretchBetween } from './branch-point.ts'
import { type Cycle, directionDot, moved, onMesh, scaledDirection, sizeOf } from './cycle.ts'
import { type CycleSpace, correctCycle, mostIntervals, type Solution } from './cycle-system.ts'
import { fillBetween } from './fill.ts'
import { hugsSaddle, limitOfControl, type PeriodRecord, slowestPoint } from './homoclinic.ts'
import { foldOn, type Special, specialsOn } from './special-points.ts'

/** An onset at which a branch of cycles may begin or end (scaled). */
export interface Onset {
  readonly index: number
  readonly z: Float64Array
  readonly omega: number
}

/** A point as the walk leaves it. */
export interface WalkedPoint {
  readonly at: CycleAt
  readonly mark: Special['kind'] | null
}

/** How a branch of cycles ends; `p` is the control over its range. */
export interface CycleEnd {
  readonly kind: 'range-end' | 'box-left' | 'onset' | 'homoclinic' | 'closed' | 'period-doubling' | 'budget'
  readonly p: number
  /** Which onset, where it is one of those given. */
  readonly onset?: number
}

export interface CycleWalk {
  readonly points: WalkedPoint[]
  readonly end: CycleEnd
}

export interface WalkOptions {
  readonly onsets: readonly Onset[]
  /** Size of the cycle near an onset at which the walk set out; below it the cycle has shrunk to a point. */
  readonly smallest: number
  readonly mostPoints?: number
}

const coarsest = 20
const finest = 60
/** Share of the error density on one interval that gives an interpolation error of some 1e-7. */
const densityPerInterval = 0.35

/**
 * Walks a branch of cycles by pseudo-arclength from `start` in the direction of its tangent until it ends. Steps adapt to
 * Newton's convergence and to the turn of the tangent, the mesh to the cycle; points are put in where straight lines
 * would not do; turning points, period doublings and torus points are located and are points themselves.
 * Source: Doedel, Keller & Kernevez 1991; Keller 1977.
 */
export function walkCycles(space: CycleSpace, start: CycleAt, options: WalkOptions): CycleWalk {
  const { frame, n } = space
  const points: WalkedPoint[] = [{ at: start, mark: null }]
  const history: PeriodRecord[] = [{ period: start.solution.cycle.period, p: start.solution.cycle.p }]
  let shortest = start.solution.cycle.period
  let current = start
  let fewest = coarsest
  let step = 0.3 * sizeOf(start.solution.cycle, n)
  /** Where the last step set out, and how many points there were then. */
  let prior: { at: CycleAt; length: number } | null = null
  const most = options.mostPoints ?? 900
  const finish = (kind: CycleEnd['kind'], p = current.solution.cycle.p, onset?: number): CycleWalk => ({
    points,
    end: onset === undefined ? { kind, p } : { kind, p, onset },
  })
  /** Goes on from the same point on another mesh; where the branch is all but vertical, it may turn out to lie past the turn. */
  const moveTo = (same: CycleAt): void => {
    if (current.solution.tangent.p * same.solution.tangent.p < 0) {
      const back = prior && remeshed(space, prior.at, same.solution.cycle.mesh.length - 1)
      if (prior && back && back.solution.tangent.p * same.solution.tangent.p < 0) {
        points.length = prior.length
        fewest = Math.max(fewest, back.solution.cycle.mesh.length - 1)
        current = back
        prior = null
        return
      }
      points.push({ at: same, mark: 'fold' })
    }
    current = same
  }
  for (let count = 0; points.length < most && count < 1200; count++) {
    if (frame.budget.spent()) return finish('budget')
    // the mesh was changed just past the turn of a doubled branch: see below
    const latest = points[points.length - 1]
    if (latest?.mark === 'fold' && isDoubled(n, latest.at.solution.cycle)) {
      return finish('period-doubling', latest.at.solution.cycle.p)
    }
    const taken = stepFrom(space, current, step)
    if (!taken) {
      step /= 2.5
      if (step < 1e-7) return finish(limitOfControl(history) && nearSaddle(frame, current) ? 'homoclinic' : 'budget')
      continue
    }
    const { next, stretch, grow } = taken
    const specials = specialsOn(space, stretch)
    let fold = specials.find(({ kind }) => kind === 'fold')
    const turns = current.solution.tangent.p * next.solution.tangent.p < 0
    if (turns && !fold && step > 1e-5) {
      // it turns here but the place could not be computed: come nearer first
      step /= 2.5
      continue
    }
    if (turns && !fold) {
      fold = { kind: 'fold', at: flatter(current, next), s: 1 }
      specials.push(fold)
    }
    const refined = fold ? refinedFold(space, stretch, fold) : null
    const turn = refined ?? fold?.at
    if (turn && isDoubled(n, turn.solution.cycle)) {
      // a branch of doubled period has come to the branch it springs from: beyond, it would retrace itself
      points.push({ at: turn, mark: null })
      return finish('period-doubling', turn.solution.cycle.p)
    }
    if (fold && !refined) {
      const finer = Math.min(mostIntervals, 2 * (current.solution.cycle.mesh.length - 1))
      const again = finer > fewest ? remeshed(space, current, finer) : null
      if (again) {
        fewest = finer
        moveTo(again)
        continue
      }
      const limit = limitOfControl(history)
      if (isDoubtful(frame, fold, shortest)) return finish(limit ? 'homoclinic' : 'budget', limit?.p)
    }
    if (refined) fewest = coarsest
    const exit = rangeExit(frame, next.solution.cycle.p)
    if (exit !== null && !fold) {
      const last = landOn(space, stretch, exit)
      if (last) append(space, points, current, [], last, null)
      return finish('range-end', exit)
    }
    prior = { at: current, length: points.length }
    append(space, points, current, specials, next, refined)
    const { cycle } = next.solution
    if (exit !== null) return finish('range-end', exit)
    if (leavesFarBox(frame, cycle)) return finish('box-left', cycle.p)
    const closed = count > 4 && passesThrough(space, stretch, start)
    if (closed) return finish('closed', start.solution.cycle.p)
    const size = sizeOf(cycle, n)
    if (size < 2 * options.smallest && size < sizeOf(current.solution.cycle, n)) {
      const onset = onsetNear(n, cycle, size, options.onsets)
      if (onset) return finish('onset', onset.z[n] as number, onset.index)
      if (size < options.smallest / 4) return finish('onset', cycle.p)
    }
    current = next
    history.push({ period: cycle.period, p: cycle.p })
    shortest = Math.min(shortest, cycle.period)
    const limit = cycle.period > 2 * shortest ? limitOfControl(history) : null
    const near = cycle.period > 40 * shortest ? 1e-3 : 1e-6
    if (limit && Math.abs(limit.remaining) < near && nearSaddle(frame, current)) return finish('homoclinic', limit.p)
    if (cycle.period > 400 * shortest) return finish('budget')
    step = nextStep(current, step * grow, size)
    const wanted = intervalsFor(n, cycle, fewest)
    const have = cycle.mesh.length - 1
    if (count % 3 === 2 || wanted > 1.15 * have) {
      moveTo(remeshed(space, current, wanted) ?? current)
    }
  }
  return finish('budget')
}

function nearSaddle(frame: Frame, { solution }: CycleAt): boolean {
  return hugsSaddle(frame, solution.cycle, sizeOf(solution.cycle, frame.n))
}

interface Taken {
  next: CycleAt
  stretch: Stretch
  grow: number
}

function stepFrom(space: CycleSpace, from: CycleAt, step: number): Taken | null {
  const { cycle, tangent } = from.solution
  const solution = correctCycle(space, moved(cycle, tangent, step), cycle, tangent, 0.6 * step)
  if (!solution) return null
  const turn = directionDot(cycle.mesh, space.n, solution.tangent, tangent)
  if (turn < 0.85 && step > 1e-5) return null
  const next = cycleAt(space.frame, solution)
  const stretch = next && stretchBetween(space.n, from, next)
  if (!next || !stretch) return null
  const grow = solution.steps <= 3 && turn > 0.95 ? 1.5 : solution.steps >= 6 || turn < 0.9 ? 0.7 : 1
  return { next, stretch, grow }
}

/** Limits a step so that states, period and control each move by no more than a third, a fifth, a fifteenth. */
function nextStep({ solution: { tangent } }: CycleAt, wanted: number, size: number): number {
  let largest = 0
  for (const value of tangent.u) largest = Math.max(largest, Math.abs(value))
  return Math.min(
    wanted,
    (0.33 * size) / Math.max(largest, 1e-12),
    0.2 / Math.max(Math.abs(tangent.period), 1e-12),
    1 / 15 / Math.max(Math.abs(tangent.p), 1e-12),
  )
}

function intervalsFor(n: number, cycle: Cycle, fewest: number): number {
  const { total } = errorDensity(cycle.mesh, cycle.u, n)
  return Math.max(fewest, Math.min(Math.max(finest, fewest), Math.ceil(total / densityPerInterval)))
}

/** The same point on a mesh of `count` intervals made for it, or null where it cannot be computed there. */
export function remeshed(space: CycleSpace, at: CycleAt, count: number): CycleAt | null {
  const { n, frame } = space
  const { cycle, tangent } = at.solution
  const { density, total } = errorDensity(cycle.mesh, cycle.u, n)
  const mesh = equidistributed(cycle.mesh, density, total, count)
  return transferTo(space, frame, cycle, tangent, mesh)
}

function transferTo(
  space: CycleSpace,
  frame: Frame,
  cycle: Cycle,
  tangent: Solution['tangent'],
  mesh: Float64Array,
): CycleAt | null {
  const { n } = space
  const guess = onMesh(cycle, n, mesh)
  const along = { ...tangent, u: onMesh({ ...cycle, u: tangent.u }, n, mesh).u }
  const solution = correctCycle(space, guess, guess, along)
  return solution && cycleAt(frame, solution)
}

/** True where a cycle is one of half its period gone round twice. */
function isDoubled(n: number, cycle: Cycle): boolean {
  const { mesh, u } = cycle
  const here = new Float64Array(n)
  const there = new Float64Array(n)
  const slack = 0.03 * sizeOf(cycle, n)
  for (let k = 0; k < 40; k++) {
    valueAt(mesh, u, n, k / 80, here)
    valueAt(mesh, u, n, k / 80 + 0.5, there)
    for (let i = 0; i < n; i++) if (Math.abs((here[i] as number) - (there[i] as number)) > slack) return false
  }
  return true
}

/** Of two points on both sides of a turn the one nearer to it. */
function flatter(a: CycleAt, b: CycleAt): CycleAt {
  return Math.abs(a.solution.tangent.p) < Math.abs(b.solution.tangent.p) ? a : b
}

/** A turning point of a slow cycle that all but stops somewhere may be the mesh's own. */
function isDoubtful(frame: Frame, { at: { solution } }: Special, shortest: number): boolean {
  return solution.cycle.period > 1.5 * shortest && slowestPoint(frame, solution.cycle).ratio < 0.05
}

/**
 * The turning point of a stretch on a mesh twice as fine, or null where there is none on it: near a homoclinic orbit coarse
 * meshes invent one, and where the branch is all but vertical they misplace it.
 */
function refinedFold(space: CycleSpace, { a, b }: Stretch, fold: Special): CycleAt | null {
  const { cycle } = fold.at.solution
  const count = Math.min(mostIntervals, 2 * (cycle.mesh.length - 1))
  const { density, total } = errorDensity(cycle.mesh, cycle.u, space.n)
  const mesh = equidistributed(cycle.mesh, density, total, count)
  const ends = [a, b].map(({ solution }) => transferTo(space, space.frame, solution.cycle, solution.tangent, mesh))
  const [first, last] = ends
  const stretch = first && last && stretchBetween(space.n, first, last)
  return stretch ? (foldOn(space, stretch)?.at ?? null) : null
}

function rangeExit(frame: Frame, p: number): number | null {
  const unit = frame.unit[frame.n] as number
  if (p < frame.low / unit) return frame.low / unit
  return p > frame.high / unit ? frame.high / unit : null
}

/** The point of a stretch at control value p. */
function landOn(space: CycleSpace, stretch: Stretch, p: number): CycleAt | null {
  const from = stretch.a.solution.cycle.p
  const to = stretch.b.solution.cycle.p
  return pointAtControl(space, stretch, (p - from) / (to - from), p)
}

/** Puts a step's special points, points in between and its end into the list. */
function append(
  space: CycleSpace,
  points: WalkedPoint[],
  from: CycleAt,
  specials: readonly Special[],
  next: CycleAt,
  refined: CycleAt | null,
): void {
  let before = from
  for (const { at, kind } of specials) {
    for (const between of fillBetween(space, before, at)) points.push({ at: between, mark: null })
    points.push({ at: kind === 'fold' ? (refined ?? at) : at, mark: kind })
    before = at
  }
  for (const between of fillBetween(space, before, next)) points.push({ at: between, mark: null })
  points.push({ at: next, mark: null })
}

/** True where the cycle leaves a box ten times the search box; leaving the search box alone means nothing. */
function leavesFarBox(frame: Frame, { u, mesh }: Cycle): boolean {
  const { n, boxLow, boxHigh, unit } = frame
  const count = (mesh.length - 1) * degree
  for (let i = 0; i < n; i++) {
    const low = (boxLow[i] as number) / (unit[i] as number)
    const high = (boxHigh[i] as number) / (unit[i] as number)
    const middle = (low + high) / 2
    const reach = 5 * (high - low)
    for (let k = 0; k < count; k++) if (Math.abs((u[k * n + i] as number) - middle) > reach) return true
  }
  return false
}

/** The onset a small cycle has shrunk to. */
function onsetNear(n: number, cycle: Cycle, size: number, onsets: readonly Onset[]): Onset | null {
  for (const onset of onsets) {
    if (Math.abs(cycle.p - (onset.z[n] as number)) > 0.01) continue
    if (Math.abs((cycle.period * onset.omega) / (2 * Math.PI) - 1) > 0.05) continue
    let away = 0
    for (let i = 0; i < n; i++) away = Math.max(away, Math.abs((cycle.u[i] as number) - (onset.z[i] as number)))
    if (away < 6 * size) return onset
  }
  return null
}

/** True where the walk is back at the cycle it set out from. */
function passesThrough(space: CycleSpace, stretch: Stretch, start: CycleAt): boolean {
  const [from, to, target] = [stretch.a, stretch.b, start].map(({ solution, measures }) => ({
    p: solution.cycle.p,
    period: solution.cycle.period,
    amplitude: measures.amplitude,
    max: measures.max,
  }))
  if (!from || !to || !target || (from.p - target.p) * (to.p - target.p) > 0 || from.p === to.p) return false
  const s = (target.p - from.p) / (to.p - from.p)
  const close = (key: 'period' | 'amplitude'): boolean => {
    const there = from[key] + s * (to[key] - from[key])
    return Math.abs(there - target[key]) < 0.03 * Math.abs(target[key])
  }
  if (!close('period') || !close('amplitude')) return false
  const there = landOn(space, stretch, target.p)
  return (
    there !== null &&
    Math.abs(there.measures.max - target.max) < 1e-5 * target.amplitude &&
    Math.abs(there.measures.amplitude - target.amplitude) < 1e-5 * target.amplitude
  )
}

/** The walk in the other direction sets out from here. */
export function turned(at: CycleAt): CycleAt {
  const tangent = scaledDirection(at.solution.tangent, -1)
  const measures = { ...at.measures, amplitudeRate: -at.measures.amplitudeRate }
  return { ...at, solution: { ...at.solution, tangent }, measures }
}
