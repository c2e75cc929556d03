import type { Sample } from './corrector.ts'
import type { Spectrum } from './spectrum.ts'

/**
 * One eigenvalue followed from a sample to the next. Of a conjugate pair only the member with im > 0 is followed.
 * `steady` says that the pairing is beyond doubt: it moves little against its distance from all others.
 */
export interface Track {
  readonly from: { re: number; im: number }
  readonly to: { re: number; im: number }
  readonly steady: boolean
  /** How far it may have moved: along the real axis where the pairing is sure, else in the plane. */
  readonly move: number
}

/** Eigenvalues this close, relative to their size, are one of higher multiplicity. */
const together = 1e-7

function distanceOf(a: Spectrum, i: number, b: Spectrum, j: number): number {
  return Math.hypot((a.re[i] as number) - (b.re[j] as number), (a.im[i] as number) - (b.im[j] as number))
}

/** Pairs eigenvalues of two neighbouring samples, nearest first; entry i is the partner in b of eigenvalue i of a. */
export function pairEigenvalues(a: Spectrum, b: Spectrum): Int32Array {
  const { n } = a
  const partner = new Int32Array(n).fill(-1)
  const taken = new Uint8Array(n)
  const order: { i: number; j: number; distance: number }[] = []
  for (let i = 0; i < n; i++) for (let j = 0; j < n; j++) order.push({ i, j, distance: distanceOf(a, i, b, j) })
  order.sort((left, right) => left.distance - right.distance || left.i - right.i || left.j - right.j)
  for (const { i, j } of order) {
    if (partner[i] !== -1 || taken[j]) continue
    partner[i] = j
    taken[j] = 1
  }
  return partner
}

/** Distance of eigenvalue i to the nearest other one that is not the same eigenvalue of higher multiplicity. */
function gapOf(s: Spectrum, i: number): number {
  const own = together * Math.hypot(s.re[i] as number, s.im[i] as number)
  let gap = Number.POSITIVE_INFINITY
  for (let j = 0; j < s.n; j++) {
    if (j === i) continue
    const distance = distanceOf(s, i, s, j)
    if (distance > own && distance < gap) gap = distance
  }
  return gap
}

/** Tracks of all eigenvalues that are complex (im > 0) in at least one of the two samples. */
export function tracksBetween(a: Sample, b: Sample): Track[] {
  const tracks: Track[] = []
  const partner = pairEigenvalues(a.spectrum, b.spectrum)
  for (let i = 0; i < a.spectrum.n; i++) {
    const j = partner[i] as number
    const from = { re: a.spectrum.re[i] as number, im: a.spectrum.im[i] as number }
    const to = { re: b.spectrum.re[j] as number, im: b.spectrum.im[j] as number }
    if (from.im < 0 || to.im < 0 || (from.im === 0 && to.im === 0)) continue
    const move = Math.hypot(to.re - from.re, to.im - from.im)
    const gap = Math.min(gapOf(a.spectrum, i), gapOf(b.spectrum, j))
    const steady = from.im > 0 && to.im > 0 && move < 0.3 * gap
    tracks.push({ from, to, steady, move: steady ? Math.abs(to.re - from.re) : move })
  }
  return tracks
}

/**
 * A bound for how far any eigenvalue moved between two samples, without pairing: both lists are sorted alike, and the
 * best pairing moves no more than this one.
 */
export function movement(a: Spectrum, b: Spectrum): number {
  let largest = 0
  for (let i = 0; i < a.n; i++) largest = Math.max(largest, distanceOf(a, i, b, i))
  return largest
}

/**
 * Smallest distance from the imaginary axis of an eigenvalue that is one of a pair or may become one (a real one that
 * has another real one beside it); Infinity where there is none.
 */
export function nearestToAxis(s: Spectrum): number {
  let nearest = Number.POSITIVE_INFINITY
  let reals = 0
  for (let i = 0; i < s.n; i++) if (s.im[i] === 0) reals++
  for (let i = 0; i < s.n; i++) {
    if (s.im[i] !== 0 || reals > 1) nearest = Math.min(nearest, Math.abs(s.re[i] as number))
  }
  return nearest
}

/** True where two real eigenvalues near zero may have met, become a pair and crossed between two samples. */
export function mayMerge(a: Spectrum, b: Spectrum): boolean {
  let before = Number.NaN
  let move = 0
  let previous = 0
  const partner = pairEigenvalues(a, b)
  for (let i = 0; i < a.n; i++) {
    const j = partner[i] as number
    if (a.im[i] !== 0 || b.im[j] !== 0) continue
    const re = a.re[i] as number
    move = Math.abs((b.re[j] as number) - re)
    const reach = 1.5 * (move + previous)
    if (before - re <= reach && Math.min(Math.abs(re), Math.abs(before)) <= reach) return true
    before = re
    previous = move
  }
  return false
}

/** Index of the eigenvalue with im > 0 nearest to the given one; -1 where all are real. */
export function nearestPair(s: Spectrum, re: number, im: number): number {
  let best = -1
  let distance = Number.POSITIVE_INFINITY
  for (let i = 0; i < s.n; i++) {
    if (!((s.im[i] as number) > 0)) continue
    const here = Math.hypot((s.re[i] as number) - re, (s.im[i] as number) - im)
    if (here < distance) {
      distance = here
      best = i
    }
  }
  return best
}
