import { spectrumHere } from '../frame.ts'
import type { Spectrum } from '../spectrum.ts'
import { withoutPair } from '../verdict.ts'
import { linearisePlane, type Plane } from './plane.ts'

/** The eigenvalues beside the critical pair of an onset at z; null where they cannot be had. */
export function besidePair(plane: Plane, z: Float64Array, omega: number): Spectrum | null {
  const all = spectrumAt(plane, z)
  return all && withoutPair(all, omega)
}

/** The eigenvalues beside the zero one of a turning point at z. */
export function besideZero(plane: Plane, z: Float64Array): Spectrum | null {
  const all = spectrumAt(plane, z)
  if (!all) return null
  let zero = 0
  for (let i = 1; i < all.n; i++) if (modulus(all, i) < modulus(all, zero)) zero = i
  const keep = (_: number, i: number): boolean => i !== zero
  return { n: all.n - 1, re: all.re.filter(keep), im: all.im.filter(keep), size: all.size }
}

/** All eigenvalues at z. */
export function spectrumAt(plane: Plane, z: Float64Array): Spectrum | null {
  // eigenvalues cost as much as this many evaluations, roughly: counted, so that a request to stop is heard in time
  plane.frame.budget.spend(plane.n)
  return linearisePlane(plane, z) ? spectrumHere(plane.frame) : null
}

function modulus({ re, im }: Spectrum, i: number): number {
  return Math.hypot(re[i] as number, im[i] as number)
}

/** The sign of the product of all eigenvalues times the smallest real one: zero where a real eigenvalue is. */
export function realTest(rest: Spectrum): number {
  let sign = 1
  let smallest = rest.size
  for (let i = 0; i < rest.n; i++) {
    if (rest.im[i] !== 0) continue
    if ((rest.re[i] as number) < 0) sign = -sign
    smallest = Math.min(smallest, Math.abs(rest.re[i] as number))
  }
  return sign * smallest
}

/**
 * The sign of the product of all sums of two eigenvalues times the smallest sum: zero where a pair is on the axis, and
 * where two real ones are opposite (which `pairOnAxis` tells apart). Source: Govaerts, section 4.4 (bialternate product).
 */
export function pairTest(rest: Spectrum): number {
  let sign = 1
  let smallest = 2 * rest.size
  for (let i = 0; i < rest.n; i++) {
    for (let j = i + 1; j < rest.n; j++) {
      const conjugate = rest.im[i] !== 0 && rest.im[j] === -(rest.im[i] as number) && rest.re[i] === rest.re[j]
      const real = rest.im[i] === 0 && rest.im[j] === 0
      if (!conjugate && !real) continue
      const sum = (rest.re[i] as number) + (rest.re[j] as number)
      if (sum < 0) sign = -sign
      smallest = Math.min(smallest, Math.abs(sum))
    }
  }
  return sign * smallest
}

/** Angular frequency of the pair that stands on the axis at a zero of `pairTest`; null where none does. */
export function pairOnAxis(rest: Spectrum): number | null {
  let omega: number | null = null
  for (let i = 0; i < rest.n; i++) {
    const im = rest.im[i] as number
    if (im > 0 && Math.abs(rest.re[i] as number) <= 1e-6 * im) omega = im
  }
  return omega
}
