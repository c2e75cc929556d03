import type { CompiledModel } from '#shared/model/compiled-model.ts'
import type { EigenWorkspace } from '#shared/numerics/eigenvalues.ts'
import { createLu, type Lu } from '#shared/numerics/linear-solve.ts'
import type { Budget } from './budget.ts'
import { createSpectra, type Spectrum, spectrumOf } from './spectrum.ts'

/**
 * A model in scaled coordinates, with the workspaces of the branch methods.
 *
 * A point is one vector z of n + 1 entries: states over (box width times sqrt n), then control over its range. So the
 * whole box and the whole range have lengths of order one whatever the units, and arclength means the same in every
 * model. Residuals are scaled alike (state i of F over the unit of state i): the scaled Jacobian is similar to the
 * model's own and has its eigenvalues.
 */
export interface Frame {
  readonly model: CompiledModel
  readonly n: number
  /** Position of the control in the parameters. */
  readonly control: number
  readonly low: number
  readonly high: number
  /** The control's own value, perhaps outside [low, high]. */
  readonly own: number
  readonly boxLow: Float64Array
  readonly boxHigh: Float64Array
  /** Model units in one unit of z; n + 1 entries. */
  readonly unit: Float64Array
  /** Parameters with the control at the value of the last point. */
  readonly parameters: Float64Array
  readonly x: Float64Array
  /** Scaled residual at the last linearised point. */
  readonly residual: Float64Array
  /** The model's own Jacobian there, n x n. */
  readonly jacobian: Float64Array
  /** Scaled derivatives there, n x (n + 1): states, then control. */
  readonly derivatives: Float64Array
  readonly byControl: Float64Array
  /** For systems of n + 1 equations. */
  readonly bordered: Lu
  readonly right: Float64Array
  readonly spectra: EigenWorkspace
  readonly gradient: Float64Array
  readonly budget: Budget
}

/** Sets up the scaled coordinates of a model. */
export function createFrame(model: CompiledModel, budget: Budget): Frame {
  const { n, system } = model
  const control = system.parameters[system.control]
  if (!control || control.low === null || control.high === null) throw new RangeError('the control has no range')
  const boxLow = Float64Array.from(system.states, (state) => state.low)
  const boxHigh = Float64Array.from(system.states, (state) => state.high)
  const unit = new Float64Array(n + 1)
  for (let i = 0; i < n; i++) unit[i] = ((boxHigh[i] as number) - (boxLow[i] as number)) * Math.sqrt(n)
  unit[n] = control.high - control.low
  return {
    model,
    n,
    control: system.control,
    low: control.low,
    high: control.high,
    own: control.value,
    boxLow,
    boxHigh,
    unit,
    parameters: Float64Array.from(system.parameters, (parameter) => parameter.value),
    x: new Float64Array(n),
    residual: new Float64Array(n),
    jacobian: new Float64Array(n * n),
    derivatives: new Float64Array(n * (n + 1)),
    byControl: new Float64Array(n),
    bordered: createLu(n + 1),
    right: new Float64Array(n + 1),
    spectra: createSpectra(n),
    gradient: new Float64Array(n),
    budget,
  }
}

/** Scaled point of a state (model units) at a control value. */
export function scaled(frame: Frame, x: ArrayLike<number>, p: number): Float64Array {
  const z = new Float64Array(frame.n + 1)
  for (let i = 0; i < frame.n; i++) z[i] = (x[i] as number) / (frame.unit[i] as number)
  z[frame.n] = p / (frame.unit[frame.n] as number)
  return z
}

/** Writes the state of z into `frame.x` and its control value into `frame.parameters`. */
export function place(frame: Frame, z: Float64Array): void {
  const { n, unit, x, parameters, control } = frame
  for (let i = 0; i < n; i++) x[i] = (z[i] as number) * (unit[i] as number)
  parameters[control] = (z[n] as number) * (unit[n] as number)
}

/** State of z in model units. */
export function stateOf(frame: Frame, z: Float64Array): Float64Array {
  return Float64Array.from({ length: frame.n }, (_, i) => (z[i] as number) * (frame.unit[i] as number))
}

/** Control value of z. */
export function controlOf(frame: Frame, z: Float64Array): number {
  return (z[frame.n] as number) * (frame.unit[frame.n] as number)
}

/** A computed control value freed of rounding: zero where it is zero, the ends of the range as the document has them. */
export function snapped(frame: Frame, p: number): number {
  const slack = 4e-16 * Math.max(frame.high - frame.low, Math.abs(frame.low), Math.abs(frame.high))
  if (Math.abs(p) <= slack) return 0
  if (Math.abs(p - frame.low) <= slack) return frame.low
  return Math.abs(p - frame.high) <= slack ? frame.high : p
}

/** Evaluates residual, Jacobian and scaled derivatives at z; false where something is not finite. */
export function linearise(frame: Frame, z: Float64Array): boolean {
  const { model, n, unit, x, parameters, residual, jacobian, derivatives, byControl } = frame
  place(frame, z)
  frame.budget.spend(1)
  model.jacobian(x, parameters, residual, jacobian)
  model.parameterDerivative(x, parameters, frame.control, byControl)
  const span = unit[n] as number
  let sum = 0
  for (let i = 0; i < n; i++) {
    const scale = 1 / (unit[i] as number)
    residual[i] = (residual[i] as number) * scale
    sum += residual[i] as number
    const row = i * (n + 1)
    for (let j = 0; j < n; j++) {
      const entry = (jacobian[i * n + j] as number) * (unit[j] as number) * scale
      derivatives[row + j] = entry
      sum += entry
    }
    const last = (byControl[i] as number) * span * scale
    derivatives[row + n] = last
    sum += last
  }
  return Number.isFinite(sum)
}

/** Eigenvalues of the Jacobian at the last linearised point. */
export function spectrumHere(frame: Frame): Spectrum | null {
  return spectrumOf(frame.spectra, frame.jacobian)
}

/** Observed quantity at z; its gradient is left in `frame.gradient`. */
export function observedAt(frame: Frame, z: Float64Array): number {
  place(frame, z)
  return frame.model.observed(frame.x, frame.parameters, frame.gradient)
}

/** True where z lies in the closed box and range, each with 1e-9 of its width to spare. */
export function inside(frame: Frame, z: Float64Array): boolean {
  return exitOf(frame, z) === null && insideRange(frame, z)
}

/** True where the control value of z lies in the closed range. */
export function insideRange(frame: Frame, z: Float64Array): boolean {
  const p = controlOf(frame, z)
  const slack = 1e-9 * (frame.high - frame.low)
  return p >= frame.low - slack && p <= frame.high + slack
}

/** The first state outside the closed box and the bound it is beyond, or null. */
export function exitOf(frame: Frame, z: Float64Array): { state: number; bound: number } | null {
  for (let i = 0; i < frame.n; i++) {
    const value = (z[i] as number) * (frame.unit[i] as number)
    const low = frame.boxLow[i] as number
    const high = frame.boxHigh[i] as number
    const slack = 1e-9 * (high - low)
    if (value < low - slack) return { state: i, bound: low }
    if (value > high + slack) return { state: i, bound: high }
  }
  return null
}

/** Euclidean distance in scaled coordinates. */
export function distance(a: Float64Array, b: Float64Array): number {
  let sum = 0
  for (let i = 0; i < a.length; i++) sum += ((a[i] as number) - (b[i] as number)) ** 2
  return Math.sqrt(sum)
}

/** Scalar product. */
export function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0
  for (let i = 0; i < a.length; i++) sum += (a[i] as number) * (b[i] as number)
  return sum
}
