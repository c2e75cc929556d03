import type { HopfPoint, Verdict } from '#shared/model/card-document.ts'
import type { Complex } from '#shared/numerics/complex.ts'
import { correct, sampleAt } from './corrector.ts'
import { nearestPair } from './eigenvalue-tracks.ts'
import type { Forms } from './forms.ts'
import { type Frame, place } from './frame.ts'
import type { BranchHopf } from './hopf.ts'
import { type CriticalPair, criticalPair, cubicTerm, eigenvalueRate } from './normal-form.ts'
import { secondLyapunov } from './second-lyapunov.ts'
import { isStable, onAxis, type Spectrum } from './spectrum.ts'

/** What a card says of a Hopf point, without where it lies. All in the model's units, see the card's conventions. */
export type HopfJudgement = Pick<
  HopfPoint,
  | 'omega'
  | 'period'
  | 'crossing'
  | 'firstLyapunov'
  | 'cubic'
  | 'cubicError'
  | 'shift'
  | 'verdict'
  | 'operating'
  | 'cycleSide'
  | 'amplitudeCoefficient'
  | 'secondLyapunov'
> & {
  /** The observed quantity does not move to first order. */
  silent: boolean
  /** Why a verdict is degenerate, for the warning; null where it is not. */
  degenerateBy: 'cubic' | 'other-eigenvalue' | null
}

/** A cubic coefficient of less than this share, without units, is taken for zero. */
const undecidable = 1e-8

/**
 * The verdict at a located Hopf point: soft or hard by the sign of the cubic coefficient; degenerate where it cannot be
 * told from zero or another eigenvalue lies on the axis; undetermined where third derivatives do not exist there.
 */
export function judgeHopf(frame: Frame, forms: Forms, point: BranchHopf): HopfJudgement {
  const { omega } = point
  const others = otherEigenvalues(point.sample.spectrum, omega)
  const base = { omega, period: (2 * Math.PI) / omega, operating: others === 'stable', silent: false }
  const nothing = {
    firstLyapunov: null,
    cubic: null,
    cubicError: null,
    shift: null,
    cycleSide: null,
    amplitudeCoefficient: null,
    secondLyapunov: null,
  }
  const pair = criticalPair(frame, point)
  const crossing = crossingOf(frame, forms, point, pair)
  if (atKink(frame, point)) return { ...base, ...nothing, crossing, verdict: 'undetermined', degenerateBy: null }
  const term = pair && cubicTerm(frame, forms, point, pair)
  if (!pair || !term) {
    return { ...base, ...nothing, crossing, verdict: 'degenerate', degenerateBy: 'other-eigenvalue' }
  }
  const { c1 } = term
  const firstLyapunov = c1.re / pair.size / omega
  const moved = 4 * (pair.observed.re ** 2 + pair.observed.im ** 2)
  const silent = Math.sqrt(moved) <= 1e-9 * pair.observedReach || moved === 0
  const verdict = verdictOf(pair, c1, term.error, silent ? null : moved, others)
  const second = verdict.by === 'cubic' ? secondLyapunov(frame, point, pair) : null
  if (silent) {
    const told = { firstLyapunov, secondLyapunov: second, verdict: verdict.verdict, degenerateBy: verdict.by }
    return { ...base, ...nothing, crossing, ...told, silent }
  }
  const cubic = c1.re / moved
  const decided = verdict.verdict === 'soft' || verdict.verdict === 'hard'
  const ratio = crossing / cubic
  return {
    ...base,
    crossing,
    firstLyapunov,
    cubic,
    cubicError: term.error / moved + Math.abs(cubic) * 2 ** -48 * pair.condition,
    shift: c1.im / moved,
    verdict: verdict.verdict,
    degenerateBy: verdict.by,
    cycleSide: decided && ratio !== 0 ? (ratio < 0 ? 'above' : 'below') : null,
    amplitudeCoefficient: decided && Number.isFinite(ratio) ? Math.sqrt(Math.abs(ratio)) : null,
    secondLyapunov: second,
    silent,
  }
}

