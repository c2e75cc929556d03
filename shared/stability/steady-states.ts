/**
 * All steady states of a model at fixed parameter values inside its box of states.
 *
 * First branch and bound with proof (steady-search.ts). Where its budget is spent or a continuum is met, damped Newton
 * from spread start points with deflation of what is known (steady-newton.ts) takes over, and the list is no longer
 * called complete. The box is closed and 1e-9 of a width wider on each side; finds within 1e-6 of the box are one.
 */

import { proveNear } from '#shared/numerics/krawczyk.ts'
import { allFinite, approach, createNewtonSpace, type NewtonSpace, polish } from './steady-newton.ts'
import type { SearchableModel } from './steady-search.ts'
import { createSearchSpace, type SearchResult, type SearchSpace, searchBox } from './steady-search.ts'
import { isContinuum, isSingularAt, polishMultiple } from './steady-singular.ts'
import { startPoints } from './steady-starts.ts'

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

export interface SteadyStateOptions {
  /** Budget of the search in interval operations (one is about 10 to 30 ns); deterministic. Default 6 million. */
  effort?: number
  /** Ends the search early; what has been found is returned as not complete. */
  shouldStop?: () => boolean
  /** Points near which steady states are expected (of a neighbouring parameter value); a help, never a restriction. */
  guesses?: readonly Float64Array[]
}

const defaultEffort = 6e6
const sameShare = 1e-6
const edgeShare = 1e-9

interface Solver {
  newton: NewtonSpace
  search: SearchSpace
}
const solvers = new WeakMap<SearchableModel, Solver>()

function solverFor(model: SearchableModel): Solver {
  const known = solvers.get(model)
  if (known !== undefined) return known
  const newton = createNewtonSpace(model)
  const made = { newton, search: createSearchSpace(model, newton) }
  solvers.set(model, made)
  return made
}

