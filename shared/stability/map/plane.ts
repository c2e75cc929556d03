import type { CompiledModel } from '#shared/model/compiled-model.ts'
import type { Budget } from '../budget.ts'
import { createFrame, dot, type Frame, linearise } from '../frame.ts'

/**
 * A model with two controls in scaled coordinates: those of its frame (see frame.ts) and, as one more entry, the second
 * control over its range. A point is a vector z of n + 2 entries: states, control p, second control s.
 *
 * The frame's parameters hold the second control of the last point looked at, so that everything that works on a frame
 * works at that point.
 */
export interface Plane {
  readonly frame: Frame
  readonly n: number
  /** n + 2. */
  readonly width: number
  /** Position of the second control in the parameters. */
  readonly second: number
  /** Range of the second control, and its own value (perhaps outside). */
  readonly low: number
  readonly high: number
  readonly own: number
  /** Model units in one unit of z; n + 2 entries. */
  readonly unit: Float64Array
  /** Scaled derivatives at the last linearised point, n x (n + 2): states, control, second control. */
  readonly derivatives: Float64Array
}

/** Sets up the plane of a model; null where it has no second control with a range. */
export function createPlane(model: CompiledModel, budget: Budget): Plane | null {
  const { secondControl } = model.system
  const second = secondControl === null ? undefined : model.system.parameters[secondControl]
  if (secondControl === null || !second || second.low === null || second.high === null) return null
  if (!(second.low < second.high)) return null
  const frame = createFrame(model, budget)
  const { n } = frame
  const unit = new Float64Array(n + 2)
  unit.set(frame.unit)
  unit[n + 1] = second.high - second.low
  const { low, high, value: own } = second
  const derivatives = new Float64Array(n * (n + 2))
  return { frame, n, width: n + 2, second: secondControl, low, high, own, unit, derivatives }
}

/** Sets the second control of the frame to that of z and returns z's part in the frame (a copy). */
export function enter(plane: Plane, z: Float64Array): Float64Array {
  const { n, frame, second, unit } = plane
  frame.parameters[second] = (z[n + 1] as number) * (unit[n + 1] as number)
  return z.slice(0, n + 1)
}

/** Evaluates residual, Jacobian (both in the frame) and the scaled derivatives at z; false where one is not finite. */
export function linearisePlane(plane: Plane, z: Float64Array): boolean {
  const { n, frame, second, unit, derivatives } = plane
  if (!linearise(frame, enter(plane, z))) return false
  frame.model.parameterDerivative(frame.x, frame.parameters, second, frame.byControl)
  const span = unit[n + 1] as number
  let sum = 0
  for (let i = 0; i < n; i++) {
    const row = i * (n + 2)
    for (let j = 0; j <= n; j++) derivatives[row + j] = frame.derivatives[i * (n + 1) + j] as number
    const last = ((frame.byControl[i] as number) * span) / (unit[i] as number)
    derivatives[row + n + 1] = last
    sum += last
  }
  return Number.isFinite(sum)
}

/** The states' block of the scaled derivatives at the last linearised point, row-major n x n. */
export function statesBlock({ n, derivatives }: Plane): Float64Array {
  const a = new Float64Array(n * n)
  for (let i = 0; i < n; i++) for (let j = 0; j < n; j++) a[i * n + j] = derivatives[i * (n + 2) + j] as number
  return a
}

/** Second derivatives of the scaled right-hand side: D2(a, b) into `out`, for directions of n + 2 entries. */
export type PlaneForm = (z: Float64Array, a: Float64Array, b: Float64Array, out: Float64Array) => void

/** Makes the form, with workspaces of its own. Exact to rounding: directional jets and polarisation, see forms.ts. */
export function createPlaneForm(plane: Plane): PlaneForm {
  const { n, frame, second, unit } = plane
  const { model, control } = frame
  const u = new Float64Array(n)
  const w = new Float64Array(model.m)
  const jet = new Float64Array(3 * n)
  const direction = new Float64Array(n + 2)

  function quadratic(a: Float64Array, out: Float64Array, factor: number): void {
    for (let i = 0; i < n; i++) u[i] = (a[i] as number) * (unit[i] as number)
    w[control] = (a[n] as number) * (unit[n] as number)
    w[second] = (a[n + 1] as number) * (unit[n + 1] as number)
    frame.budget.spend(1)
    model.jet(frame.x, frame.parameters, u, a[n] === 0 && a[n + 1] === 0 ? null : w, 2, jet)
    for (let i = 0; i < n; i++)
      out[i] = (out[i] as number) + (factor * (jet[2 * n + i] as number)) / (unit[i] as number)
  }

  return (z, a, b, out) => {
    out.fill(0)
    const [sizeA, sizeB] = [Math.sqrt(dot(a, a)), Math.sqrt(dot(b, b))]
    if (sizeA === 0 || sizeB === 0) return
    for (let i = 0; i < n; i++) frame.x[i] = (z[i] as number) * (unit[i] as number)
    frame.parameters[control] = (z[n] as number) * (unit[n] as number)
    frame.parameters[second] = (z[n + 1] as number) * (unit[n + 1] as number)
    for (const sign of [1, -1]) {
      for (let i = 0; i < n + 2; i++) direction[i] = (a[i] as number) / sizeA + (sign * (b[i] as number)) / sizeB
      quadratic(direction, out, (sign * sizeA * sizeB) / 2)
    }
  }
}

/** Lower and upper bound of entry `index` of z, in its scaled unit; a control's `margin` ranges further out. */
export function boundsOf(plane: Plane, index: number, margin = 0): { low: number; high: number } {
  const { n, frame, unit } = plane
  const scale = 1 / (unit[index] as number)
  if (index === n) return { low: frame.low * scale - margin, high: frame.high * scale + margin }
  if (index === n + 1) return { low: plane.low * scale - margin, high: plane.high * scale + margin }
  return { low: (frame.boxLow[index] as number) * scale, high: (frame.boxHigh[index] as number) * scale }
}

/** True where z lies in the closed box and both closed ranges, each with 1e-9 of its width to spare. */
export function insidePlane(plane: Plane, z: Float64Array): boolean {
  for (let i = 0; i < plane.width; i++) {
    const { low, high } = boundsOf(plane, i)
    const slack = 1e-9 * (high - low)
    if (!((z[i] as number) >= low - slack && (z[i] as number) <= high + slack)) return false
  }
  return true
}

/** The second control at z in its own unit, freed of rounding: zero where it is, the range's ends as documented. */
export function secondOf(plane: Plane, z: Float64Array): number {
  const s = (z[plane.n + 1] as number) * (plane.unit[plane.n + 1] as number)
  const slack = 4e-16 * Math.max(plane.high - plane.low, Math.abs(plane.low), Math.abs(plane.high))
  if (Math.abs(s) <= slack) return 0
  if (Math.abs(s - plane.low) <= slack) return plane.low
  return Math.abs(s - plane.high) <= slack ? plane.high : s
}
