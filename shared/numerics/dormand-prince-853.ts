/**
 * Initial value problems y' = f(y), not stiff, to high accuracy: the explicit pair 8(5,3) of Dormand and Prince with
 * dense output of order 7 and location of events.
 *
 * Source: Hairer, Norsett & Wanner, Solving Ordinary Differential Equations I (2nd ed.), sections II.4 (step control,
 * starting step), II.5 (the pair and its two error estimates), II.6 (dense output); II (Hairer & Wanner), IV.2 (stiffness
 * test: h |lambda| > 6.1 in 15 steps).
 */
import type { IntegrationResult, RightHandSide } from './dormand-prince.ts'
import { dense, error3, error5, extraStages, stages } from './dormand-prince-853-coefficients.ts'

/** One accepted step. Arrays belong to the integrator: copy what is to be kept. */
export interface DenseStep {
  readonly t: number
  readonly h: number
  /** State and slope at the end of the step, at t + h. */
  readonly y: Float64Array
  readonly dy: Float64Array
  /** The state at t + share h, share in [0, 1], to order 7; three more evaluations the first time it is asked in a step. */
  at(share: number, out: Float64Array): void
}

/** A zero of g(y) that is passed in the direction asked (1: rising, -1: falling, 0: either). */
export interface EventFunction {
  readonly g: (y: Float64Array) => number
  readonly direction: -1 | 0 | 1
  /** Told at each event, time and state (its own array); `true` ends the integration there. */
  readonly onEvent: (t: number, y: Float64Array) => boolean
}

export interface DenseOptions {
  /** Length of time to integrate over, > 0. */
  span: number
  /** Relative tolerance of a step. Default 1e-10. */
  relative?: number
  /** Absolute tolerance of each component (its own unit). */
  absolute: Float64Array
  /** Largest number of attempted steps. Default 100,000. */
  maxSteps?: number
  maxStep?: number
  /** Called after every accepted step; `true` ends the integration. */
  onStep?: (step: DenseStep) => boolean
  events?: readonly EventFunction[]
}

const order = 8

/**
 * Integrates from `start` (left untouched). Ends by the span, by `onStep`, by an event (state and time are then those of
 * the event, located to rounding on the dense output), or with a reason; see dormand-prince.ts for the reasons.
 */
export function integrateDense(f: RightHandSide, start: Float64Array, options: DenseOptions): IntegrationResult {
  const { span, absolute, relative = 1e-10, maxSteps = 100_000, onStep, events = [] } = options
  const n = start.length
  const y = start.slice()
  const next = new Float64Array(n)
  const stage = new Float64Array(n)
  const k = Array.from({ length: 16 }, () => new Float64Array(n))
  const slope = (i: number): Float64Array => k[i] as Float64Array
  const extension = createExtension(n)
  f(y, slope(0))
  if (!slope(0).every(Number.isFinite)) return { ok: false, reason: 'not-finite', t: 0, y, steps: 0 }
  const longest = Math.min(span, options.maxStep ?? span)
  let h = Math.min(longest, firstStep(f, y, slope(0), span, relative, absolute))
  let t = 0
  let rejected = false
  let stiffSteps = 0
  let easySteps = 0
  let values = events.map(({ g }) => g(y))
  for (let steps = 1; steps <= maxSteps; steps++) {
    h = Math.min(h, span - t)
    for (let s = 0; s < stages.length; s++) {
      combine(y, h, k, stages[s] as readonly number[], s === stages.length - 1 ? next : stage)
      f(s === stages.length - 1 ? next : stage, slope(s + 1))
    }
    const size = stepError(h, k, y, next, relative, absolute)
    if (!(size <= 1)) {
      h *= Number.isFinite(size) ? Math.max(0.333, 0.9 * size ** (-1 / order)) : 0.1
      rejected = true
      if (h < 1e-14 * span) return { ok: false, reason: 'not-finite', t, y, steps }
      continue
    }
    if (looksStiff(h, slope(12), slope(11), next, stage)) {
      easySteps = 0
      if (++stiffSteps === 15) return { ok: false, reason: 'stiff', t, y, steps }
    } else if (stiffSteps > 0 && ++easySteps === 6) stiffSteps = 0
    extension.begin(f, y, next, h, k)
    const step: DenseStep = { t, h, y: next, dy: slope(12), at: extension.at }
    const ended = meetEvents(step, events, values)
    if (ended) return { ok: true, t: ended.t, y: ended.y, steps, ended: 'asked' }
    if (onStep?.(step)) return { ok: true, t: t + h, y: next.slice(), steps, ended: 'asked' }
    t += h
    y.set(next)
    slope(0).set(slope(12))
    values = events.map(({ g }) => g(y))
    if (t >= span * (1 - 1e-14)) return { ok: true, t, y, steps, ended: 'span' }
    const grow = 0.9 * Math.max(size, 1e-12) ** (-1 / order)
    h = Math.min(longest, h * Math.min(rejected ? 1 : 6, Math.max(0.333, grow)))
    rejected = false
  }
  return { ok: false, reason: 'too-many-steps', t, y, steps: maxSteps }
}

