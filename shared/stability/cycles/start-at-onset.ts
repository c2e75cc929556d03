import { createEigenvectors, eigenvectors } from '#shared/numerics/eigenvectors.ts'
import { degree } from '#shared/numerics/gauss-collocation.ts'
import { uniformMesh } from '#shared/numerics/mesh.ts'
import { linearise } from '../frame.ts'
import { scaledJacobian } from '../hopf-point.ts'
import { type CycleAt, cycleAt } from './branch-point.ts'
import { type Cycle, type Direction, directionDot, moved, scaledDirection } from './cycle.ts'
import { type CycleSpace, correctCycle } from './cycle-system.ts'
import type { Onset } from './walk-cycles.ts'

/** Size of the first cycle, as a share of the box. */
export const firstSize = 1e-3

/**
 * The first cycle of the branch that leaves an onset: x + e Re(q exp(i omega t)) with q the critical eigenvector, in the
 * plane across that direction, which is the branch's tangent at the onset (control and period change to second order
 * only; at a kink to first order, so the control may move further there).
 * Null where Newton's method does not converge to a cycle of that size.
 * Source: Kuznetsov, Elements of Applied Bifurcation Theory, section 3.5; Doedel, Keller & Kernevez 1991.
 */
export function startAtOnset(space: CycleSpace, onset: Onset): { at: CycleAt; size: number } | null {
  const { frame, n } = space
  if (!linearise(frame, onset.z)) return null
  const vectors = createEigenvectors(n)
  if (eigenvectors(vectors, scaledJacobian(frame), 0, onset.omega) === null) return null
  const mesh = uniformMesh(20)
  const count = 20 * degree
  const u = new Float64Array((count + 1) * n)
  const wave = new Float64Array((count + 1) * n)
  for (let k = 0; k <= count; k++) {
    const angle = (2 * Math.PI * (k % count)) / count
    for (let i = 0; i < n; i++) {
      u[k * n + i] = onset.z[i] as number
      wave[k * n + i] = (vectors.qRe[i] as number) * Math.cos(angle) - (vectors.qIm[i] as number) * Math.sin(angle)
    }
  }
  const steady: Cycle = { mesh, u, period: (2 * Math.PI) / onset.omega, p: onset.z[n] as number }
  const raw: Direction = { u: wave, period: 0, p: 0 }
  const tangent = scaledDirection(raw, 1 / Math.sqrt(directionDot(mesh, n, raw, raw)))
  for (const size of [1, 0.1, 0.01, 5].map((share) => share * firstSize)) {
    const flat = moved(steady, tangent, size)
    const reach = frame.model.smooth ? 0.5 * size : 50 * size
    const solution = correctCycle(space, flat, flat, tangent, reach)
    const at = solution && cycleAt(frame, solution)
    if (at) return { at, size }
  }
  return null
}
