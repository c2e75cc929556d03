import { createEigenvectors, eigenvectors } from '#shared/numerics/eigenvectors.ts'
import type { BranchPath } from '../branches.ts'
import type { Vertex } from '../continuation.ts'
import { distance, type Frame, inside, linearise } from '../frame.ts'
import { scaledJacobian } from '../hopf-point.ts'
import { isStable } from '../spectrum.ts'
import { type SteadyNear, steadyNear } from './homoclinic.ts'

/** Every steady state of the branches at control value `p` (over its range), each once. */
export function steadyStatesAt(frame: Frame, paths: readonly BranchPath[], p: number): SteadyNear[] {
  const found: SteadyNear[] = []
  for (const { vertices } of paths) {
    for (let i = 0; i + 1 < vertices.length; i++) {
      const a = (vertices[i] as Vertex).sample.z
      const b = (vertices[i + 1] as Vertex).sample.z
      const near = between(frame, a, b, p)
      if (!near || found.some(({ z }) => distance(z, near.z) < 1e-7)) continue
      found.push(near)
    }
  }
  return found
}

/** The steady state at control value p near the chord from a to b, where the chord reaches that value. */
export function between(frame: Frame, a: Float64Array, b: Float64Array, p: number): SteadyNear | null {
  const { n } = frame
  const [from, to] = [a[n] as number, b[n] as number]
  if ((from - p) * (to - p) > 0) return null
  const share = from === to ? 0.5 : (p - from) / (to - from)
  const z = a.map((value, i) => value + share * ((b[i] as number) - value))
  z[n] = p
  const near = steadyNear(frame, z)
  // Newton may have gone to another branch
  return near && distance(near.z, z) <= 0.5 * distance(a, b) + 1e-9 ? near : null
}

/** Those of them on which the model can come to rest. */
export function stableAt(frame: Frame, paths: readonly BranchPath[], p: number): SteadyNear[] {
  return steadyStatesAt(frame, paths, p).filter(({ z, spectrum }) => isStable(spectrum) && inside(frame, z))
}

/** Unit direction (scaled states) in which a small disturbance of an unstable steady state grows, or null. */
export function growingDirection(frame: Frame, { z, spectrum }: SteadyNear): Float64Array | null {
  const re = spectrum.re[0] as number
  if (!(re > 0) || !linearise(frame, z)) return null
  const vectors = createEigenvectors(frame.n)
  if (eigenvectors(vectors, scaledJacobian(frame), re, Math.abs(spectrum.im[0] as number)) === null) return null
  const norm = Math.hypot(...vectors.qRe)
  return norm > 0 ? vectors.qRe.map((value) => value / norm) : null
}
