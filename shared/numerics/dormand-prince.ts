/**
 * Initial value problems y' = f(y), not stiff: the explicit pair of order 5(4) by Dormand and Prince with step-size
 * control and a stiffness test.
 *
 * Source: Dormand & Prince 1980; Hairer, Norsett & Wanner, Solving Ordinary Differential Equations I (2nd ed.),
 * sections II.4 (step control, starting step) and II.5 (coefficients), and II (Hairer & Wanner), section IV.2
 * (stiffness test: h |lambda| > 3.25 in 15 steps in a row).
 */

/** f of an autonomous system; writes n entries into `out`. A value that is not finite makes the step be tried shorter. */
export type RightHandSide = (y: Float64Array, out: Float64Array) => void

export interface IntegrationOptions {
  /** Length of time to integrate over, > 0. */
  span: number
  /** Relative tolerance of a step. Default 1e-8. */
  relative?: number
  /** Absolute tolerance of each component (its own unit). */
  absolute: Float64Array
  /** Largest number of attempted steps. Default 100,000. */
  maxSteps?: number
  /** Longest step. Default: the span. */
  maxStep?: number
  /** Called after every accepted step with the time, the state and its derivative; `true` ends the integration. */
  onStep?: (t: number, y: Float64Array, dy: Float64Array) => boolean
}

export type IntegrationResult =
  | { ok: true; t: number; y: Float64Array; steps: number; ended: 'span' | 'asked' }
  | { ok: false; reason: 'stiff' | 'not-finite' | 'too-many-steps'; t: number; y: Float64Array; steps: number }

const a = [
  [1 / 5],
  [3 / 40, 9 / 40],
  [44 / 45, -56 / 15, 32 / 9],
  [19372 / 6561, -25360 / 2187, 64448 / 6561, -212 / 729],
  [9017 / 3168, -355 / 33, 46732 / 5247, 49 / 176, -5103 / 18656],
  [35 / 384, 0, 500 / 1113, 125 / 192, -2187 / 6784, 11 / 84],
] as const
/** Difference of the two formulas: error of the step of order 4. */
const e = [71 / 57600, 0, -71 / 16695, 71 / 1920, -17253 / 339200, 22 / 525, -1 / 40] as const

/** Root mean square of v relative to the tolerance at y. */
function scaledNorm(v: Float64Array, y: Float64Array, relative: number, absolute: Float64Array): number {
  let sum = 0
  for (let i = 0; i < v.length; i++) {
    const size = (v[i] as number) / ((absolute[i] as number) + relative * Math.abs(y[i] as number))
    sum += size * size
  }
  return Math.sqrt(sum / v.length)
}

/** First step by the size of f and of its change along an Euler step (Hairer I, II.4, "starting step size"). */
function firstStep(
  f: RightHandSide,
  y: Float64Array,
  dy: Float64Array,
  span: number,
  relative: number,
  absolute: Float64Array,
): number {
  const size = scaledNorm(y, y, relative, absolute)
  const slope = scaledNorm(dy, y, relative, absolute)
  const trial = Math.min(span, size < 1e-5 || slope < 1e-5 ? 1e-6 * span : (0.01 * size) / slope)
  const moved = y.map((value, i) => value + trial * (dy[i] as number))
  const slopeThere = new Float64Array(y.length)
  f(moved, slopeThere)
  for (let i = 0; i < y.length; i++) slopeThere[i] = ((slopeThere[i] as number) - (dy[i] as number)) / trial
  const bend = scaledNorm(slopeThere, y, relative, absolute)
  if (!Number.isFinite(bend)) return trial * 1e-3
  const largest = Math.max(slope, bend)
  const second = largest <= 1e-15 ? Math.max(1e-6 * span, trial * 1e-3) : (0.01 / largest) ** 0.2
  return Math.min(100 * trial, second, span)
}

/**
 * Integrates from `start` (left untouched). Ends by the span, by `onStep`, or with a reason: `stiff` where an implicit
 * method is called for (see rosenbrock.ts), `not-finite` where no step however short gives finite values.
 */
