import { createEigenvectors, eigenvectors } from '#shared/numerics/eigenvectors.ts'
import { isBetween, type Sample, sampleBetween } from './corrector.ts'
import { mayMerge, movement, nearestPair, nearestToAxis, type Track, tracksBetween } from './eigenvalue-tracks.ts'
import type { Forms } from './forms.ts'
import { distance, type Frame, inside, linearise } from './frame.ts'
import { type LocatedHopf, refineHopf, scaledJacobian } from './hopf-point.ts'

/** A Hopf point on one branch: where it lies in the branch's list of samples, and between which neighbours. */
export interface BranchHopf extends LocatedHopf {
  /** It lies between samples `segment` and `segment + 1`. */
  readonly segment: number
  /** Real part just before and just after it, in the order of the samples. */
  readonly before: number
  readonly after: number
}

interface Bracket {
  readonly a: Sample
  readonly b: Sample
  readonly track: Track
}

const epsilon = 2 ** -52

/** Subdivisions of one step: a 96th of the range over 2^36 is below rounding. */
const deepest = 36

/**
 * Every Hopf point on a branch, given as neighbouring samples.
 *
 * Test function: the real part of each complex eigenvalue, followed from sample to sample. A step is looked at more
 * closely (its middle is computed, both halves are judged alike) as long as a complex eigenvalue may have reached the
 * axis within it: it is no further away than it and its neighbours move there. So a real pair ±a is no candidate, two
 * pairs that cross together are two, a rise and fall through zero between samples is met on the way down to its top,
 * and slow pairs beside fast eigenvalues are judged by their own motion. A candidate counts where the real part has
 * opposite signs, beyond rounding, on both sides along the branch: a centre all along the branch never does, nor does
 * an eigenvalue that only touches the axis.
 * Compare Govaerts, Numerical Methods for Bifurcations of Dynamical Equilibria, section 4.4 (test functions).
 *
 * @param closedStart, closedEnd  the branch ends there at a bound of range or box: a point on the bound is in.
 */
export function findHopfPoints(
  frame: Frame,
  forms: Forms,
  samples: readonly Sample[],
  closedStart: boolean,
  closedEnd: boolean,
): BranchHopf[] {
  const found: BranchHopf[] = []
  const moves: number[] = []
  for (let i = 0; i + 1 < samples.length; i++) {
    moves.push(movement((samples[i] as Sample).spectrum, (samples[i + 1] as Sample).spectrum))
  }
  for (let i = 0; i + 1 < samples.length; i++) {
    const a = samples[i] as Sample
    const b = samples[i + 1] as Sample
    const reach = Math.max(moves[i - 1] ?? 0, moves[i] as number, moves[i + 1] ?? 0)
    if (Math.min(nearestToAxis(a.spectrum), nearestToAxis(b.spectrum)) > 2 * reach) continue
    if (frame.budget.spent()) break
    const brackets: Bracket[] = []
    scan(frame, a, b, neighbourMove(samples, i), 0, brackets)
    for (const bracket of brackets) {
      const located = locate(frame, forms, bracket)
      if (!located) continue
      const sides = sidesOf(frame, samples, i, bracket, located)
      if (sides) add(frame, found, { ...located, segment: i, ...sides })
    }
  }
  if (closedStart) atBound(frame, forms, samples, 0, found)
  if (closedEnd) atBound(frame, forms, samples, samples.length - 1, found)
  return found.sort((left, right) => left.segment - right.segment)
}

/**
 * Adds a find unless it is known (same point within 1e-6 of range and box, same omega within 1e-6). Two that are one by
 * that measure but cross in opposite directions are a touch of the axis, and none.
 */
function add(frame: Frame, found: BranchHopf[], point: BranchHopf): void {
  if (!inside(frame, point.sample.z)) return
  const known = found.findIndex((other) => sameHopf(frame, other, point))
  const other = found[known]
  if (!other) found.push(point)
  else if (other.before > 0 !== point.before > 0) found.splice(known, 1)
}

/** True where two finds are one: every coordinate within 1e-6 of its width, omega within 1e-6. */
export function sameHopf(frame: Frame, a: LocatedHopf, b: LocatedHopf): boolean {
  if (Math.abs(a.omega - b.omega) > 1e-6 * Math.max(a.omega, b.omega)) return false
  return samePoint(frame, a.sample.z, b.sample.z)
}

