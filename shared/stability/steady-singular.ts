/**
 * Zeros of F where its Jacobian is singular: are they one of a continuum, and if not, where exactly are they?
 *
 * A multiple zero is found by plain Newton to half (double) or a third (triple) of the digits only. The reduced
 * function along the null direction, expanded to third order by jets (Lyapunov-Schmidt), gives the point where its
 * first (double) or second (triple) derivative vanishes, to all digits. Source: Govaerts, Numerical Methods for
 * Bifurcations of Dynamical Equilibria, chapters 3 and 6.
 */

import { createLu, factorBordered, solveLu } from '#shared/numerics/linear-solve.ts'
import { type SingularValues, singularValues } from '#shared/numerics/singular-values.ts'
import { allFinite, type NewtonSpace, setRowScale } from './newton-space.ts'

/** Smallest singular value, relative to the largest, below which a zero counts as multiple. */
const singularBelow = 1e-7

/** J at x in box widths and row scales, decomposed; null where not finite. */
function scaledDecomposition(space: NewtonSpace, p: Float64Array, x: Float64Array): SingularValues | null {
  const { model, n, f, j, width, rowScale, trial } = space
  // A row that vanishes at a multiple zero shows its size a thousandth of the box away.
  const sizes = new Float64Array(n)
  for (const side of [1, -1]) {
    for (let k = 0; k < n; k++) trial[k] = (x[k] as number) + side * 1e-3 * (width[k] as number) * Math.cos(k + 0.5)
    model.jacobian(trial, p, f, j)
    setRowScale(space)
    for (let i = 0; i < n; i++) {
      const size = rowScale[i] as number
      if (Number.isFinite(size)) sizes[i] = Math.max(sizes[i] as number, size)
    }
  }
  model.jacobian(x, p, f, j)
  // The singular values of a large matrix cost as much as some fifty evaluations and solves.
  space.evaluations += n > 4 ? 50 : 8
  if (!allFinite(f) || !allFinite(j)) return null
  setRowScale(space)
  for (let i = 0; i < n; i++) rowScale[i] = Math.max(rowScale[i] as number, sizes[i] as number)
  const scaled = j.map((value, at) => {
    const i = Math.floor(at / n)
    return (value * (width[at - i * n] as number)) / (rowScale[i] as number)
  })
  return singularValues(scaled, n)
}

/**
 * Is x, a zero that could not be proved simple, one where others meet it? True where the reduced function a1 r + a2 r² +
 * a3 r³ (r in box widths) has another zero within 1e-6, where it vanishes altogether, or where two directions are null.
 */
export function isMultipleAt(space: NewtonSpace, p: Float64Array, x: Float64Array): boolean {
  const s = scaledDecomposition(space, p, x)
  if (s === null) return false
  const { n } = space
  const top = s.values[0] as number
  if (n > 1 && (s.values[n - 2] as number) <= singularBelow * top) return true
  const reduced = reducedExpansion(space, p, x.slice(), s)
  if (reduced === null) return (s.values[n - 1] as number) <= singularBelow * top
  const [a1, a2, a3] = reduced.coefficients.map(Math.abs) as [number, number, number]
  return a1 <= 1e-6 * a2 || a1 <= 1e-12 * a3 || a1 <= 1e-14
}

/**
 * Does a curve of zeros run through the zero x? Steps of up to a fifth of the box along the null direction, each
 * corrected at right angles (pseudo-inverse), must all lead to zeros that stay singular.
 */
export function isContinuum(space: NewtonSpace, p: Float64Array, x: Float64Array): boolean {
  const { n, width, model } = space
  const at = scaledDecomposition(space, p, x)
  if (at === null) return false
  if (
    !((at.values[n - 1] as number) < singularBelow * Math.max(at.values[0] as number, 1e-300)) &&
    n > 0 &&
    at.values[0] !== 0
  ) {
    return false
  }
  const direction = Float64Array.from({ length: n }, (_, k) => at.v[k * n + n - 1] as number)
  let confirmed = 0
  for (const length of [0.01, -0.01, 0.05, -0.05, 0.2, -0.2]) {
    const y = x.map((value, k) => value + length * (direction[k] as number) * (width[k] as number))
    const outside = model.system.states.some(
      (state, k) => (y[k] as number) < state.low || (y[k] as number) > state.high,
    )
    if (outside && Math.abs(length) > 0.01) continue
    if (!returnsToCurve(space, p, x, y, Math.abs(length))) return false
    confirmed++
  }
  return confirmed >= 2
}

/** Corrects y at right angles to the null directions; true where it ends on a zero that is not x. */
function returnsToCurve(
  space: NewtonSpace,
  p: Float64Array,
  x: Float64Array,
  y: Float64Array,
  length: number,
): boolean {
  const { n, width, rowScale, f } = space
  for (let round = 0; round < 12; round++) {
    const s = scaledDecomposition(space, p, y)
    if (s === null) return false
    let size = 0
    for (let i = 0; i < n; i++) size = Math.max(size, Math.abs((f[i] as number) / (rowScale[i] as number)))
    if (size < 1e-14) {
      let moved = 0
      for (let k = 0; k < n; k++)
        moved = Math.max(moved, Math.abs((y[k] as number) - (x[k] as number)) / (width[k] as number))
      const last = s.values[n - 1] as number
      return moved > 0.1 * length && last <= singularBelow * Math.max(s.values[0] as number, 1e-300)
    }
    for (let m = 0; m < n; m++) {
      const value = s.values[m] as number
      if (value <= 1e-6 * (s.values[0] as number)) break
      let along = 0
      for (let i = 0; i < n; i++) along += ((s.u[i * n + m] as number) * (f[i] as number)) / (rowScale[i] as number)
      for (let k = 0; k < n; k++) {
        y[k] = (y[k] as number) - ((s.v[k * n + m] as number) * along * (width[k] as number)) / value
      }
    }
  }
  return false
}

