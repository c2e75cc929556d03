/**
 * Initial value problems y' = f(y), stiff: the linearly implicit pair of order 2(3) with an L-stable formula, which
 * needs only f and its Jacobian. Meant for finding out where a stiff model settles, at moderate accuracy.
 *
 * Source: Shampine & Reichelt, SIAM J. Sci. Comput. 18 (1997) 1-22, section 3 (modified Rosenbrock
 * pair); Hairer & Wanner, Solving Ordinary Differential Equations II, section IV.7.
 */
import type { IntegrationOptions, IntegrationResult, RightHandSide } from './dormand-prince.ts'
import { createLu, factorInPlace, solveLu } from './linear-solve.ts'

/** f and its row-major Jacobian in one pass. */
export type Linearisation = (y: Float64Array, outF: Float64Array, outJ: Float64Array) => void

const d = 1 / (2 + Math.SQRT2)
const e32 = 6 + Math.SQRT2

/** Integrates from `start` (left untouched); options and result as of the explicit `integrate`. */
export function integrateStiff(
  f: RightHandSide,
  linearise: Linearisation,
  start: Float64Array,
  options: IntegrationOptions,
): IntegrationResult {
  const { span, absolute, relative = 1e-5, maxSteps = 20_000, onStep } = options
  const n = start.length
  const y = start.slice()
  const next = new Float64Array(n)
  const f0 = new Float64Array(n)
  const f1 = new Float64Array(n)
  const f2 = new Float64Array(n)
  const k1 = new Float64Array(n)
  const k2 = new Float64Array(n)
  const k3 = new Float64Array(n)
  const jacobian = new Float64Array(n * n)
  const lu = createLu(n)
  linearise(y, f0, jacobian)
  if (!f0.every(Number.isFinite)) return { ok: false, reason: 'not-finite', t: 0, y, steps: 0 }
  let h = options.maxStep ?? 1e-4 * span
  let t = 0
  for (let steps = 1; steps <= maxSteps; steps++) {
    h = Math.min(h, span - t)
    for (let i = 0; i < n * n; i++) lu.lu[i] = -h * d * (jacobian[i] as number)
    for (let i = 0; i < n; i++) lu.lu[i * n + i] = (lu.lu[i * n + i] as number) + 1
    let size = Number.POSITIVE_INFINITY
    if (factorInPlace(lu)) {
      k1.set(f0)
      solveLu(lu, k1)
      for (let i = 0; i < n; i++) next[i] = (y[i] as number) + 0.5 * h * (k1[i] as number)
      f(next, f1)
      for (let i = 0; i < n; i++) k2[i] = (f1[i] as number) - (k1[i] as number)
      solveLu(lu, k2)
      for (let i = 0; i < n; i++) {
        k2[i] = (k2[i] as number) + (k1[i] as number)
        next[i] = (y[i] as number) + h * (k2[i] as number)
      }
      f(next, f2)
      for (let i = 0; i < n; i++) {
        const fromSecond = e32 * ((k2[i] as number) - (f1[i] as number))
        k3[i] = (f2[i] as number) - fromSecond - 2 * ((k1[i] as number) - (f0[i] as number))
      }
      solveLu(lu, k3)
      size = errorOf(h, k1, k2, k3, y, next, relative, absolute)
    }
    if (!(size <= 1)) {
      h *= Number.isFinite(size) ? Math.max(0.2, 0.8 * size ** (-1 / 3)) : 0.1
      if (h < 1e-14 * span) return { ok: false, reason: 'not-finite', t, y, steps }
      continue
    }
    t += h
    y.set(next)
    linearise(y, f0, jacobian)
    if (onStep?.(t, y, f0)) return { ok: true, t, y, steps, ended: 'asked' }
    if (t >= span * (1 - 1e-14)) return { ok: true, t, y, steps, ended: 'span' }
    h *= Math.min(5, Math.max(0.2, 0.8 * Math.max(size, 1e-8) ** (-1 / 3)))
  }
  return { ok: false, reason: 'too-many-steps', t, y, steps: maxSteps }
}

function errorOf(
  h: number,
  k1: Float64Array,
  k2: Float64Array,
  k3: Float64Array,
  y: Float64Array,
  next: Float64Array,
  relative: number,
  absolute: Float64Array,
): number {
  let largest = 0
  for (let i = 0; i < y.length; i++) {
    const error = (h / 6) * ((k1[i] as number) - 2 * (k2[i] as number) + (k3[i] as number))
    const size = Math.max(Math.abs(y[i] as number), Math.abs(next[i] as number))
    const part = Math.abs(error) / ((absolute[i] as number) + relative * size)
    if (!(part <= largest)) largest = part
  }
  return largest
}
