/** Newton's method for steady states: damped from afar, then on to the last digit. */

import { factorLu, solveLu } from '#shared/numerics/linear-solve.ts'
import { allFinite, largest, type NewtonSpace, setRowScale } from './newton-space.ts'
import { pseudoStep } from './steady-singular.ts'

/** F at x in units of what each right-hand side changes over the box (row sums of |J| width); NaN where not finite. */
function scaledNorm(space: NewtonSpace, f: Float64Array): number {
  let result = 0
  for (let i = 0; i < space.n; i++) {
    const value = Math.abs(f[i] as number) / (space.rowScale[i] as number)
    if (!(value <= result)) result = value
  }
  return result
}

/** Points that have been found, with their repulsion: m(x) = product of (1/d² + 1), d in box widths. */
export interface Deflation {
  points: Float64Array[]
}

/** Factor by which Newton's step is to be multiplied so that it is a step for m(x) F(x). Farrell, Birkisson & Funke 2015. */
function deflationFactor(space: NewtonSpace, x: Float64Array, deflation: Deflation): number {
  const { n, width, step } = space
  let slope = 0
  for (const point of deflation.points) {
    let distance = 0
    let along = 0
    for (let k = 0; k < n; k++) {
      const d = ((x[k] as number) - (point[k] as number)) / (width[k] as number)
      distance += d * d
      along += (d * (step[k] as number)) / (width[k] as number)
    }
    if (distance === 0) return 0
    // d log m = -2 (d . step) / (d² (d² + 1)).
    slope += (-2 * along) / (distance * (distance + 1))
  }
  const factor = 1 / (1 - slope)
  return Number.isFinite(factor) ? factor : 0
}

/**
 * Damped Newton from `x`, in place. True where it came within `tolerance` box widths of a point that it no longer
 * leaves; the caller polishes and checks. Leaves points more than half a width outside the box.
 */
export function approach(
  space: NewtonSpace,
  p: Float64Array,
  x: Float64Array,
  iterations: number,
  deflation: Deflation | null,
): boolean {
  const { model, n, width, f, j, step, trial, fTrial, lu } = space
  const { states } = model.system
  for (let round = 0; round < iterations; round++) {
    model.jacobian(x, p, f, j)
    space.evaluations++
    if (!allFinite(f) || !allFinite(j)) return false
    setRowScale(space)
    if (!factorLu(lu, j)) {
      // An exactly singular Jacobian: at a zero we are there, elsewhere the shortest step that F asks for.
      if (scaledNorm(space, f) < 1e-13) return true
      const shortest = pseudoStep(space, p, x)
      if (shortest === null) return false
      step.set(shortest)
      if (stepSize(space) === 0) return false
    } else {
      for (let k = 0; k < n; k++) step[k] = -(f[k] as number)
      solveLu(lu, step)
    }
    if (!allFinite(step)) return false
    const size = stepSize(space)
    const factor = deflation === null || deflation.points.length === 0 ? 1 : deflationFactor(space, x, deflation)
    if (size < 1e-9 && Math.abs(factor) > 0.5) {
      for (let k = 0; k < n; k++) x[k] = (x[k] as number) + (step[k] as number)
      return allFinite(x)
    }
    const here = scaledNorm(space, f)
    let length = Math.min(1, 0.5 / Math.max(size * Math.abs(factor), 1e-300)) * factor
    for (let halving = 0; ; halving++) {
      for (let k = 0; k < n; k++) trial[k] = (x[k] as number) + length * (step[k] as number)
      model.rhs(trial, p, fTrial)
      space.evaluations++
      const there = scaledNorm(space, fTrial)
      if (there <= (deflation === null ? 1 : 1.5) * here || (halving >= 6 && Number.isFinite(there))) break
      if (halving >= 12) return false
      length /= 2
    }
    for (let k = 0; k < n; k++) {
      x[k] = trial[k] as number
      const state = states[k]
      if (state === undefined) continue
      const reach = 0.5 * (width[k] as number)
      if ((x[k] as number) < state.low - reach || (x[k] as number) > state.high + reach) return false
    }
  }
  return false
}

/** Largest entry of the step in box widths. */
function stepSize(space: NewtonSpace): number {
  let size = 0
  for (let k = 0; k < space.n; k++)
    size = Math.max(size, Math.abs(space.step[k] as number) / (space.width[k] as number))
  return size
}

/** How polishing ended. */
export interface Polished {
  residual: number
  /** Newton's last step in box widths: small at a simple zero; creeping down at a multiple one. */
  step: number
  /** Did the steps shrink as at a simple zero? */
  simple: boolean
}

/**
 * Full Newton steps, in place, until they no longer get smaller: a simple zero comes out to rounding. Coordinates that
 * are zero up to rounding are set to 0 where F does not mind. Null where F or J stops being finite.
 */
export function polish(space: NewtonSpace, p: Float64Array, x: Float64Array): Polished | null {
  const { model, n, f, j, step, lu } = space
  let last = Number.POSITIVE_INFINITY
  let slow = 0
  let size = 0
  for (let round = 0; round < 60; round++) {
    model.jacobian(x, p, f, j)
    space.evaluations++
    if (!allFinite(f) || !allFinite(j)) return null
    if (!factorLu(lu, j)) {
      size = last
      slow = 3
      break
    }
    for (let k = 0; k < n; k++) step[k] = -(f[k] as number)
    solveLu(lu, step)
    if (!allFinite(step)) return null
    size = stepSize(space)
    if (size > 0.25 * last) slow++
    // Once at rounding level the steps stop shrinking; a multiple zero shrinks them by a constant factor from afar.
    if (size < 1e-12 && size >= 0.25 * last) break
    for (let k = 0; k < n; k++) x[k] = (x[k] as number) + (step[k] as number)
    last = size
    if (size === 0) break
    if (slow > 40) break
  }
  snapToZero(space, p, x)
  model.rhs(x, p, f)
  if (!allFinite(f)) return null
  return { residual: largest(f), step: size, simple: slow <= 2 }
}

/** Sets coordinates within 1e-11 of a width of 0 to 0, each only if F is not larger for it. */
export function snapToZero(space: NewtonSpace, p: Float64Array, x: Float64Array): void {
  const { model, n, width, f, fTrial, trial } = space
  trial.set(x)
  let any = false
  for (let k = 0; k < n; k++) {
    if (x[k] === 0 || Math.abs(x[k] as number) > 1e-11 * (width[k] as number)) continue
    trial[k] = 0
    any = true
  }
  if (!any) return
  model.rhs(x, p, f)
  model.rhs(trial, p, fTrial)
  if (largest(fTrial) <= largest(f)) {
    x.set(trial)
    return
  }
  for (let k = 0; k < n; k++) {
    if (x[k] === trial[k]) continue
    const kept = x[k] as number
    x[k] = 0
    model.rhs(x, p, fTrial)
    if (largest(fTrial) <= largest(f)) f.set(fTrial)
    else x[k] = kept
  }
}
