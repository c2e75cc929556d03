import { integrate } from '#shared/numerics/dormand-prince.ts'
import { integrateStiff } from '#shared/numerics/rosenbrock.ts'
import type { CycleAt } from './branch-point.ts'
import type { CycleSpace } from './cycle-system.ts'
import { cycleFromTrajectory, interpolated, type Sample, traversedOnce } from './from-trajectory.ts'
import type { SteadyNear } from './homoclinic.ts'

/** Where a trajectory goes. States in the model's units. */
export type Destination =
  | { readonly kind: 'steady'; readonly which: number }
  | { readonly kind: 'cycle'; readonly at: CycleAt }
  | { readonly kind: 'irregular'; readonly state: Float64Array }
  | { readonly kind: 'leaves-box' | 'undecided' }

export interface FollowOptions {
  /** Stable steady states at this control value. */
  readonly steady: readonly SteadyNear[]
  /** Longest time followed. */
  readonly span: number
  /** Steps of the explicit method before giving up. Default 40,000. */
  readonly maxSteps?: number
  /** Latest tops of the leading state by which a bounded motion is called irregular. Default 200. */
  readonly mostTops?: number
}

/** Share of the box within which a stable steady state has surely taken the trajectory. */
const captured = 1e-5
/** Longest pattern of tops looked for in one period. */
const mostLoops = 8

interface Top {
  readonly t: number
  readonly y: Float64Array
  readonly away: number
  readonly nearest: number
}

/**
 * Follows the model from `start` (model units) at control value `p` (over its range) until it is clear where it goes:
 * to a stable steady state; to a cycle (the motion all but repeats, Newton's method finds a stable cycle next to it);
 * out of a box ten times the search box; or it stays bounded and is neither, after many tops without order: irregular.
 */
