/**
 * All steady states of a model at fixed parameter values inside its box of states.
 *
 * First branch and bound with proof (steady-search.ts). Where its budget is spent or a continuum is met, damped Newton
 * from spread start points with deflation of what is known (steady-newton.ts) takes over, and the list is no longer
 * called complete. The box is closed and 1e-9 of a width wider on each side; finds within 1e-6 of the box are one.
 */

import { proveNear } from '#shared/numerics/krawczyk.ts'
import { allFinite, createNewtonSpace, largest, type NewtonSpace, ownSize } from './newton-space.ts'
import { approach, polish, snapToZero } from './steady-newton.ts'
import type { SearchableModel } from './steady-search.ts'
import {
  createSearchSpace,
  isSameZero,
  mostZeros,
  type ProvedZero,
  type SearchResult,
  type SearchSpace,
  searchBox,
} from './steady-search.ts'
import { isContinuum, isMultipleAt, polishMultiple } from './steady-singular.ts'
import { startPoints } from './steady-starts.ts'

/** One steady state. */
export interface FoundState {
  /** Values of the states in document order. */
  x: Float64Array
  /** Largest |F_i| there, in state per time. */
  residual: number
  /** True where it is proved that a steady state lies within rounding of `x` and is the only one near it. */
  proved: boolean
  /** True where the Jacobian is singular there: two or more steady states meet, or it is one of a continuum. */
  multiple: boolean
}

/** All that is known about the steady states in the box. */
export interface SteadyStateResult {
  /** In no particular order. */
  states: FoundState[]
  /** True where it is proved that the box holds no others. */
  complete: boolean
  /** True where steady states form a curve or more; `states` then holds one of them besides the isolated ones. */
  continuum: boolean
  /** Number of places that could be neither proved nor excluded (a multiple zero never can). */
  unresolved: number
  /** True where F or its Jacobian is not finite at one of the points that were looked at. */
  notFinite: boolean
  /** Boxes examined. */
  boxes: number
}

/** Bounds and hints of a search. */
export interface SteadyStateOptions {
  /** Budget of the search in interval operations (one is about 10 to 30 ns); deterministic. Default 3 million. */
  effort?: number
  /** Ends the search early; what has been found is returned as not complete. */
  shouldStop?: () => boolean
  /** Points near which steady states are expected (of a neighbouring parameter value); a help, never a restriction. */
  guesses?: readonly Float64Array[]
}

const defaultEffort = 3e6
const sameShare = 1e-6
const edgeShare = 1e-9

interface Solver {
  newton: NewtonSpace
  search: SearchSpace
  starts: Float64Array[]
}
const solvers = new WeakMap<SearchableModel, Solver>()

function solverFor(model: SearchableModel): Solver {
  const known = solvers.get(model)
  if (known !== undefined) return known
  const newton = createNewtonSpace(model)
  const made = { newton, search: createSearchSpace(model, newton), starts: startPoints(model) }
  solvers.set(model, made)
  return made
}