/**
 * |a| R² / omega with R half the observed range, or the same with the states' own ranges where the observed quantity is
 * silent: no units are left, so one threshold serves models whose coefficients lie between 1e-6 and 1e8.
 */
function verdictOf(
  pair: CriticalPair,
  c1: Complex,
  error: number,
  moved: number | null,
  others: 'stable' | 'unstable' | 'on-axis',
): { verdict: Verdict; by: HopfJudgement['degenerateBy'] } {
  if (others === 'on-axis') return { verdict: 'degenerate', by: 'other-eigenvalue' }
  const share =
    moved === null
      ? (Math.abs(c1.re) / (4 * largestShare(pair))) * (1 / pair.omega)
      : ((Math.abs(c1.re) / moved) * pair.halfRange ** 2) / pair.omega
  if (share < undecidable || Math.abs(c1.re) < 3 * error) return { verdict: 'degenerate', by: 'cubic' }
  return { verdict: c1.re < 0 ? 'soft' : 'hard', by: null }
}

/** Largest |q_j|² with each state measured in half its range. */
function largestShare(pair: CriticalPair): number {
  const { re, im } = pair.q
  const n = re.length - 1
  let largest = 0
  for (let i = 0; i < n; i++) largest = Math.max(largest, (re[i] as number) ** 2 + (im[i] as number) ** 2)
  // a scaled unit is the root of n widths, two halves each
  return largest * 4 * n
}

function atKink(frame: Frame, point: BranchHopf): boolean {
  if (frame.model.smooth) return false
  place(frame, point.sample.z)
  return frame.model.kinkAt(frame.x, frame.parameters, 1e-8)
}

/**
 * Where the pair is not simple its rate comes from the real parts a short way off on both sides. On a turning point of the
 * branch (a zero-Hopf point) there is no rate per unit of the control; the card's format wants a number: 0.
 */
function crossingOf(frame: Frame, forms: Forms, point: BranchHopf, pair: CriticalPair | null): number {
  if (Math.abs(point.sample.t[frame.n] as number) < 1e-8) return 0
  const rate = pair ? eigenvalueRate(frame, forms, point, pair).re : rateByDifference(frame, point)
  return Number.isFinite(rate) ? rate : 0
}

function rateByDifference(frame: Frame, point: BranchHopf): number {
  const { z, t } = point.sample
  const step = 1e-5
  const real = [-step, step].map((length) => {
    const moved = z.map((value, i) => value + length * (t[i] as number))
    const sample = correct(frame, moved, t).ok ? sampleAt(frame, moved, t) : null
    const index = sample ? nearestPair(sample.spectrum, 0, point.omega) : -1
    return sample && index >= 0 ? (sample.spectrum.re[index] as number) : Number.NaN
  })
  const control = 2 * step * (t[frame.n] as number) * (frame.unit[frame.n] as number)
  return ((real[1] as number) - (real[0] as number)) / control
}

/** The other eigenvalues at a Hopf point, each judged by its own size. */
function otherEigenvalues(s: Spectrum, omega: number): 'stable' | 'unstable' | 'on-axis' {
  const rest = withoutPair(s, omega)
  for (let i = 0; i < rest.n; i++) if (onAxis(rest, i)) return 'on-axis'
  return isStable(rest) ? 'stable' : 'unstable'
}

/** The spectrum without the pair nearest to ±i omega. */
export function withoutPair(s: Spectrum, omega: number): Spectrum {
  const nearest = (im: number, not: number): number => {
    let best = -1
    let distance = Number.POSITIVE_INFINITY
    for (let i = 0; i < s.n; i++) {
      if (i === not) continue
      const here = Math.hypot(s.re[i] as number, (s.im[i] as number) - im)
      if (here < distance) {
        distance = here
        best = i
      }
    }
    return best
  }
  const upper = nearest(omega, -1)
  const lower = nearest(-omega, upper)
  const keep = (_: number, i: number): boolean => i !== upper && i !== lower
  return { n: s.n - 2, re: s.re.filter(keep), im: s.im.filter(keep), size: s.size }
}
