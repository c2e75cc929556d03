import { type Sample, sampleAt } from './corrector.ts'
import { solveExtended } from './extended-system.ts'
import type { Forms } from './forms.ts'
import { distance, type Frame, linearise } from './frame.ts'

/**
 * A turning point in the control near `guess`, by Newton on F = 0, F_x q = 0, <q, q0> = 1.
 *
 * Regular at a simple turning point (quadratic in the state, F_p not in the range of F_x), so the result is good to
 * rounding. Null where it does not converge or ends further than `reach` (scaled) from the guess.
 * Source: Moore & Spence 1980; Govaerts, Numerical Methods for Bifurcations of Dynamical Equilibria, section 4.1.
 */
export function refineFold(frame: Frame, forms: Forms, guess: Sample, reach: number): Sample | null {
  const { n } = frame
  const size = 2 * n + 1
  const start = new Float64Array(n)
  let length = 0
  for (let i = 0; i < n; i++) length += (guess.t[i] as number) ** 2
  if (!(length > 0)) return null
  for (let i = 0; i < n; i++) start[i] = (guess.t[i] as number) / Math.sqrt(length)
  const unknowns = new Float64Array(size)
  unknowns.set(guess.z)
  unknowns.set(start, n + 1)
  const z = new Float64Array(n + 1)
  const q = new Float64Array(n + 1)
  const axis = new Float64Array(n + 1)
  const column = new Float64Array(n)

  const solved = solveExtended(unknowns, (u, residual, matrix) => {
    z.set(u.subarray(0, n + 1))
    q.set(u.subarray(n + 1))
    q[n] = 0
    if (!linearise(frame, z)) return false
    let norm = -1
    for (let i = 0; i < n; i++) {
      let sum = 0
      for (let j = 0; j <= n; j++) matrix[i * size + j] = frame.derivatives[i * (n + 1) + j] as number
      for (let j = 0; j < n; j++) {
        const entry = frame.derivatives[i * (n + 1) + j] as number
        matrix[(n + i) * size + n + 1 + j] = entry
        sum += entry * (q[j] as number)
      }
      residual[i] = frame.residual[i] as number
      residual[n + i] = sum
      norm += (start[i] as number) * (q[i] as number)
      matrix[2 * n * size + n + 1 + i] = start[i] as number
    }
    residual[2 * n] = norm
    for (let j = 0; j <= n; j++) {
      axis.fill(0)
      axis[j] = 1
      forms.bilinear(z, q, axis, column)
      for (let i = 0; i < n; i++) matrix[(n + i) * size + j] = column[i] as number
    }
    return true
  })
  if (!solved.ok || solved.error > 1e-9) return null
  const point = unknowns.slice(0, n + 1)
  if (distance(point, guess.z) > reach) return null
  return sampleAt(frame, point, guess.t)
}
