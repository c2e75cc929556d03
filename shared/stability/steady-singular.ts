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
import { allFinite, largest, type NewtonSpace, setRowScale } from './steady-newton.ts'

/** Smallest singular value, relative to the largest, below which a zero counts as multiple. */
const singularBelow = 1e-7

/** J at x in box widths and row scales, decomposed; null where not finite. */
function scaledDecomposition(space: NewtonSpace, p: Float64Array, x: Float64Array): SingularValues | null {
  const { model, n, f, j, width, rowScale } = space
  model.jacobian(x, p, f, j)
  space.evaluations++
  if (!allFinite(f) || !allFinite(j)) return null
  setRowScale(space)
  const scaled = j.map((value, at) => {
    const i = Math.floor(at / n)
    return (value * (width[at - i * n] as number)) / (rowScale[i] as number)
  })
  return singularValues(scaled, n)
}

/** Is the Jacobian singular at x, as far as rounding lets one tell? Judged in box widths and row scales. */
export function isSingularAt(space: NewtonSpace, p: Float64Array, x: Float64Array): boolean {
  const s = scaledDecomposition(space, p, x)
  if (s === null) return false
  return (s.values[space.n - 1] as number) < singularBelow * (s.values[0] as number) || s.values[0] === 0
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

/**
 * Moves an approximate multiple zero (one null direction) to where the reduced function's first or second derivative
 * vanishes. Leaves x as it is where that does not converge or F gets larger than rounding explains.
 */
export function polishMultiple(space: NewtonSpace, p: Float64Array, x: Float64Array): void {
  const { model, n, f, j, width } = space
  const y = x.slice()
  const bordered = createLu(n + 1)
  const jets = new Float64Array(4 * n)
  const solve = (rhs: (i: number) => number, last: number): Float64Array => {
    const out = new Float64Array(n + 1)
    for (let i = 0; i < n; i++) out[i] = rhs(i)
    out[n] = last
    solveLu(bordered, out)
    return out
  }
  const secondOrder = (u: Float64Array): Float64Array => {
    model.jet(y, p, u, null, 2, jets)
    return jets.slice(2 * n, 3 * n)
  }
  let last = Number.POSITIVE_INFINITY
  for (let round = 0; round < 12; round++) {
    const s = scaledDecomposition(space, p, y)
    if (s === null) return
    const { rowScale } = space
    const b = Float64Array.from({ length: n }, (_, i) => (s.u[i * n + n - 1] as number) * (rowScale[i] as number))
    const c = Float64Array.from({ length: n }, (_, k) => (s.v[k * n + n - 1] as number) / (width[k] as number))
    if (!factorBordered(bordered, j, b, c, 0)) return
    // Back onto F + mu b = 0, then the expansion of x and mu along the null direction.
    const back = solve((i) => -(f[i] as number), 0)
    for (let k = 0; k < n; k++) y[k] = (y[k] as number) + (back[k] as number)
    const first = solve(() => 0, 1)
    const x1 = first.slice(0, n)
    model.jet(y, p, x1, null, 3, jets)
    const [q2, q3] = [jets.slice(2 * n, 3 * n), jets.slice(3 * n, 4 * n)]
    const second = solve((i) => -(q2[i] as number), 0)
    const x2 = second.slice(0, n)
    const plus = secondOrder(x1.map((v, k) => v + (x2[k] as number)))
    const minus = secondOrder(x1.map((v, k) => v - (x2[k] as number)))
    const third = solve((i) => -(q3[i] as number) - ((plus[i] as number) - (minus[i] as number)) / 2, 0)
    const [a1, a2, a3] = [first[n] as number, second[n] as number, third[n] as number]
    const shift = Math.abs(a2) > 1e-3 * Math.abs(a3) ? -a1 / (2 * a2) : -a2 / (3 * a3)
    if (!Number.isFinite(shift) || Math.abs(shift) > 0.01) return
    for (let k = 0; k < n; k++) y[k] = (y[k] as number) + shift * (x1[k] as number)
    const size = Math.abs(shift)
    if (size < 1e-13 || size >= 0.5 * last) break
    last = size
  }
  model.rhs(x, p, f)
  const before = largest(f)
  const s = scaledDecomposition(space, p, y)
  if (s === null) return
  const noise = largest(space.rowScale) * 1e-13
  const moved = y.reduce(
    (most, value, k) => Math.max(most, Math.abs(value - (x[k] as number)) / (width[k] as number)),
    0,
  )
  if (moved < 1e-3 && largest(f) <= Math.max(before, noise)) x.set(y)
}