/** Finds the steady states at the parameters `p` (document order). Never throws on a model; see the fields above. */
export function findSteadyStates(
  model: SearchableModel,
  p: Float64Array,
  options: SteadyStateOptions = {},
): SteadyStateResult {
  const { newton, search, starts: spread } = solverFor(model)
  const { width } = newton
  const low = Float64Array.from(model.system.states, (state, j) => state.low - edgeShare * (width[j] as number))
  const high = Float64Array.from(model.system.states, (state, j) => state.high + edgeShare * (width[j] as number))
  const list = new StateList(newton, search, p, low, high)
  const starts = [...(options.guesses ?? []), ...spread]

  const notFinite = starts.slice(0, 24).some((x) => !isFiniteAt(newton, p, x))
  // A continuum that Newton meets at once need not spend the search's budget first.
  for (const start of starts.slice(0, 3)) {
    const x = start.slice()
    if (approach(newton, p, x, 80, null)) list.add(x)
    if (list.continuum) break
  }
  let found: SearchResult = { zeros: [], undecided: [], left: [], finished: false, boxes: 0 }
  if (!list.continuum) {
    const judge = (middle: Float64Array): Float64Array | null => {
      const reach = list.addUndecided(middle)
      return list.continuum ? null : reach
    }
    found = searchBox(search, p, low, high, options.effort ?? defaultEffort, options.shouldStop, judge)
    for (const zero of found.zeros) list.addProved(zero)
  }
  if (!found.finished && !options.shouldStop?.()) searchFromStarts(list, [...found.left, ...starts], options.shouldStop)

  // The strip of 1e-9 around the box lends its zeros, it does not have to be decided.
  const unresolved = found.undecided.filter(({ middle, radius }) =>
    model.system.states.every(
      (state, j) =>
        (middle[j] as number) + (radius[j] as number) >= state.low &&
        (middle[j] as number) - (radius[j] as number) <= state.high,
    ),
  ).length
  return {
    states: list.states,
    complete: found.finished && unresolved === 0 && !list.continuum && list.states.every((state) => state.proved),
    continuum: list.continuum,
    unresolved,
    notFinite,
    boxes: found.boxes,
  }
}

function isFiniteAt(newton: NewtonSpace, p: Float64Array, x: Float64Array): boolean {
  newton.model.jacobian(x, p, newton.f, newton.j)
  return allFinite(newton.f) && allFinite(newton.j)
}

/** Damped Newton from every start point with what is known deflated, until the last rounds found nothing new. */
function searchFromStarts(list: StateList, starts: Float64Array[], shouldStop: (() => boolean) | undefined): void {
  const { newton, p } = list
  const cost = list.instructions + newton.n ** 3 / 10
  const allowance = newton.evaluations + Math.min(6000, 1e7 / cost)
  let idle = 0
  for (const start of starts) {
    if (newton.evaluations > allowance || idle > 60 || list.states.length > mostZeros || shouldStop?.()) return
    const before = list.states.length
    // Without deflation first: it finds what is near; then with it: it is driven to what is not known yet.
    for (const deflation of [null, { points: list.states.map((state) => state.x) }]) {
      const x = start.slice()
      if (approach(newton, p, x, 25, deflation)) list.add(x)
    }
    idle = list.states.length > before ? 0 : idle + 1
  }
}

/** The states found so far, each once. */
class StateList {
  readonly states: FoundState[] = []
  continuum = false
  readonly newton: NewtonSpace
  readonly p: Float64Array
  readonly #search: SearchSpace
  readonly #proved: ProvedZero[] = []
  readonly #low: Float64Array
  readonly #high: Float64Array

  /** Instructions of F and J, the cost of one Newton step besides its solve. */
  get instructions(): number {
    return this.#search.model.instructions?.jacobian ?? this.newton.n ** 2
  }

  constructor(newton: NewtonSpace, search: SearchSpace, p: Float64Array, low: Float64Array, high: Float64Array) {
    this.newton = newton
    this.p = p
    this.#search = search
    this.#low = low
    this.#high = high
    search.parameters.current = p
  }

