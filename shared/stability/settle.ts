import type { CompiledModel } from '#shared/model/compiled-model.ts'
import { type IntegrationResult, integrate } from '#shared/numerics/dormand-prince.ts'
import { integrateStiff } from '#shared/numerics/rosenbrock.ts'
import type { Budget } from './budget.ts'
import type { Spectrum } from './spectrum.ts'

/** A stable steady state the model may settle on. */
export interface Attractor {
  readonly x: Float64Array
  readonly spectrum: Spectrum
}

/** Where a run from the start values ends. `attractor` is a position in the list given. */
export type Settled =
  | { kind: 'settled'; attractor: number }
  | { kind: 'oscillates' | 'diverges' | 'undecided' | 'not-finite' | 'stopped' }

/** Explicit steps (six evaluations each) before the run is given up: about 50 ms for a planar model. */
const mostSteps = 12_000
const mostStiffSteps = 3_000
/** Distance, as a share of the box, at which a stable steady state has surely taken the run. */
const captured = 1e-6
/** Distance from which the rate of approach may settle the question instead. */
const near = 0.1

/**
 * Follows the model from `start` until it is clear which stable steady state takes it, or that none does.
 *
 * Settled means: within 1e-6 of the box of a stable steady state, or within a tenth and approaching it at the rate of
 * its slowest mode, the excess over that rate falling with the amplitude (so that slow spirals need not be followed to
 * the end). Oscillating means: it returns to the same place, at the tops of the first state that moves, without
 * approaching any. Runs the explicit pair and, where that finds the model stiff, the implicit one.
 */
export function settle(
  model: CompiledModel,
  parameters: Float64Array,
  start: Float64Array,
  widths: Float64Array,
  attractors: readonly Attractor[],
  budget: Budget,
): Settled {
  if (attractors.length === 0) return { kind: 'undecided' }
  const watch = createWatch(start, widths, attractors, budget)
  const f = (y: Float64Array, out: Float64Array): void => model.rhs(y, parameters, out)
  const absolute = widths.map((width) => 1e-9 * width)
  const slowest = Math.min(...attractors.map(({ spectrum }) => slowestRate(spectrum).rate))
  const span = 60 / slowest
  let result: IntegrationResult = integrate(f, start, {
    span,
    absolute,
    relative: 1e-7,
    maxSteps: mostSteps,
    onStep: watch.step,
  })
  if (!result.ok && result.reason === 'stiff') {
    const linearise = (y: Float64Array, outF: Float64Array, outJ: Float64Array): void =>
      model.jacobian(y, parameters, outF, outJ)
    watch.restart(5e-3)
    result = integrateStiff(f, linearise, result.y, {
      span,
      absolute: widths.map((width) => 1e-7 * width),
      relative: 1e-5,
      maxSteps: mostStiffSteps,
      onStep: watch.step,
    })
  }
  if (watch.answer()) return watch.answer() as Settled
  if (!result.ok && result.reason === 'not-finite') return { kind: 'not-finite' }
  return { kind: 'undecided' }
}

/** Slowest decay of a stable spectrum and the frequency it goes with (0 for a real eigenvalue). */
function slowestRate(s: Spectrum): { rate: number; omega: number } {
  // sorted by falling real part: the first is the slowest
  return { rate: Math.abs(s.re[0] as number), omega: Math.abs(s.im[0] as number) }
}

interface Return {
  readonly t: number
  readonly x: Float64Array
}

interface Watch {
  step(t: number, y: Float64Array, dy: Float64Array): boolean
  /** Forgets what was seen; `accuracy` is the relative accuracy of returns from here on. */
  restart(accuracy: number): void
  answer(): Settled | null
}

