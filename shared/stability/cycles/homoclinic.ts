import { degree } from '#shared/numerics/gauss-collocation.ts'
import { createLu, factorInPlace, solveLu } from '#shared/numerics/linear-solve.ts'
import { type Frame, linearise, spectrumHere } from '../frame.ts'
import type { Spectrum } from '../spectrum.ts'
import type { Cycle } from './cycle.ts'

/** How slowly a cycle moves where it is slowest: speed there over its mean speed, and the place (scaled). */
export function slowestPoint(frame: Frame, cycle: Cycle): { ratio: number; z: Float64Array } {
  const { n } = frame
  const count = (cycle.mesh.length - 1) * degree
  const z = new Float64Array(n + 1)
  z[n] = cycle.p
  const slowest = new Float64Array(n + 1)
  let least = Number.POSITIVE_INFINITY
  let path = 0
  for (let k = 0; k < count; k++) {
    let step = 0
    for (let i = 0; i < n; i++) {
      z[i] = cycle.u[k * n + i] as number
      step += ((cycle.u[(k + 1) * n + i] as number) - (z[i] as number)) ** 2
    }
    path += Math.sqrt(step)
    if (!linearise(frame, z)) continue
    let speed = 0
    for (let i = 0; i < n; i++) speed += (frame.residual[i] as number) ** 2
    speed = Math.sqrt(speed)
    if (speed < least) {
      least = speed
      slowest.set(z)
    }
  }
  return { ratio: (least * cycle.period) / path, z: slowest }
}

/** Period and control along a branch, as it is walked. */
export interface PeriodRecord {
  readonly period: number
  readonly p: number
}

/**
 * Where the control value is heading as the period grows, from the last three points: near a saddle connection
 * p - p* falls like exp(-lambda T). Null where the period does not grow or the control does not converge.
 * Source: Kuznetsov, Elements of Applied Bifurcation Theory, section 6.2 (period near a homoclinic orbit).
 */
export function limitOfControl(last: readonly PeriodRecord[]): { p: number; remaining: number } | null {
  const [a, b, c] = last.slice(-3)
  if (!a || !b || !c || !(c.period > b.period && b.period > a.period)) return null
  const first = (b.p - a.p) / (b.period - a.period)
  const second = (c.p - b.p) / (c.period - b.period)
  if (second === 0) return { p: c.p, remaining: 0 }
  if (!(first / second > 1)) return null
  const rate = (2 * Math.log(first / second)) / (c.period - a.period)
  const remaining = (second * Math.exp((-rate * (c.period - b.period)) / 2)) / rate
  return { p: c.p + remaining, remaining }
}

/** A steady state at one control value. */
export interface SteadyNear {
  readonly z: Float64Array
  readonly spectrum: Spectrum
}

/** The steady state that Newton's method finds from z at its control value, or null. */
export function steadyNear(frame: Frame, start: Float64Array): SteadyNear | null {
  const { n } = frame
  const z = start.slice()
  const lu = createLu(n)
  const step = new Float64Array(n)
  for (let pass = 0; pass < 30; pass++) {
    if (!linearise(frame, z)) return null
    for (let i = 0; i < n; i++) {
      step[i] = frame.residual[i] as number
      for (let j = 0; j < n; j++) lu.lu[i * n + j] = frame.derivatives[i * (n + 1) + j] as number
    }
    if (!factorInPlace(lu)) return null
    solveLu(lu, step)
    let size = 0
    for (let i = 0; i < n; i++) {
      z[i] = (z[i] as number) - (step[i] as number)
      size = Math.max(size, Math.abs(step[i] as number))
    }
    if (!(size < 10)) return null
    if (size < 1e-10) {
      const spectrum = linearise(frame, z) ? spectrumHere(frame) : null
      return spectrum && { z, spectrum }
    }
  }
  return null
}

/** True where the cycle all but passes through a steady state that is neither stable nor repelling in all directions. */
export function hugsSaddle(frame: Frame, cycle: Cycle, size: number): boolean {
  const { ratio, z } = slowestPoint(frame, cycle)
  if (ratio > 0.03) return false
  const near = steadyNear(frame, z)
  // past a fold there is no steady state left, only the slow passage where it was
  if (!near) return ratio < 3e-3
  let distance = 0
  for (let i = 0; i < frame.n; i++) distance = Math.max(distance, Math.abs((near.z[i] as number) - (z[i] as number)))
  const { re } = near.spectrum
  if (distance > 0.5 * size) return ratio < 3e-3
  return distance < 0.03 * size && re.some((value) => value > 0) && re.some((value) => value < 0)
}