export function integrate(f: RightHandSide, start: Float64Array, options: IntegrationOptions): IntegrationResult {
  const { span, absolute, relative = 1e-8, maxSteps = 100_000, onStep } = options
  const n = start.length
  const y = start.slice()
  const stage = new Float64Array(n)
  const next = new Float64Array(n)
  const error = new Float64Array(n)
  const k = Array.from({ length: 7 }, () => new Float64Array(n))
  const slopes = (index: number): Float64Array => k[index] as Float64Array
  f(y, slopes(0))
  if (!slopes(0).every(Number.isFinite)) return { ok: false, reason: 'not-finite', t: 0, y, steps: 0 }
  const longest = Math.min(span, options.maxStep ?? span)
  let h = Math.min(longest, firstStep(f, y, slopes(0), span, relative, absolute))
  let t = 0
  let lastError = 1e-4
  let stiffSteps = 0
  let easySteps = 0
  let rejected = false
  for (let steps = 1; steps <= maxSteps; steps++) {
    h = Math.min(h, span - t)
    for (let s = 0; s < 6; s++) {
      const row = a[s] as readonly number[]
      const target = s === 5 ? next : stage
      for (let i = 0; i < n; i++) {
        let sum = 0
        for (let j = 0; j <= s; j++) sum += (row[j] as number) * (slopes(j)[i] as number)
        target[i] = (y[i] as number) + h * sum
      }
      // stage still holds the argument of the sixth slope when the seventh is taken: the stiffness test needs both
      f(target, slopes(s + 1))
    }
    for (let i = 0; i < n; i++) {
      let sum = 0
      for (let j = 0; j < 7; j++) sum += (e[j] as number) * (slopes(j)[i] as number)
      error[i] = h * sum
    }
    const size = stepError(error, y, next, relative, absolute)
    if (!(size <= 1)) {
      const shrink = Number.isFinite(size) ? Math.max(0.2, 0.9 * size ** -0.2) : 0.1
      h *= shrink
      rejected = true
      if (h < 1e-14 * span) return { ok: false, reason: 'not-finite', t, y, steps }
      continue
    }
    if (looksStiff(h, slopes(6), slopes(5), next, stage)) {
      easySteps = 0
      if (++stiffSteps === 15) return { ok: false, reason: 'stiff', t, y, steps }
    } else if (stiffSteps > 0 && ++easySteps === 6) stiffSteps = 0
    t += h
    y.set(next)
    slopes(0).set(slopes(6))
    if (onStep?.(t, y, slopes(0))) return { ok: true, t, y, steps, ended: 'asked' }
    if (t >= span * (1 - 1e-14)) return { ok: true, t, y, steps, ended: 'span' }
    // Gustafsson's control (Hairer II, IV.2) with the exponents usual for order 5
    const grow = 0.9 * Math.max(size, 1e-10) ** -0.17 * lastError ** 0.04
    h = Math.min(longest, h * Math.min(rejected ? 1 : 10, Math.max(0.2, grow)))
    lastError = Math.max(size, 1e-4)
    rejected = false
  }
  return { ok: false, reason: 'too-many-steps', t, y, steps: maxSteps }
}

function stepError(
  error: Float64Array,
  y: Float64Array,
  next: Float64Array,
  relative: number,
  absolute: Float64Array,
): number {
  let sum = 0
  for (let i = 0; i < error.length; i++) {
    const size = Math.max(Math.abs(y[i] as number), Math.abs(next[i] as number))
    const part = (error[i] as number) / ((absolute[i] as number) + relative * size)
    sum += part * part
  }
  return Math.sqrt(sum / error.length)
}

function looksStiff(
  h: number,
  slopeNext: Float64Array,
  slopeStage: Float64Array,
  next: Float64Array,
  stage: Float64Array,
): boolean {
  let above = 0
  let below = 0
  for (let i = 0; i < next.length; i++) {
    above += ((slopeNext[i] as number) - (slopeStage[i] as number)) ** 2
    below += ((next[i] as number) - (stage[i] as number)) ** 2
  }
  return below > 0 && h * Math.sqrt(above / below) > 3.25
}