/** True where two points agree in every coordinate within 1e-6 of the width of box or range. */
export function samePoint(frame: Frame, a: Float64Array, b: Float64Array): boolean {
  const root = Math.sqrt(frame.n)
  for (let i = 0; i <= frame.n; i++) {
    const widths = Math.abs((a[i] as number) - (b[i] as number)) * (i < frame.n ? root : 1)
    if (widths > 1e-6) return false
  }
  return true
}

/** Real motion of each track in the steps beside this one: a bend shows there before it shows in the step itself. */
function neighbourMove(samples: readonly Sample[], i: number): (track: Track) => number {
  const beside: Track[][] = []
  if (i > 0) beside.push(tracksBetween(samples[i - 1] as Sample, samples[i] as Sample))
  if (i + 2 < samples.length) beside.push(tracksBetween(samples[i + 1] as Sample, samples[i + 2] as Sample))
  return (track) => {
    let move = 0
    for (const tracks of beside) {
      let best: Track | null = null
      let closest = Number.POSITIVE_INFINITY
      for (const other of tracks) {
        const d = Math.min(
          Math.hypot(other.to.re - track.from.re, other.to.im - track.from.im),
          Math.hypot(other.from.re - track.to.re, other.from.im - track.to.im),
        )
        if (d < closest) {
          closest = d
          best = other
        }
      }
      if (best) move = Math.max(move, best.move)
    }
    return move
  }
}

/** Real parts that are rounding of an eigenvalue however well it is conditioned: nothing to look at more closely. */
function negligible(re: number, sample: Sample): boolean {
  return Math.abs(re) <= 4 * sample.spectrum.n * epsilon * sample.spectrum.size
}

function scan(
  frame: Frame,
  a: Sample,
  b: Sample,
  beside: (track: Track) => number,
  depth: number,
  out: Bracket[],
): void {
  const tracks = tracksBetween(a, b)
  const open: Track[] = []
  for (const track of tracks) {
    if (negligible(track.from.re, a) && negligible(track.to.re, b)) continue
    const reach = 1.5 * Math.max(track.move, beside(track))
    const crosses = track.from.re > 0 !== track.to.re > 0
    if (crosses || Math.min(Math.abs(track.from.re), Math.abs(track.to.re)) <= reach) open.push(track)
  }
  const merging = depth < 14 && mayMerge(a.spectrum, b.spectrum)
  if (open.length === 0 && !merging) return
  const half = depth < deepest && !frame.budget.spent() ? sampleBetween(frame, a, b, 0.5) : null
  const settled = depth >= 2 && !merging && open.every((track) => track.steady && track.from.re > 0 !== track.to.re > 0)
  if (!half || settled) {
    for (const track of open) {
      if (track.from.im > 0 && track.to.im > 0 && track.from.re > 0 !== track.to.re > 0) out.push({ a, b, track })
    }
    return
  }
  const left = tracksBetween(a, half)
  const right = tracksBetween(half, b)
  scan(frame, a, half, (track) => moveNear(right, track), depth + 1, out)
  scan(frame, half, b, (track) => moveNear(left, track), depth + 1, out)
}

/** Motion, in the other half, of the track that continues this one. */
function moveNear(tracks: readonly Track[], track: Track): number {
  let move = 0
  let closest = Number.POSITIVE_INFINITY
  for (const other of tracks) {
    const d = Math.min(
      Math.hypot(other.to.re - track.from.re, other.to.im - track.from.im),
      Math.hypot(other.from.re - track.to.re, other.from.im - track.to.im),
    )
    if (d < closest) {
      closest = d
      move = other.move
    }
  }
  return move
}