  /** Polishes and adds a point near a zero, unless it is none or lies outside the box. */
  add(x: Float64Array): void {
    const { newton, p } = this
    const polished = polish(newton, p, x)
    if (polished === null || !this.#isInside(x)) return
    if (this.#proved.some((zero) => isSameZero(zero, x, newton.width))) return
    const radius = this.#proofRadius(x)
    if (radius !== null) this.addProved({ x, radius })
    else if (this.#isListed(x)) return
    else if (isMultipleAt(newton, p, x)) this.#addMultiple(x)
    else if (polished.simple) this.#push(x, false, false)
  }

  /** A zero that is proved; it takes the place of an unproved find. Proved ones are told apart however near they are. */
  addProved(zero: ProvedZero): void {
    const { width } = this.newton
    if (!this.#isInside(zero.x) || this.#proved.some((known) => isSameZero(known, zero.x, width))) return
    const unproved = this.states.findIndex((state) => !state.proved && this.#isNear(state.x, zero.x))
    if (unproved >= 0) this.states.splice(unproved, 1)
    this.#proved.push(zero)
    this.#push(zero.x, true, false)
  }

  /**
   * The middle of a place that could not be decided: listed as a multiple zero if F vanishes there as far as rounding
   * lets one see. Returns how far around it nothing can be decided either.
   */
  addUndecided(middle: Float64Array): Float64Array {
    const { newton, p } = this
    const x = middle.slice()
    const shape = polishMultiple(newton, p, x)
    const moved = x.some((v, j) => Math.abs(v - (middle[j] as number)) > 1e-3 * (newton.width[j] as number))
    const same = (share: number): Float64Array => x.map((_, j) => share * ownSize(newton, x, j))
    if (moved || !this.#isInside(x) || !this.#mayVanish(x)) return same(1e-8)
    this.#addMultiple(x)
    let reach = same(sameShare)
    // Rounding grows with the distance where terms cancel at the zero: a few steps settle it.
    for (let round = 0; shape !== null && round < 5; round++) {
      const noise = Math.max(this.#noiseAt(x), this.#noiseAt(x.map((v, j) => v + (reach[j] as number))))
      const blur = shape.blurredBy(4 * noise)
      reach = reach.map((r, j) => Math.max(r, 2 * (blur[j] as number)))
    }
    return reach
  }

  /** Width of the enclosure of F at the point itself, in units of the rows' sizes: what rounding may hide. */
  #noiseAt(x: Float64Array): number {
    const { interval, system } = this.#search
    system.value(x, x, interval.flo, interval.fhi)
    const { rowScale } = this.newton
    return interval.flo.reduce(
      (most, low, i) => Math.max(most, ((interval.fhi[i] as number) - low) / (rowScale[i] as number)),
      0,
    )
  }

  #addMultiple(x: Float64Array): void {
    const { newton, p } = this
    if (!this.continuum) this.continuum = isContinuum(newton, p, x)
    // One member stands for a continuum: the first, found from the start values.
    if (this.continuum && this.states.some((state) => state.multiple)) return
    if (!this.continuum) {
      polishMultiple(newton, p, x)
      snapToZero(newton, p, x)
    }
    if (this.#isInside(x) && this.#mayVanish(x) && !this.#isListed(x)) this.#push(x, false, true)
  }

  #push(x: Float64Array, proved: boolean, multiple: boolean): void {
    const { newton, p } = this
    newton.model.rhs(x, p, newton.f)
    this.states.push({ x: x.slice(), residual: largest(newton.f), proved, multiple })
  }

  #isInside(x: Float64Array): boolean {
    return x.every((v, j) => v >= (this.#low[j] as number) && v <= (this.#high[j] as number))
  }

  #isListed(x: Float64Array): boolean {
    return this.states.some((state) => this.#isNear(state.x, x))
  }

  /** Within 1e-6 of the box, or of the coordinates' own size where the box is a thousand times wider. */
  #isNear(x: Float64Array, y: Float64Array): boolean {
    return x.every((v, j) => Math.abs(v - (y[j] as number)) <= sameShare * ownSize(this.newton, x, j))
  }

  /** Is zero within the enclosure of F over a tenth of that distance around x? */
  #mayVanish(x: Float64Array): boolean {
    const { interval, system } = this.#search
    const reach = (j: number): number => 0.1 * sameShare * ownSize(this.newton, x, j)
    const [low, high] = [x.map((v, j) => v - reach(j)), x.map((v, j) => v + reach(j))]
    system.value(low, high, interval.flo, interval.fhi)
    return interval.flo.every((v, i) => v <= 0 && (interval.fhi[i] as number) >= 0)
  }

  #proofRadius(x: Float64Array): number | null {
    const { interval, system } = this.#search
    const [boxLo, boxHi] = [x.slice(), x.slice()]
    return proveNear(interval, system, x, this.newton.width, boxLo, boxHi)
  }
}