function createWatch(
  start: Float64Array,
  widths: Float64Array,
  attractors: readonly Attractor[],
  budget: Budget,
): Watch {
  const n = start.length
  let answer: Settled | null = null
  let accuracy = 1e-4
  let returns: Return[] = []
  let rates: { size: number; excess: number }[] = []
  let lastT = 0
  const last = new Float64Array(n)
  const lastSlope = new Float64Array(n)
  let hasLast = false
  let mark: { t: number; size: number; attractor: number } | null = null

  const sizeFrom = (x: Float64Array, centre: Float64Array): number => {
    let size = 0
    for (let i = 0; i < n; i++) {
      size = Math.max(size, Math.abs((x[i] as number) - (centre[i] as number)) / (widths[i] as number))
    }
    return size
  }

  const nearest = (x: Float64Array): { attractor: number; size: number } => {
    let best = { attractor: 0, size: Number.POSITIVE_INFINITY }
    attractors.forEach(({ x: centre }, attractor) => {
      const size = sizeFrom(x, centre)
      if (size < best.size) best = { attractor, size }
    })
    return best
  }

  /** The approach measured from `mark` to (t, size): enough to say that it is captured? */
  const approaches = (t: number, attractor: number, size: number): boolean => {
    if (!mark || mark.attractor !== attractor || size > near) {
      mark = { t, size, attractor }
      rates = []
      return false
    }
    if (size > 0.9 * mark.size) {
      if (size > mark.size * (1 + accuracy)) {
        mark = { t, size, attractor }
        rates = []
      }
      return false
    }
    const { rate } = slowestRate((attractors[attractor] as Attractor).spectrum)
    const excess = Math.log(mark.size / size) / (t - mark.t) / rate - 1
    const before = rates.at(-1)
    rates.push({ size, excess })
    mark = { t, size, attractor }
    if (!before || excess < -0.3 || excess > 1.5 || before.excess < -0.3) return false
    const shrunk = (Math.abs(before.excess) * size) / before.size
    return rates.length > 2 && Math.abs(excess) <= shrunk + 0.1
  }

  const onReturn = (t: number, x: Float64Array): void => {
    const { attractor, size } = nearest(x)
    if (approaches(t, attractor, size)) {
      answer = { kind: 'settled', attractor }
      return
    }
    returns.push({ t, x })
    if (returns.length < 9) return
    returns = returns.slice(-9)
    const first = returns[0] as Return
    const drift = Math.max(...returns.slice(1).map((each) => sizeFrom(each.x, first.x)))
    const { rate } = slowestRate((attractors[attractor] as Attractor).spectrum)
    const expected = size * (1 - Math.exp(-rate * (t - first.t)))
    // it would have come visibly nearer by now if it were a decay
    if (drift < accuracy * size && expected > 5 * accuracy * size && size > 1e-4) answer = { kind: 'oscillates' }
  }

  return {
    step(t, y, dy) {
      budget.spend(3)
      if (budget.spent()) {
        answer = { kind: 'stopped' }
        return true
      }
      const { attractor, size } = nearest(y)
      if (size < captured) {
        answer = { kind: 'settled', attractor }
        return true
      }
      if (size > 50 && sizeFrom(y, start) > 50) {
        answer = { kind: 'diverges' }
        return true
      }
      if (hasLast) {
        const axis = leading(lastSlope, dy, widths)
        const top = axis >= 0 ? topBetween(lastT, last, lastSlope, t, y, dy, axis) : null
        if (top) onReturn(top.t, top.x)
        else if (slowestRate((attractors[attractor] as Attractor).spectrum).omega === 0) {
          if (approaches(t, attractor, size)) answer = { kind: 'settled', attractor }
        }
      }
      lastT = t
      last.set(y)
      lastSlope.set(dy)
      hasLast = true
      return answer !== null
    },
    restart(next) {
      accuracy = next
      returns = []
      rates = []
      mark = null
      hasLast = false
      lastT = 0
    },
    answer: () => answer,
  }
}

/** The first state whose slope turns from rising to falling in this step; -1 where none does. Always the same state. */
function leading(before: Float64Array, after: Float64Array, widths: Float64Array): number {
  for (let i = 0; i < widths.length; i++) {
    const moving = Math.abs(before[i] as number) + Math.abs(after[i] as number) > 0
    if (moving) return (before[i] as number) > 0 && (after[i] as number) <= 0 ? i : -1
  }
  return -1
}

/** The state at the top of component `axis` within a step, by the cubic through both ends with their slopes. */
function topBetween(
  t0: number,
  y0: Float64Array,
  d0: Float64Array,
  t1: number,
  y1: Float64Array,
  d1: Float64Array,
  axis: number,
): Return | null {
  const h = t1 - t0
  const slope = (s: number): number => {
    const rise = ((y1[axis] as number) - (y0[axis] as number)) / h
    return (
      (1 - s) * (1 - 3 * s) * (d0[axis] as number) + s * (3 * s - 2) * (d1[axis] as number) + 6 * s * (1 - s) * rise
    )
  }
  let low = 0
  let high = 1
  for (let pass = 0; pass < 40; pass++) {
    const middle = (low + high) / 2
    if (slope(middle) > 0) low = middle
    else high = middle
  }
  const s = (low + high) / 2
  const h00 = (1 + 2 * s) * (1 - s) * (1 - s)
  const h10 = s * (1 - s) * (1 - s) * h
  const h01 = s * s * (3 - 2 * s)
  const h11 = s * s * (s - 1) * h
  const x = y0.map(
    (value, i) => h00 * value + h10 * (d0[i] as number) + h01 * (y1[i] as number) + h11 * (d1[i] as number),
  )
  return { t: t0 + s * h, x }
}