interface ReducedExpansion {
  /** a1, a2, a3 of the reduced function. */
  coefficients: [number, number, number]
  /** Direction in which x moves per box width along the null direction. */
  direction: Float64Array
}

/**
 * Moves x onto F + mu b = 0 (one bordered Newton step) and expands mu along that curve to third order. `s` is the scaled
 * decomposition at x, with F and J of that point in `space`.
 */
function reducedExpansion(
  space: NewtonSpace,
  p: Float64Array,
  x: Float64Array,
  s: SingularValues,
): ReducedExpansion | null {
  const { model, n, f, j, width, rowScale } = space
  const bordered = createLu(n + 1)
  const jets = new Float64Array(4 * n)
  const b = Float64Array.from({ length: n }, (_, i) => (s.u[i * n + n - 1] as number) * (rowScale[i] as number))
  const c = Float64Array.from({ length: n }, (_, k) => (s.v[k * n + n - 1] as number) / (width[k] as number))
  if (!factorBordered(bordered, j, b, c, 0)) return null
  const solve = (rhs: (i: number) => number, last: number): Float64Array => {
    const out = new Float64Array(n + 1)
    for (let i = 0; i < n; i++) out[i] = rhs(i)
    out[n] = last
    solveLu(bordered, out)
    return out
  }
  const secondOrder = (u: Float64Array): Float64Array => {
    model.jet(x, p, u, null, 2, jets)
    return jets.slice(2 * n, 3 * n)
  }
  const back = solve((i) => -(f[i] as number), 0)
  for (let k = 0; k < n; k++) x[k] = (x[k] as number) + (back[k] as number)
  const first = solve(() => 0, 1)
  const x1 = first.slice(0, n)
  model.jet(x, p, x1, null, 3, jets)
  const [q2, q3] = [jets.slice(2 * n, 3 * n), jets.slice(3 * n, 4 * n)]
  const second = solve((i) => -(q2[i] as number), 0)
  const x2 = second.slice(0, n)
  const plus = secondOrder(x1.map((v, k) => v + (x2[k] as number)))
  const minus = secondOrder(x1.map((v, k) => v - (x2[k] as number)))
  const third = solve((i) => -(q3[i] as number) - ((plus[i] as number) - (minus[i] as number)) / 2, 0)
  const coefficients: [number, number, number] = [first[n] as number, second[n] as number, third[n] as number]
  return coefficients.every(Number.isFinite) && allFinite(x) ? { coefficients, direction: x1 } : null
}

/** What polishing a multiple zero went for. */
export interface MultipleZero {
  multiplicity: 2 | 3
  /**
   * How far from the zero (each coordinate) F stays below `noise`, in units of its rows' sizes, along the null direction:
   * within that distance rounding hides whether F vanishes.
   */
  blurredBy(noise: number): Float64Array
}

/**
 * Moves an approximate multiple zero (one null direction) to where the reduced function's first or second derivative
 * vanishes. Leaves x as it is where that does not converge or leads away; null where there is no such expansion.
 */
export function polishMultiple(space: NewtonSpace, p: Float64Array, x: Float64Array): MultipleZero | null {
  const { n, width } = space
  const y = x.slice()
  let last = Number.POSITIVE_INFINITY
  let result: MultipleZero | null = null
  for (let round = 0; round < 12; round++) {
    const s = scaledDecomposition(space, p, y)
    const reduced = s === null ? null : reducedExpansion(space, p, y, s)
    if (reduced === null) return result
    const [a1, a2, a3] = reduced.coefficients
    const multiplicity = Math.abs(a2) > 1e-3 * Math.abs(a3) ? 2 : 3
    const leading = Math.abs(multiplicity === 2 ? a2 : a3)
    const { direction } = reduced
    result = {
      multiplicity,
      blurredBy: (noise) => direction.map((d) => Math.abs(d) * Math.min((noise / leading) ** (1 / multiplicity), 1e-3)),
    }
    const shift = multiplicity === 2 ? -a1 / (2 * a2) : -a2 / (3 * a3)
    if (!Number.isFinite(shift) || Math.abs(shift) > 0.01) return result
    for (let k = 0; k < n; k++) y[k] = (y[k] as number) + shift * (direction[k] as number)
    const size = Math.abs(shift)
    if (size < 1e-15 || size >= 0.5 * last) break
    last = size
  }
  if (!allFinite(y)) return result
  let moved = 0
  for (let k = 0; k < n; k++) {
    moved = Math.max(moved, Math.abs((y[k] as number) - (x[k] as number)) / (width[k] as number))
  }
  if (moved < 1e-3) x.set(y)
  return result
}

/** Minimum-norm Newton step -J⁺ F in box widths, for exactly singular Jacobians; null where not finite. */
export function pseudoStep(space: NewtonSpace, p: Float64Array, x: Float64Array): Float64Array | null {
  const { n, f, width, rowScale } = space
  const s = scaledDecomposition(space, p, x)
  if (s === null) return null
  const step = new Float64Array(n)
  for (let m = 0; m < n; m++) {
    const value = s.values[m] as number
    if (!(value > 1e-10 * (s.values[0] as number))) break
    let along = 0
    for (let i = 0; i < n; i++) along += ((s.u[i * n + m] as number) * (f[i] as number)) / (rowScale[i] as number)
    for (let k = 0; k < n; k++) {
      step[k] = (step[k] as number) - ((s.v[k * n + m] as number) * along * (width[k] as number)) / value
    }
  }
  return step
}