/** False position with halving (Illinois) down to Newton's reach, then Newton; Newton failing, false position to the end. */
function locate(frame: Frame, forms: Forms, { a, b, track }: Bracket): LocatedHopf | null {
  let low = 0
  let high = 1
  let valueLow = track.from.re
  let valueHigh = track.to.re
  let best: { sample: Sample; re: number; im: number } | null = null
  const length = distance(a.z, b.z)
  for (let pass = 0; pass < 60; pass++) {
    const s = valueLow === valueHigh ? (low + high) / 2 : low - (valueLow * (high - low)) / (valueHigh - valueLow)
    const sample = s <= 0 ? a : s >= 1 ? b : sampleBetween(frame, a, b, s)
    if (!sample) return null
    const re = track.from.re + s * (track.to.re - track.from.re)
    const im = track.from.im + s * (track.to.im - track.from.im)
    const index = nearestPair(sample.spectrum, re, im)
    if (index < 0) return null
    const here = { sample, re: sample.spectrum.re[index] as number, im: sample.spectrum.im[index] as number }
    if (!best || Math.abs(here.re) < Math.abs(best.re)) best = here
    if (pass === 1 || pass === 5 || pass === 10 || here.re === 0) {
      const refined = refineHopf(frame, forms, best.sample, best, 2 * length + 1e-9)
      if (refined && isBetween(refined.sample.z, a, b) && Math.abs(refined.omega - best.im) < 0.2 * best.im)
        return refined
    }
    if (here.re === 0) {
      low = s
      high = s
    }
    if (high - low < 1e-13) break
    if (here.re > 0 === valueLow > 0) {
      low = s
      valueLow = here.re
      valueHigh /= 2
    } else {
      high = s
      valueHigh = here.re
      valueLow /= 2
    }
  }
  if (!best || Math.abs(best.re) > 1e-8 * best.im) return null
  return { sample: best.sample, omega: best.im, error: Math.max(1e-12, (high - low) * length) }
}

/**
 * Real parts on both sides of a candidate, each the first beyond rounding when one goes along the branch; null where
 * there is none or both have one sign.
 */
function sidesOf(
  frame: Frame,
  samples: readonly Sample[],
  segment: number,
  bracket: Bracket,
  point: LocatedHopf,
): { before: number; after: number } | null {
  const before = firstBeyond(frame, [bracket.a, ...samples.slice(0, segment + 1).reverse()], point.omega)
  const after = firstBeyond(frame, [bracket.b, ...samples.slice(segment + 1)], point.omega)
  if (before === 0 || after === 0 || before > 0 === after > 0) return null
  return { before, after }
}

function firstBeyond(frame: Frame, chain: readonly Sample[], omega: number): number {
  let re = 0
  let im = omega
  for (const sample of chain) {
    const index = nearestPair(sample.spectrum, re, im)
    if (index < 0) return 0
    re = sample.spectrum.re[index] as number
    im = sample.spectrum.im[index] as number
    if (Math.abs(re) > noiseOfPair(frame, sample, index)) return re
  }
  return 0
}

/**
 * Rounding of a pair's real part: that of the matrix, times the condition of the eigenvalue. Where another eigenvalue is
 * close the two repel each other like the square root of a disturbance (a defective pair): then the root of it.
 */
function noiseOfPair(frame: Frame, sample: Sample, index: number): number {
  const { re, im, n, size } = sample.spectrum
  const modulus = Math.hypot(re[index] as number, im[index] as number)
  const rounding = epsilon * Math.max(32 * n * modulus, 2 * size)
  if (Math.abs(re[index] as number) > 1e-7 * modulus) return rounding
  if (!linearise(frame, sample.z)) return modulus
  const condition = eigenvectors(createEigenvectors(n), scaledJacobian(frame), re[index] as number, im[index] as number)
  let gap = modulus
  for (let j = 0; j < n; j++) {
    if (j === index) continue
    gap = Math.min(
      gap,
      Math.hypot((re[index] as number) - (re[j] as number), (im[index] as number) - (im[j] as number)),
    )
  }
  const defective = gap < 1e-3 * modulus ? Math.min(gap, Math.sqrt(rounding * modulus)) : 0
  return Math.max(rounding * Math.min(condition ?? 1, 1e6), defective)
}

/** A Hopf point on the bound where the branch ends: the pair is on the axis there, or as good as. */
function atBound(frame: Frame, forms: Forms, samples: readonly Sample[], end: number, found: BranchHopf[]): void {
  const inner = end === 0 ? 1 : end - 1
  const last = samples[end]
  const next = samples[inner]
  if (!last || !next) return
  const length = distance(last.z, next.z)
  for (const track of tracksBetween(last, next)) {
    if (!(track.from.im > 0)) continue
    const slope = Math.abs(track.to.re - track.from.re) / Math.max(length, 1e-12)
    const near = Math.abs(track.from.re) <= 1e-9 * track.from.im || Math.abs(track.from.re) <= 1e-8 * slope
    if (!near) continue
    const point = refineHopf(frame, forms, last, track.from, 1e-6)
    if (!point) continue
    const chain = end === 0 ? samples.slice(1) : samples.slice(0, -1).reverse()
    const side = firstBeyond(frame, chain, point.omega)
    if (side === 0) continue
    const sides = end === 0 ? { before: -side, after: side } : { before: side, after: -side }
    add(frame, found, { ...point, segment: Math.min(end, inner), ...sides })
  }
}
