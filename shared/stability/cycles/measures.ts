import { basisAt, basisSlopeAt, degree, nodes } from '#shared/numerics/gauss-collocation.ts'
import { type Frame, observedAt } from '../frame.ts'
import type { Cycle, Direction } from './cycle.ts'

/** Extremes of the observed quantity over a cycle, in its own unit. */
export interface Measures {
  readonly min: number
  readonly max: number
  /** Half the peak-to-peak. */
  readonly amplitude: number
  /** Rate of change of the amplitude along a direction, where one was given. */
  readonly amplitudeRate: number
}

/** Each interval is looked at in this many pieces for its highest and lowest point. */
const pieces = 8

/**
 * Highest and lowest value of the observed state or helper over the cycle, from the polynomial's own extremum (the best
 * sample, then the zero of the slope by regula falsi), not from mesh points. The rate along `tangent` is that of both
 * extremes where they stand (their own motion has no first-order effect).
 */
export function measure(frame: Frame, cycle: Cycle, tangent: Direction | null): Measures {
  const { n } = frame
  const { mesh, u, p } = cycle
  const z = new Float64Array(n + 1)
  z[n] = p
  const basis = new Float64Array(nodes)
  const slopes = new Float64Array(nodes)
  const place = (j: number, s: number): number => {
    basisAt(s, basis)
    for (let i = 0; i < n; i++) {
      let sum = 0
      for (let k = 0; k < nodes; k++) sum += (basis[k] as number) * (u[(j * degree + k) * n + i] as number)
      z[i] = sum
    }
    return observedAt(frame, z)
  }
  const slopeAt = (j: number, s: number): number => {
    place(j, s)
    basisSlopeAt(s, slopes)
    let rate = 0
    for (let i = 0; i < n; i++) {
      let sum = 0
      for (let k = 0; k < nodes; k++) sum += (slopes[k] as number) * (u[(j * degree + k) * n + i] as number)
      rate += (frame.gradient[i] as number) * (frame.unit[i] as number) * sum
    }
    return rate
  }
  const count = mesh.length - 1
  const best = [1, -1].map((sign) => ({ sign, value: Number.NEGATIVE_INFINITY, j: 0, s: 0 }))
  for (let j = 0; j < count; j++) {
    for (let k = 0; k < pieces; k++) {
      const value = place(j, k / pieces)
      for (const each of best) {
        if (each.sign * value > each.value) {
          each.value = each.sign * value
          each.j = j
          each.s = k / pieces
        }
      }
    }
  }
  let rate = 0
  const [max, min] = best.map(({ sign, value, j, s }) => {
    let top = { j, s, value }
    // the extremum lies within a piece to either side; the piece before may belong to the interval before
    const sides: [number, number, number][] = [
      [j, s, s + 1 / pieces],
      s > 0 ? [j, s - 1 / pieces, s] : [j === 0 ? count - 1 : j - 1, 1 - 1 / pieces, 1],
    ]
    for (const [at, from, to] of sides) {
      const root = zeroOf((where) => sign * slopeAt(at, where), from, to)
      if (root === null) continue
      const there = sign * place(at, root)
      if (there > top.value) top = { j: at, s: root, value: there }
    }
    if (tangent) {
      place(top.j, top.s)
      const gradient = frame.gradient.slice()
      let sum = 0
      for (let i = 0; i < n; i++) {
        let part = 0
        for (let k = 0; k < nodes; k++) {
          part += (basis[k] as number) * (tangent.u[(top.j * degree + k) * n + i] as number)
        }
        sum += (gradient[i] as number) * (frame.unit[i] as number) * part
      }
      rate += (sign * sum) / 2
    }
    return sign * top.value
  })
  const high = max as number
  const low = min as number
  return { min: low, max: high, amplitude: (high - low) / 2, amplitudeRate: rate }
}

/** A falling zero of g in [a, b], or null where g does not fall through zero there. */
function zeroOf(g: (s: number) => number, a: number, b: number): number | null {
  let low = a
  let high = b
  let atLow = g(low)
  let atHigh = g(high)
  if (!(atLow >= 0 && atHigh <= 0) || atLow === atHigh) return null
  let last: 'low' | 'high' | null = null
  for (let pass = 0; pass < 12; pass++) {
    // Illinois rule: the end that stays twice in a row is halved
    const s = low + ((high - low) * atLow) / (atLow - atHigh)
    const value = g(s)
    if (Math.abs(high - low) < 1e-9 || value === 0) return s
    const side = value > 0 ? 'low' : 'high'
    if (side === 'low') {
      low = s
      atLow = value
      if (last === side) atHigh /= 2
    } else {
      high = s
      atHigh = value
      if (last === side) atLow /= 2
    }
    last = side
  }
  return (low + high) / 2
}
