/**
 * Branch and bound over the box of states: every zero of F at fixed parameters is in one of the points it finds or in
 * one of the small boxes it could not decide.
 *
 * A box is contracted by the tape (hull consistency), then by the preconditioned interval Newton step; where F is
 * one-to-one on it, a point Newton iteration finds its only zero, which is proved by Krawczyk's test, and the box is
 * done. Else it is cut in two. Sources: Neumaier, Interval Methods for Systems of Equations; Hansen & Walster, Global
 * Optimization Using Interval Analysis.
 */

import type { CompiledModel } from '#shared/model/compiled-model.ts'
import {
  createNewton,
  type IntervalSystem,
  isInjective,
  linearise,
  proveNear,
  sweep,
} from '#shared/numerics/krawczyk.ts'
import type { NewtonSpace } from './newton-space.ts'
import { approach, polish } from './steady-newton.ts'

/** What a compiled tape offers beyond a closed form: contraction, and where it is defined. */
export interface SearchHelp {
  contractBox?(xlo: Float64Array, xhi: Float64Array, p: Float64Array): boolean
  contractionEffort?(): number
  coverage?(xlo: Float64Array, xhi: Float64Array, plo: Float64Array, phi: Float64Array, jacobian: boolean): number
  instructions?: { rhs: number; jacobian: number }
}
/** A compiled model, with the help of tapes where it has it. */
export type SearchableModel = CompiledModel & SearchHelp

/** A zero that Krawczyk's test has proved to exist and to be the only one in a box around it. */
export interface ProvedZero {
  x: Float64Array
  /** Radius of the proof in box widths. */
  radius: number
}

/** What a search has found, and what it has left open. */
export interface SearchResult {
  zeros: ProvedZero[]
  /** Middles and half-widths of what could not be decided, neighbours put together. */
  undecided: { middle: Float64Array; radius: Float64Array }[]
  /** Boxes left when the budget ended, largest first (at most 64 middles). */
  left: Float64Array[]
  /** True where every box was decided or is in `undecided`. */
  finished: boolean
  boxes: number
}

/** Work arrays of the searches of one model. */
export interface SearchSpace {
  readonly model: SearchableModel
  readonly newton: NewtonSpace
  readonly system: IntervalSystem
  readonly parameters: { current: Float64Array }
  readonly interval: ReturnType<typeof createNewton>
}

/** Makes work arrays; the parameters are set by each search. */
export function createSearchSpace(model: SearchableModel, newton: NewtonSpace): SearchSpace {
  const parameters = { current: new Float64Array(model.m) }
  const { n } = model
  const [flo, fhi] = [new Float64Array(n), new Float64Array(n)]
  const [jlo, jhi] = [new Float64Array(n * n), new Float64Array(n * n)]
  const system: IntervalSystem = {
    n,
    value(xlo, xhi, outLo, outHi) {
      model.rhsInterval(xlo, xhi, parameters.current, parameters.current, outLo, outHi)
    },
    jacobian(xlo, xhi, outLo, outHi) {
      model.jacobianInterval(xlo, xhi, parameters.current, parameters.current, outLo, outHi)
    },
    isDefined(xlo, xhi) {
      const p = parameters.current
      // F alone: slopes at a kink are enclosed by both sides, and where they are unbounded the linearisation fails.
      if (model.coverage) return model.coverage(xlo, xhi, p, p, false) === 0
      // Closed forms: finite enclosures are taken as the sign of being defined.
      model.rhsInterval(xlo, xhi, p, p, flo, fhi)
      model.jacobianInterval(xlo, xhi, p, p, jlo, jhi)
      return [flo, fhi, jlo, jhi].every((list) => list.every((value) => Number.isFinite(value)))
    },
  }
  return { model, newton, system, parameters, interval: createNewton(n) }
}

/** A box is no longer cut below this, relative to the box of states and to the size of the coordinates. */
const smallestShare = 1e-12
const smallestRelative = 1e-8
/** Judging an undecided place takes singular values, so larger systems are allowed fewer of them. */
const mostUndecided = (n: number): number => Math.max(3, Math.min(200, 2e4 / n ** 3))
/** More zeros than this and the search ends: sin(1/x) has no end of them. */
export const mostZeros = 1000
/** Off the middle, so that a zero in the middle of a symmetric box does not end up on the corner of all its parts. */
const cutAt = 0.4871

/**
 * Searches the box [low, high] at the parameters `p`. `effort` bounds the interval operations, `shouldStop` is asked
 * now and then. `judge` is shown each place that cannot be decided and answers how far around it (in each state) boxes
 * are not looked into any more; null ends the search (a continuum would spend the whole budget).
 */