export function follow(space: CycleSpace, start: Float64Array, p: number, options: FollowOptions): Destination {
  const { frame, n } = space
  const { model, boxLow, boxHigh, control, unit, budget } = frame
  const widths = boxHigh.map((high, i) => high - (boxLow[i] as number))
  const parameters = frame.parameters.slice()
  parameters[control] = p * (unit[n] as number)
  const rest = options.steady.map(({ z }) =>
    Float64Array.from({ length: n }, (_, i) => (z[i] as number) * (unit[i] as number)),
  )
  const rates = options.steady.map(({ spectrum }) => Math.abs(spectrum.re[0] as number))
  const mostTops = options.mostTops ?? 200
  const samples: Sample[] = []
  const tops: Top[] = []
  let answer: Destination | null = null
  let leading = -1
  let waitUntil = 0
  let waits = 0
  let seen = 0
  let steps = 0
  let steady = 0
  /** Heights of the latest tops of the leading state. */
  const heights: number[] = []
  let mark: { t: number; away: number; nearest: number } | null = null
  const low = start.slice()
  const high = start.slice()

  const nearest = (y: Float64Array): { nearest: number; away: number } => {
    let best = { nearest: -1, away: Number.POSITIVE_INFINITY }
    rest.forEach((x, which) => {
      let away = 0
      for (let i = 0; i < n; i++)
        away = Math.max(away, Math.abs((y[i] as number) - (x[i] as number)) / (widths[i] as number))
      if (away < best.away) best = { nearest: which, away }
    })
    return best
  }

  /** Three times in a row it came nearer at the rate of the slowest mode: captured by the linear part. */
  const comesNearer = (t: number, y: Float64Array): void => {
    const here = nearest(y)
    if (!mark || mark.nearest !== here.nearest || here.away > 0.05 || here.away >= mark.away) {
      if (!mark || here.away > mark.away || here.nearest !== mark.nearest) steady = 0
      mark = { t, ...here }
      return
    }
    if (here.away > 0.8 * mark.away) return
    const rate = Math.log(mark.away / here.away) / (t - mark.t)
    steady = Math.abs(rate / (rates[here.nearest] as number) - 1) < 0.15 ? steady + 1 : 0
    mark = { t, ...here }
    if (steady >= 4) answer = { kind: 'steady', which: here.nearest }
  }

  const onTop = (t: number, y: Float64Array): void => {
    comesNearer(t, y)
    if (answer) return
    tops.push({ t, y, ...nearest(y) })
    seen++
    const oldest = tops.length - mostLoops - 1
    if (oldest > 0) {
      tops.splice(0, oldest)
      const from = (tops[0] as Top).t
      let drop = 0
      while (drop + 2 < samples.length && (samples[drop + 1] as Sample).t < from) drop++
      samples.splice(0, drop)
    }
    if (seen < waitUntil || seen < 3) return
    const last = tops[tops.length - 1] as Top
    for (let loops = 1; loops < tops.length; loops++) {
      const before = tops[tops.length - 1 - loops] as Top
      let gap = 0
      let size = 0
      for (let i = 0; i < n; i++) {
        gap = Math.max(gap, Math.abs((last.y[i] as number) - (before.y[i] as number)) / (widths[i] as number))
        let least = Number.POSITIVE_INFINITY
        let most = Number.NEGATIVE_INFINITY
        for (const sample of samples) {
          if (sample.t < before.t) continue
          least = Math.min(least, sample.y[i] as number)
          most = Math.max(most, sample.y[i] as number)
        }
        size = Math.max(size, (most - least) / (widths[i] as number))
      }
      if (gap > 0.02 * size) continue
      waits++
      waitUntil = seen + 1 + Math.min(2 * waits, 25)
      const at = cycleFromTrajectory(space, samples, before.t, last.t, p)
      if (at?.stable) answer = { kind: 'cycle', at: traversedOnce(space, at, loops) }
      return
    }
  }

  const onStep = (t: number, y: Float64Array, dy: Float64Array): boolean => {
    steps++
    if (budget.spend(4)) return true
    let outside = 0
    for (let i = 0; i < n; i++) {
      const middle = ((boxLow[i] as number) + (boxHigh[i] as number)) / 2
      outside = Math.max(outside, Math.abs((y[i] as number) - middle) / (widths[i] as number))
      low[i] = Math.min(low[i] as number, y[i] as number)
      high[i] = Math.max(high[i] as number, y[i] as number)
    }
    if (outside > 5) {
      answer = { kind: 'leaves-box' }
      return true
    }
    const here = nearest(y)
    if (here.away < captured) {
      answer = { kind: 'steady', which: here.nearest }
      return true
    }
    const sample = { t, y: y.slice(), dy: dy.slice() }
    const before = samples[samples.length - 1]
    samples.push(sample)
    if (steps % 20 === 0 && (tops.length === 0 || t - (tops[tops.length - 1] as Top).t > 5 * (t / (seen + 1)))) {
      comesNearer(t, y)
    }
    if (steps === 40 || (steps > 40 && steps % 400 === 0)) {
      // the state that moves most, compared with its range; looked at again as the motion grows
      let best = -1
      let widest = 0
      for (let i = 0; i < n; i++) {
        const share = ((high[i] as number) - (low[i] as number)) / (widths[i] as number)
        if (share > 1.5 * widest || (best < 0 && share > 0)) {
          widest = share
          best = i
        }
      }
      if (best !== leading) {
        leading = best
        tops.length = 0
        heights.length = 0
      }
      low.set(y)
      high.set(y)
    }
    if (leading >= 0 && before && (before.dy[leading] as number) > 0 && (dy[leading] as number) <= 0) {
      const top = topBetween(before, sample, leading)
      onTop(top, interpolated(before, sample, top))
      heights.push(samples.length > 0 ? (interpolated(before, sample, top)[leading] as number) : 0)
      if (!answer && heights.length >= mostTops && heights.length % 50 === 0 && isOrderless(heights.slice(-mostTops))) {
        answer = { kind: 'irregular', state: y.slice() }
      }
    }
    // a long way without a top: only the latest samples can matter
    if (samples.length > 6000) samples.splice(0, 3000)
    return answer !== null
  }

  const f = (y: Float64Array, out: Float64Array): void => model.rhs(y, parameters, out)
  const absolute = widths.map((width) => 1e-9 * width)
  const maxSteps = options.maxSteps ?? 40_000
  let result = integrate(f, start, { span: options.span, absolute, relative: 1e-7, maxSteps, onStep })
  if (!answer && !result.ok && result.reason === 'stiff') {
    const linearise = (y: Float64Array, outF: Float64Array, outJ: Float64Array): void =>
      model.jacobian(y, parameters, outF, outJ)
    const offset = result.t
    samples.length = 0
    tops.length = 0
    result = integrateStiff(f, linearise, result.y, {
      span: options.span - offset,
      absolute: widths.map((width) => 1e-7 * width),
      relative: 1e-5,
      maxSteps: maxSteps / 4,
      onStep: (t, y, dy) => onStep(offset + t, y, dy),
    })
  }
  if (answer) return answer
  if (!result.ok && result.reason === 'not-finite') {
    // a blow-up in finite time ends far from where it began; a hole in the model's domain does not
    const far = result.y.some((value, i) => Math.abs(value - (boxLow[i] as number)) > 3 * (widths[i] as number))
    return { kind: far ? 'leaves-box' : 'undecided' }
  }
  return { kind: 'undecided' }
}

/** Whether tops go up and down without settling: at least a tenth of them turn, by more than a hundredth of their spread. */
function isOrderless(heights: readonly number[]): boolean {
  const spread = Math.max(...heights) - Math.min(...heights)
  let turns = 0
  for (let k = 2; k < heights.length; k++) {
    const before = (heights[k - 1] as number) - (heights[k - 2] as number)
    const after = (heights[k] as number) - (heights[k - 1] as number)
    if (before * after < 0 && Math.abs(before) > 0.01 * spread && Math.abs(after) > 0.01 * spread) turns++
  }
  return turns > heights.length / 10
}

/** Time at which the leading state is highest between two samples. */
function topBetween(a: Sample, b: Sample, leading: number): number {
  const h = b.t - a.t
  const rise = ((b.y[leading] as number) - (a.y[leading] as number)) / h
  const slope = (s: number): number =>
    (1 - s) * (1 - 3 * s) * (a.dy[leading] as number) +
    s * (3 * s - 2) * (b.dy[leading] as number) +
    6 * s * (1 - s) * rise
  let low = 0
  let high = 1
  for (let pass = 0; pass < 40; pass++) {
    const middle = (low + high) / 2
    if (slope(middle) > 0) low = middle
    else high = middle
  }
  return a.t + ((low + high) / 2) * h
}
