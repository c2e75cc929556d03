import { createEigenvectors, eigenvectors } from '#shared/numerics/eigenvectors.ts'
import { type Sample, sampleAt } from './corrector.ts'
import { solveExtended } from './extended-system.ts'
import type { Forms } from './forms.ts'
import { distance, type Frame, linearise } from './frame.ts'

/** A located Hopf point: the sample on its branch and the angular frequency (radians per time unit). */
export interface LocatedHopf {
  readonly sample: Sample
  readonly omega: number
  /** Estimate of the error of scaled state, control and relative omega: rounding where Newton converged. */
  readonly error: number
}

/** The states' block of the scaled derivatives at the last linearised point, row-major n x n. */
export function scaledJacobian(frame: Frame): Float64Array {
  const { n, derivatives } = frame
  const a = new Float64Array(n * n)
  for (let i = 0; i < n; i++) for (let j = 0; j < n; j++) a[i * n + j] = derivatives[i * (n + 1) + j] as number
  return a
}

/**
 * Refines a Hopf point by Newton on F = 0, A u = -omega v, A v = omega u, <c, u + i v> = 1 (c: the starting
 * eigenvector) in (x, p, u, v, omega), to rounding.
 *
 * Null where it does not converge, omega is not positive, or the result is further than `reach` (scaled) from the
 * start. Singular, and so not for, pairs of multiplicity two and pairs that only touch the axis.
 * Source: Griewank & Reddien 1983; Govaerts, Numerical Methods for Bifurcations of Dynamical Equilibria, section 4.3.
 */
export function refineHopf(
  frame: Frame,
  forms: Forms,
  guess: Sample,
  pair: { re: number; im: number },
  reach: number,
): LocatedHopf | null {
  const { n } = frame
  if (!linearise(frame, guess.z)) return null
  const vectors = createEigenvectors(n)
  if (eigenvectors(vectors, scaledJacobian(frame), pair.re, pair.im) === null) return null
  const cRe = vectors.qRe.slice()
  const cIm = vectors.qIm.slice()
  const width = n + 1
  const size = 3 * n + 2
  const unknowns = new Float64Array(size)
  unknowns.set(guess.z)
  unknowns.set(cRe, width)
  unknowns.set(cIm, width + n)
  // omega in units of itself, so that all unknowns are of order one
  const rate = pair.im
  unknowns[size - 1] = 1
  const z = new Float64Array(width)
  const u = new Float64Array(width)
  const v = new Float64Array(width)
  const axis = new Float64Array(width)
  const column = new Float64Array(n)

  const solved = solveExtended(unknowns, (values, residual, matrix) => {
    z.set(values.subarray(0, width))
    u.set(values.subarray(width, width + n))
    v.set(values.subarray(width + n, width + 2 * n))
    u[n] = 0
    v[n] = 0
    const omega = (values[size - 1] as number) * rate
    if (!linearise(frame, z)) return false
    let real = -1
    let imaginary = 0
    for (let i = 0; i < n; i++) {
      let au = 0
      let av = 0
      const rowU = (n + i) * size
      const rowV = (2 * n + i) * size
      for (let j = 0; j < n; j++) {
        const entry = frame.derivatives[i * width + j] as number
        matrix[i * size + j] = entry
        matrix[rowU + width + j] = entry
        matrix[rowV + width + n + j] = entry
        au += entry * (u[j] as number)
        av += entry * (v[j] as number)
      }
      matrix[i * size + n] = frame.derivatives[i * width + n] as number
      const ui = u[i] as number
      const vi = v[i] as number
      residual[i] = frame.residual[i] as number
      residual[n + i] = au + omega * vi
      residual[2 * n + i] = av - omega * ui
      matrix[rowU + width + n + i] = (matrix[rowU + width + n + i] as number) + omega
      matrix[rowV + width + i] = (matrix[rowV + width + i] as number) - omega
      matrix[rowU + size - 1] = rate * vi
      matrix[rowV + size - 1] = -rate * ui
      const re = cRe[i] as number
      const im = cIm[i] as number
      real += re * ui + im * vi
      imaginary += re * vi - im * ui
      matrix[3 * n * size + width + i] = re
      matrix[3 * n * size + width + n + i] = im
      matrix[(3 * n + 1) * size + width + i] = -im
      matrix[(3 * n + 1) * size + width + n + i] = re
    }
    residual[3 * n] = real
    residual[3 * n + 1] = imaginary
    for (let j = 0; j <= n; j++) {
      axis.fill(0)
      axis[j] = 1
      forms.bilinear(z, u, axis, column)
      for (let i = 0; i < n; i++) matrix[(n + i) * size + j] = column[i] as number
      forms.bilinear(z, v, axis, column)
      for (let i = 0; i < n; i++) matrix[(2 * n + i) * size + j] = column[i] as number
    }
    return true
  })
  const omega = (unknowns[size - 1] as number) * rate
  if (!solved.ok || solved.error > 1e-9 || !(omega > 0)) return null
  const point = unknowns.slice(0, width)
  if (distance(point, guess.z) > reach) return null
  const sample = sampleAt(frame, point, guess.t)
  return sample ? { sample, omega, error: Math.max(solved.error, 1e-15) } : null
}