export function searchBox(
  space: SearchSpace,
  p: Float64Array,
  low: Float64Array,
  high: Float64Array,
  effort: number,
  shouldStop: (() => boolean) | undefined,
  judge: (middle: Float64Array) => Float64Array | null,
): SearchResult {
  const { model, newton, system, interval } = space
  const { n } = model
  space.parameters.current = p
  const width = low.map((value, j) => (high[j] as number) - value)
  const result: SearchResult = { zeros: [], undecided: [], left: [], finished: true, boxes: 0 }
  const stack: Float64Array[] = [Float64Array.of(...low, ...high)]
  const [before, center, point] = [new Float64Array(n), new Float64Array(n), new Float64Array(n)]
  const perLinearisation = 2 * (model.instructions?.jacobian ?? n * n) + n * n * (n + 4) * 0.2
  const startEffort = model.contractionEffort?.() ?? 0
  let linearisations = 0
  const spent = (): number => (model.contractionEffort?.() ?? 0) - startEffort + linearisations * perLinearisation

  while (stack.length > 0) {
    const box = stack.pop() as Float64Array
    const xlo = box.subarray(0, n)
    const xhi = box.subarray(n)
    result.boxes++
    if (spent() > effort || result.zeros.length > mostZeros || (result.boxes % 32 === 0 && shouldStop?.())) {
      stack.push(box)
      result.finished = false
      break
    }
    const outcome = reduce(xlo, xhi)
    if (outcome === 'done') continue
    if (isSmall(xlo, xhi)) {
      for (let j = 0; j < n; j++) point[j] = ((xlo[j] as number) + (xhi[j] as number)) / 2
      const reach = judge(point)
      if (reach !== null) {
        const radius = reach.map((r, j) => Math.max(r, 2 * ((xhi[j] as number) - (xlo[j] as number))))
        result.undecided.push({ middle: point.slice(), radius })
      }
      if (reach === null || result.undecided.length >= mostUndecided(n)) {
        result.finished = false
        break
      }
      continue
    }
    const axis = chooseAxis(xlo, xhi, outcome === 'linear')
    const at = (xlo[axis] as number) + cutAt * ((xhi[axis] as number) - (xlo[axis] as number))
    const other = box.slice()
    other[axis] = at
    box[n + axis] = at
    stack.push(other, box)
  }
  if (!result.finished) result.left = largestMiddles(stack, n, width)
  return result

  /** 'done': decided. 'linear': the Jacobian enclosure of the box is in the workspace. 'none': it is unbounded. */
  function reduce(xlo: Float64Array, xhi: Float64Array): 'done' | 'linear' | 'none' {
    let state: 'linear' | 'none' = 'none'
    for (let round = 0; round < 8; round++) {
      for (let j = 0; j < n; j++) before[j] = (xhi[j] as number) - (xlo[j] as number)
      if (model.contractBox && !model.contractBox(xlo, xhi, p)) return 'done'
      if (result.undecided.some((place) => liesIn(xlo, xhi, place.middle, place.radius))) return 'done'
      linearisations++
      if (!model.contractBox && excludes(xlo, xhi)) return 'done'
      // Across a gap in the domain slopes say nothing about differences of values.
      state = system.isDefined(xlo, xhi) && linearise(interval, system, xlo, xhi) ? 'linear' : 'none'
      if (state === 'none') return state
      if (isInjective(interval, xlo, xhi)) {
        if (onlyZero(xlo, xhi)) return 'done'
      }
      for (let j = 0; j < n; j++) center[j] = (xlo[j] as number) + 0.5 * ((xhi[j] as number) - (xlo[j] as number))
      if (!sweep(interval, system, center, xlo, xhi)) return 'done'
      let gain = 1
      for (let j = 0; j < n; j++) {
        const now = (xhi[j] as number) - (xlo[j] as number)
        if ((before[j] as number) > 0) gain = Math.min(gain, now / (before[j] as number))
      }
      if (gain > 0.75) break
    }
    return state
  }

  /** Without contraction: does the enclosure of F leave out zero? */
  function excludes(xlo: Float64Array, xhi: Float64Array): boolean {
    const { klo, khi } = interval
    system.value(xlo, xhi, klo, khi)
    for (let i = 0; i < n; i++) if ((klo[i] as number) > 0 || (khi[i] as number) < 0) return true
    return false
  }

  /**
   * The box holds one zero at most. Finds it; true where the box is decided: its zero is proved (and listed), or the
   * only zero of the box grown by it lies outside.
   */
  function onlyZero(xlo: Float64Array, xhi: Float64Array): boolean {
    for (const zero of result.zeros) if (liesWithin(zero.x, xlo, xhi)) return true
    for (let j = 0; j < n; j++) point[j] = (xlo[j] as number) + 0.5 * ((xhi[j] as number) - (xlo[j] as number))
    if (!approach(newton, p, point, 12, null)) return false
    const polished = polish(newton, p, point)
    if (polished === null || !polished.simple) return false
    // A zero that is known already, on the other side of a cut perhaps.
    if (result.zeros.some((zero) => isSameZero(zero, point, width)) && reaches(point, xlo, xhi)) return true
    if (!reaches(point, xlo, xhi)) return false
    const [boxLo, boxHi] = [new Float64Array(n), new Float64Array(n)]
    const radius = proveNear(interval, system, point, width, boxLo, boxHi)
    if (radius === null) return false
    result.zeros.push({ x: point.slice(), radius })
    return true
  }

  /** Is the point in the box, or so near that the box grown to hold it is one-to-one too? */
  function reaches(zero: Float64Array, xlo: Float64Array, xhi: Float64Array): boolean {
    if (liesWithin(zero, xlo, xhi)) return true
    const grownLo = xlo.map((value, j) => Math.min(value, zero[j] as number))
    const grownHi = xhi.map((value, j) => Math.max(value, zero[j] as number))
    const near = grownLo.every(
      (value, j) =>
        (grownHi[j] as number) - value <= 2 * ((xhi[j] as number) - (xlo[j] as number)) + 1e-12 * (width[j] as number),
    )
    linearisations++
    return (
      near &&
      system.isDefined(grownLo, grownHi) &&
      linearise(interval, system, grownLo, grownHi) &&
      isInjective(interval, grownLo, grownHi)
    )
  }

  function isSmall(xlo: Float64Array, xhi: Float64Array): boolean {
    for (let j = 0; j < n; j++) {
      const size = Math.max(Math.abs(xlo[j] as number), Math.abs(xhi[j] as number))
      const limit = Math.max(smallestShare * (width[j] as number), smallestRelative * size)
      if ((xhi[j] as number) - (xlo[j] as number) > limit) return false
    }
    return true
  }

  /** The state whose width moves F most (smear), else the one widest in relation to the whole box. */
  function chooseAxis(xlo: Float64Array, xhi: Float64Array, linear: boolean): number {
    let best = -1
    let axis = 0
    for (let j = 0; j < n; j++) {
      const span = (xhi[j] as number) - (xlo[j] as number)
      const size = Math.max(Math.abs(xlo[j] as number), Math.abs(xhi[j] as number))
      if (span <= Math.max(smallestShare * (width[j] as number), smallestRelative * size)) continue
      let weight = span / (width[j] as number)
      if (linear) {
        let smear = 0
        for (let i = 0; i < n; i++) smear = Math.max(smear, Math.abs(interval.spread[i * n + j] as number))
        // Spread of the preconditioned Jacobian: the nonlinearity that keeps Newton from deciding.
        weight *= 1e-3 + Math.min(smear, 1e6)
      }
      if (weight > best) {
        best = weight
        axis = j
      }
    }
    return axis
  }
}

