/** Work arrays of the searches for steady states of one model, and the scales they measure in. */

import type { CompiledModel } from '#shared/model/compiled-model.ts'
import { createLu, type Lu } from '#shared/numerics/linear-solve.ts'

/** Workspace for one model; `width` is the box width of each state, the unit steps are measured in. */
export interface NewtonSpace {
  readonly model: CompiledModel
  readonly n: number
  readonly width: Float64Array
  readonly f: Float64Array
  readonly j: Float64Array
  readonly step: Float64Array
  readonly trial: Float64Array
  readonly fTrial: Float64Array
  readonly rowScale: Float64Array
  readonly lu: Lu
  /** Evaluations of F or of F and J. */
  evaluations: number
}

/** Makes work arrays for a model. */
export function createNewtonSpace(model: CompiledModel): NewtonSpace {
  const { n } = model
  const vector = (): Float64Array => new Float64Array(n)
  return {
    model,
    n,
    width: Float64Array.from(model.system.states, (state) => state.high - state.low),
    f: vector(),
    j: new Float64Array(n * n),
    step: vector(),
    trial: vector(),
    fTrial: vector(),
    rowScale: vector(),
    lu: createLu(n),
    evaluations: 0,
  }
}

/** Is no value NaN or infinite? */
export function allFinite(values: Float64Array): boolean {
  for (const value of values) if (!Number.isFinite(value)) return false
  return true
}

/** Largest absolute entry. */
export function largest(values: Float64Array): number {
  let result = 0
  for (const value of values) result = Math.max(result, Math.abs(value))
  return result
}

/** Writes row sums of |J| width at the last evaluated point. */
export function setRowScale(space: NewtonSpace): void {
  const { n, j, width, rowScale } = space
  for (let i = 0; i < n; i++) {
    let sum = 0
    for (let k = 0; k < n; k++) sum += Math.abs(j[i * n + k] as number) * (width[k] as number)
    rowScale[i] = sum > 0 && Number.isFinite(sum) ? sum : 1
  }
}

/**
 * The size that differences of coordinate j near `x` are judged by: its box width, or, in boxes more than a thousand times
 * wider than the coordinate, that coordinate's own size.
 */
export function ownSize(space: NewtonSpace, x: Float64Array, j: number): number {
  const width = space.width[j] as number
  return Math.min(width, Math.max(Math.abs(x[j] as number), 1e-3 * width))
}
