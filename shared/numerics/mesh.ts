/**
 * Meshes of [0, 1] for periodic piecewise polynomials of degree four: choice of the intervals by equidistribution of the
 * local error, and transfer from one mesh to another.
 *
 * Values are stored node by node: `(4 N + 1) n` entries, node k of interval j at `(4 j + k) n`; the last node repeats
 * the first.
 * Source: Ascher, Mattheij & Russell 1995, section 9.1.1 (de Boor's estimate of the next derivative, equidistribution).
 */
import { basisAt, degree, fourthDerivative, nodes } from './gauss-collocation.ts'

/** A uniform mesh of `count` intervals. */
export function uniformMesh(count: number): Float64Array {
  return Float64Array.from({ length: count + 1 }, (_, j) => j / count)
}

/**
 * Density of intervals wanted: the fifth root of the fifth derivative's size on each interval, in units of the largest
 * size of the values. Its integral over [0, 1] is `total`: with N equidistributed intervals the interpolation error of
 * each, as a share of the values' size, is about 3e-5 (total / N)^5.
 */
export function errorDensity(mesh: Float64Array, u: Float64Array, n: number): { density: Float64Array; total: number } {
  const count = mesh.length - 1
  const density = new Float64Array(count)
  const jump = new Float64Array(count)
  let size = 0
  for (let i = 0; i < n; i++) {
    let low = Number.POSITIVE_INFINITY
    let high = Number.NEGATIVE_INFINITY
    for (let k = i; k < u.length; k += n) {
      low = Math.min(low, u[k] as number)
      high = Math.max(high, u[k] as number)
    }
    size = Math.max(size, (high - low) / 2)
  }
  if (size === 0) return { density: density.fill(1), total: 1 }
  // jump[j]: size of the fifth derivative across node j, from the fourth on both sides (periodic)
  for (let j = 0; j < count; j++) {
    const before = j === 0 ? count - 1 : j - 1
    const distance = (lengthOf(mesh, before) + lengthOf(mesh, j)) / 2
    let largest = 0
    for (let i = 0; i < n; i++) {
      const change = fourth(mesh, u, n, j, i) - fourth(mesh, u, n, before, i)
      largest = Math.max(largest, Math.abs(change) / distance)
    }
    jump[j] = largest / size
  }
  let total = 0
  for (let j = 0; j < count; j++) {
    const mean = ((jump[j] as number) + (jump[(j + 1) % count] as number)) / 2
    density[j] = mean ** (1 / nodes)
    total += (density[j] as number) * lengthOf(mesh, j)
  }
  return { density, total }
}

function lengthOf(mesh: Float64Array, j: number): number {
  return (mesh[j + 1] as number) - (mesh[j] as number)
}

function fourth(mesh: Float64Array, u: Float64Array, n: number, j: number, i: number): number {
  let sum = 0
  for (let k = 0; k < nodes; k++) sum += (fourthDerivative[k] as number) * (u[(j * degree + k) * n + i] as number)
  return sum / lengthOf(mesh, j) ** degree
}

/** A mesh of `count` intervals with equal shares of the density, which is lifted to a fifth of its mean for safety. */
export function equidistributed(mesh: Float64Array, density: Float64Array, total: number, count: number): Float64Array {
  const floor = total > 0 ? total / 5 : 1
  const old = mesh.length - 1
  const integral = new Float64Array(old + 1)
  for (let j = 0; j < old; j++) {
    integral[j + 1] = (integral[j] as number) + ((density[j] as number) + floor) * lengthOf(mesh, j)
  }
  const whole = integral[old] as number
  const out = new Float64Array(count + 1)
  let j = 0
  for (let k = 1; k < count; k++) {
    const target = (whole * k) / count
    while (j < old - 1 && (integral[j + 1] as number) < target) j++
    const share = (target - (integral[j] as number)) / ((integral[j + 1] as number) - (integral[j] as number))
    out[k] = (mesh[j] as number) + share * lengthOf(mesh, j)
  }
  out[count] = 1
  return out
}

/** The values at all nodes of `to` of the piecewise polynomial with values `u` on `from`. */
export function transfer(from: Float64Array, u: Float64Array, n: number, to: Float64Array): Float64Array {
  const count = to.length - 1
  const out = new Float64Array((count * degree + 1) * n)
  const last = from.length - 2
  const basis = new Float64Array(nodes)
  let j = 0
  for (let k = 0; k < count * degree; k++) {
    const interval = Math.floor(k / degree)
    const t = (to[interval] as number) + ((k % degree) / degree) * lengthOf(to, interval)
    while (j < last && t > (from[j + 1] as number)) j++
    basisAt((t - (from[j] as number)) / lengthOf(from, j), basis)
    for (let i = 0; i < n; i++) {
      let sum = 0
      for (let l = 0; l < nodes; l++) sum += (basis[l] as number) * (u[(j * degree + l) * n + i] as number)
      out[k * n + i] = sum
    }
  }
  for (let i = 0; i < n; i++) out[count * degree * n + i] = out[i] as number
  return out
}

/** The value at time `t` in [0, 1] into `out` (n entries). */
export function valueAt(mesh: Float64Array, u: Float64Array, n: number, t: number, out: Float64Array): void {
  let j = 0
  let high = mesh.length - 2
  while (j < high) {
    const middle = (j + high + 1) >> 1
    if ((mesh[middle] as number) <= t) j = middle
    else high = middle - 1
  }
  const basis = new Float64Array(nodes)
  basisAt((t - (mesh[j] as number)) / lengthOf(mesh, j), basis)
  for (let i = 0; i < n; i++) {
    let sum = 0
    for (let l = 0; l < nodes; l++) sum += (basis[l] as number) * (u[(j * degree + l) * n + i] as number)
    out[i] = sum
  }
}