/** Is the point within the box on which the zero is proved to be the only one? */
export function isSameZero(zero: ProvedZero, point: Float64Array, width: Float64Array): boolean {
  return point.every((v, j) => Math.abs(v - (zero.x[j] as number)) <= zero.radius * (width[j] as number))
}

function liesWithin(x: Float64Array, xlo: Float64Array, xhi: Float64Array): boolean {
  for (let j = 0; j < x.length; j++) {
    if ((x[j] as number) < (xlo[j] as number) || (x[j] as number) > (xhi[j] as number)) return false
  }
  return true
}

function liesIn(xlo: Float64Array, xhi: Float64Array, middle: Float64Array, radius: Float64Array): boolean {
  for (let j = 0; j < xlo.length; j++) {
    if ((xlo[j] as number) < (middle[j] as number) - (radius[j] as number)) return false
    if ((xhi[j] as number) > (middle[j] as number) + (radius[j] as number)) return false
  }
  return true
}

function largestMiddles(stack: Float64Array[], n: number, width: Float64Array): Float64Array[] {
  const size = (box: Float64Array): number => {
    let sum = 0
    for (let j = 0; j < n; j++) sum += ((box[n + j] as number) - (box[j] as number)) / (width[j] as number)
    return sum
  }
  return stack
    .map((box) => ({ box, size: size(box) }))
    .sort((a, b) => b.size - a.size)
    .slice(0, 64)
    .map(({ box }) => Float64Array.from({ length: n }, (_, j) => ((box[j] as number) + (box[n + j] as number)) / 2))
}