function combine(y: Float64Array, h: number, k: Float64Array[], row: readonly number[], out: Float64Array): void {
  for (let i = 0; i < y.length; i++) {
    let sum = 0
    for (let j = 0; j < row.length; j++) sum += (row[j] as number) * ((k[j] as Float64Array)[i] as number)
    out[i] = (y[i] as number) + h * sum
  }
}

/** The two estimates put together as the source does: order 5 damped by order 3. */
function stepError(
  h: number,
  k: Float64Array[],
  y: Float64Array,
  next: Float64Array,
  relative: number,
  absolute: Float64Array,
): number {
  const n = y.length
  let five = 0
  let three = 0
  for (let i = 0; i < n; i++) {
    const scale = (absolute[i] as number) + relative * Math.max(Math.abs(y[i] as number), Math.abs(next[i] as number))
    let a = 0
    let b = 0
    for (let j = 0; j < error5.length; j++) {
      const value = (k[j] as Float64Array)[i] as number
      a += (error5[j] as number) * value
      b += (error3[j] as number) * value
    }
    five += (a / scale) ** 2
    three += (b / scale) ** 2
  }
  if (five === 0 && three === 0) return 0
  return (h * five) / Math.sqrt((five + 0.01 * three) * n)
}

/** First step by the size of f and of its change along an Euler step (section II.4, "starting step size"). */
function firstStep(
  f: RightHandSide,
  y: Float64Array,
  dy: Float64Array,
  span: number,
  relative: number,
  absolute: Float64Array,
): number {
  const norm = (v: Float64Array): number => {
    let sum = 0
    for (let i = 0; i < v.length; i++) {
      sum += ((v[i] as number) / ((absolute[i] as number) + relative * Math.abs(y[i] as number))) ** 2
    }
    return Math.sqrt(sum / v.length)
  }
  const size = norm(y)
  const speed = norm(dy)
  const trial = Math.min(span, size < 1e-5 || speed < 1e-5 ? 1e-6 * span : (0.01 * size) / speed)
  const there = new Float64Array(y.length)
  f(
    y.map((value, i) => value + trial * (dy[i] as number)),
    there,
  )
  const bend = norm(there.map((value, i) => (value - (dy[i] as number)) / trial))
  if (!Number.isFinite(bend)) return trial * 1e-3
  const largest = Math.max(speed, bend)
  const second = largest <= 1e-15 ? Math.max(1e-6 * span, trial * 1e-3) : (0.01 / largest) ** (1 / order)
  return Math.min(100 * trial, second, span)
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
  return below > 0 && h * Math.sqrt(above / below) > 6.1
}

interface Extension {
  begin(f: RightHandSide, y: Float64Array, next: Float64Array, h: number, k: Float64Array[]): void
  at(share: number, out: Float64Array): void
}

/** The continuous extension of one step, made when it is first asked for. */
function createExtension(n: number): Extension {
  const parts = Array.from({ length: 7 }, () => new Float64Array(n))
  const from = new Float64Array(n)
  const stage = new Float64Array(n)
  let made = true
  let make: () => void = () => undefined
  const part = (j: number): Float64Array => parts[j] as Float64Array
  return {
    begin(f, y, next, h, k) {
      made = false
      make = () => {
        from.set(y)
        extraStages.forEach((row, s) => {
          combine(y, h, k, row, stage)
          f(stage, k[13 + s] as Float64Array)
        })
        for (let i = 0; i < n; i++) {
          const rise = (next[i] as number) - (y[i] as number)
          const first = h * ((k[0] as Float64Array)[i] as number)
          part(0)[i] = rise
          part(1)[i] = first - rise
          part(2)[i] = 2 * rise - (first + h * ((k[12] as Float64Array)[i] as number))
          dense.forEach((row, r) => {
            let sum = 0
            for (let j = 0; j < row.length; j++) sum += (row[j] as number) * ((k[j] as Float64Array)[i] as number)
            part(3 + r)[i] = h * sum
          })
        }
        made = true
      }
    },
    at(share, out) {
      if (!made) make()
      for (let i = 0; i < n; i++) {
        let sum = 0
        for (let j = 6; j >= 0; j--) {
          sum += part(j)[i] as number
          sum *= j % 2 === 0 ? share : 1 - share
        }
        out[i] = (from[i] as number) + sum
      }
    },
  }
}

/** Locates the events of a step in the order of time; the one that ends the integration is returned. */
function meetEvents(
  step: DenseStep,
  events: readonly EventFunction[],
  before: readonly number[],
): { t: number; y: Float64Array } | null {
  const met: { share: number; event: EventFunction; y: Float64Array }[] = []
  events.forEach((event, e) => {
    const from = before[e] as number
    const to = event.g(step.y)
    const passes = from < 0 ? to >= 0 && event.direction >= 0 : from > 0 && to <= 0 && event.direction <= 0
    if (!passes) return
    const y = new Float64Array(step.y.length)
    let low = 0
    let high = 1
    for (let pass = 0; pass < 60 && high - low > 1e-15; pass++) {
      const share = (low + high) / 2
      step.at(share, y)
      if (event.g(y) * from > 0) low = share
      else high = share
    }
    step.at(high, y)
    met.push({ share: high, event, y })
  })
  met.sort((a, b) => a.share - b.share)
  for (const { share, event, y } of met) {
    const t = step.t + share * step.h
    if (event.onEvent(t, y)) return { t, y }
  }
  return null
}