/** Finds the steady states at the parameters `p` (document order). Never throws on a model; see the fields above. */
export function findSteadyStates(
  model: SearchableModel,
  p: Float64Array,
  options: SteadyStateOptions = {},
): SteadyStateResult {
  const { newton, search } = solverFor(model)
  const { width } = newton
  const low = Float64Array.from(model.system.states, (state, j) => state.low - edgeShare * (width[j] as number))
  const high = Float64Array.from(model.system.states, (state, j) => state.high + edgeShare * (width[j] as number))
  const list = new StateList(newton, search, p, low, high)
  const starts = startPoints(model, options.guesses ?? [])

  const notFinite = starts.slice(0, 24).some((x) => !isFiniteAt(newton, p, x))
  // A continuum that Newton meets at once need not spend the search's budget first.
  for (const start of starts.slice(0, 3)) {
    const x = start.slice()
    if (!approach(newton, p, x, 30, null)) continue
    if (list.add(x)?.multiple && list.continuum) break
  }
  let found: SearchResult = { zeros: [], undecided: [], left: [], finished: false, boxes: 0 }
  if (!list.continuum) {
    const stopAt = (middle: Float64Array): boolean => {
      const x = middle.slice()
      if (approach(newton, p, x, 60, null)) list.add(x)
      return list.continuum
    }
    found = searchBox(search, p, low, high, options.effort ?? defaultEffort, options.shouldStop, stopAt)
    for (const zero of found.zeros) list.addProved(zero.x)
  }
  for (const place of found.undecided) list.addUndecided(place.middle)
  if (!found.finished && !options.shouldStop?.()) searchFromStarts(list, [...found.left, ...starts], options.shouldStop)

  const unresolved = found.undecided.length
  const allProved = list.states.every((state) => state.proved)
  return {
    states: list.states,
    complete: found.finished && unresolved === 0 && !list.continuum && allProved,
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
  const allowance = newton.evaluations + 6000
  let idle = 0
  for (const start of starts) {
    if (newton.evaluations > allowance || idle > 60 || shouldStop?.()) return
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
  readonly #low: Float64Array
  readonly #high: Float64Array

  constructor(newton: NewtonSpace, search: SearchSpace, p: Float64Array, low: Float64Array, high: Float64Array) {
    this.newton = newton
    this.p = p
    this.#search = search
    this.#low = low
    this.#high = high
    search.parameters.current = p
  }

  /** Polishes and adds a point near a zero; returns its entry, or null where it is none or lies outside the box. */
  add(x: Float64Array): FoundState | null {
    const { newton, p } = this
    const polished = polish(newton, p, x)
    if (polished === null || !this.#isInside(x)) return null
    if (!polished.simple && !this.#isZero(x)) return null
    const multiple = isSingularAt(newton, p, x)
    if (multiple) return this.#addMultiple(x)
    if (!polished.simple && polished.step > 1e-9) return null
    const known = this.#find(x)
    if (known !== undefined) return known
    return this.#push(x, polished.residual, this.#isProved(x), false)
  }

  /** A zero that the search has proved. */
  addProved(x: Float64Array): void {
    if (!this.#isInside(x)) return
    const known = this.#find(x)
    if (known !== undefined && !known.proved) this.states.splice(this.states.indexOf(known), 1)
    else if (
      known?.proved &&
      known.x.every((v, j) => Math.abs(v - (x[j] as number)) <= 1e-9 * (this.newton.width[j] as number))
    )
      return
    this.newton.model.rhs(x, this.p, this.newton.f)
    this.#push(x.slice(), largestOf(this.newton.f), true, false)
  }

  /** The middle of a place that could not be decided: listed if F vanishes there as far as rounding lets one see. */
  addUndecided(middle: Float64Array): void {
    const x = middle.slice()
    const { newton, p } = this
    if (polish(newton, p, x) === null) return
    const moved = x.some((v, j) => Math.abs(v - (middle[j] as number)) > 1e-3 * (newton.width[j] as number))
    if (moved || !this.#isInside(x) || !this.#isZero(x)) return
    this.#addMultiple(x)
  }

  #addMultiple(x: Float64Array): FoundState | null {
    const { newton, p } = this
    if (!this.continuum && isContinuum(newton, p, x)) this.continuum = true
    if (this.continuum) {
      // One member stands for all of them: the first, which is the one nearest the start values.
      const known = this.states.find((state) => state.multiple)
      if (known !== undefined) return known
    } else {
      polishMultiple(newton, p, x)
      if (!this.#isInside(x)) return null
    }
    const known = this.#find(x)
    if (known !== undefined) return known
    newton.model.rhs(x, p, newton.f)
    return this.#push(x, largestOf(newton.f), false, true)
  }

  #push(x: Float64Array, residual: number, proved: boolean, multiple: boolean): FoundState {
    const state = { x: x.slice(), residual, proved, multiple }
    this.states.push(state)
    return state
  }

  #isInside(x: Float64Array): boolean {
    return x.every((v, j) => v >= (this.#low[j] as number) && v <= (this.#high[j] as number))
  }

  #find(x: Float64Array): FoundState | undefined {
    const { width } = this.newton
    return this.states.find((state) =>
      state.x.every((v, j) => Math.abs(v - (x[j] as number)) <= sameShare * (width[j] as number)),
    )
  }

  /** |F_i| below a million roundings of what F_i is made of over the box. */
  #isZero(x: Float64Array): boolean {
    const { newton, p } = this
    newton.model.jacobian(x, p, newton.f, newton.j)
    const { n, f, j, width } = newton
    for (let i = 0; i < n; i++) {
      let size = 0
      for (let k = 0; k < n; k++)
        size += Math.abs(j[i * n + k] as number) * Math.max(width[k] as number, Math.abs(x[k] as number))
      if (!(Math.abs(f[i] as number) <= 1e-10 * size + 1e-300)) return false
    }
    return true
  }

  #isProved(x: Float64Array): boolean {
    const { interval, system } = this.#search
    const [boxLo, boxHi] = [x.slice(), x.slice()]
    return proveNear(interval, system, x, this.newton.width, boxLo, boxHi) !== null
  }
}

function largestOf(f: Float64Array): number {
  return f.reduce((most, value) => Math.max(most, Math.abs(value)), 0)
}
