import { createEigenvectors, eigenvectors } from '#shared/numerics/eigenvectors.ts'
import type { CurveSystem } from './curve.ts'
import { createPlaneForm, linearisePlane, type Plane, statesBlock } from './plane.ts'

/** The curve system of onsets: `rate` is the unit of omega (radians per time unit). */
export interface OnsetSystem extends CurveSystem {
  readonly kind: 'onset'
  readonly rate: number
  /** omega at y; zero where omega² has reached zero. */
  omega(y: Float64Array): number
}

/**
 * Onsets in the space of states and both controls:
 *
 *     F = 0,   A v = rate w,   A w = -rate kappa v,   <v, v> = 1,   <c, v> = 0,   omega² = rate² kappa
 *
 * in y = (z, v, w, kappa): A² v + omega² v = 0 without the square, which would cost digits in stiff models. Real, and
 * regular also at kappa = 0 (double zero), at vertical places and where another pair or a zero eigenvalue stands beside
 * the pair. `renew` turns v within its plane to where A v is longest and takes c along A v: then v is never the
 * null vector itself. Not for two pairs of one frequency.
 * Source: Roose & Hlavacek 1985; Govaerts, Numerical Methods for Bifurcations of Dynamical Equilibria, section 4.3.
 */
export function createOnsetSystem(plane: Plane, rate: number): OnsetSystem {
  const { n, width } = plane
  const size = 3 * n + 3
  const form = createPlaneForm(plane)
  const direction = new Float64Array(width)
  const second = new Float64Array(width)
  const unitVector = new Float64Array(width)
  const column = new Float64Array(n)
  const v0 = width
  const w0 = width + n

  function fill(y: Float64Array, c: Float64Array, residual: Float64Array, matrix: Float64Array): boolean {
    if (!linearisePlane(plane, y.subarray(0, width))) return false
    const { derivatives } = plane
    const kappa = y[size - 1] as number
    let norm = -1
    let across = 0
    for (let i = 0; i < n; i++) {
      const [vi, wi] = [y[v0 + i] as number, y[w0 + i] as number]
      let av = 0
      let aw = 0
      const rowV = (n + i) * size
      const rowW = (2 * n + i) * size
      for (let j = 0; j < width; j++) matrix[i * size + j] = derivatives[i * width + j] as number
      for (let j = 0; j < n; j++) {
        const entry = (derivatives[i * width + j] as number) / rate
        matrix[rowV + v0 + j] = entry
        matrix[rowW + w0 + j] = entry
        av += entry * (y[v0 + j] as number)
        aw += entry * (y[w0 + j] as number)
      }
      residual[i] = plane.frame.residual[i] as number
      residual[n + i] = av - wi
      residual[2 * n + i] = aw + kappa * vi
      matrix[rowV + w0 + i] = -1
      matrix[rowW + v0 + i] = kappa
      matrix[rowW + size - 1] = vi
      norm += vi * vi
      across += (c[i] as number) * vi
      matrix[3 * n * size + v0 + i] = 2 * vi
      matrix[(3 * n + 1) * size + v0 + i] = c[i] as number
    }
    residual[3 * n] = norm
    residual[3 * n + 1] = across
    direction.fill(0)
    second.fill(0)
    direction.set(y.subarray(v0, w0))
    second.set(y.subarray(w0, w0 + n))
    for (let j = 0; j < width; j++) {
      unitVector.fill(0)
      unitVector[j] = 1
      form(y, direction, unitVector, column)
      for (let i = 0; i < n; i++) matrix[(n + i) * size + j] = (column[i] as number) / rate
      form(y, second, unitVector, column)
      for (let i = 0; i < n; i++) matrix[(2 * n + i) * size + j] = (column[i] as number) / rate
    }
    return true
  }

  function renew(y: Float64Array): Float64Array | null {
    const v = y.slice(v0, w0)
    const w = y.slice(w0, w0 + n)
    const kappa = y[size - 1] as number
    // in the orthonormal basis e1 = v, e2 of the plane: w = a e1 + b e2, A e1 = a e1 + b e2, A e2 = (-kappa e1 - a w) / b
    const sizeV = Math.sqrt(v.reduce((sum, value) => sum + value * value, 0))
    if (!(sizeV > 0)) return null
    const e1 = v.map((value) => value / sizeV)
    const a = w.reduce((sum, value, i) => sum + value * (e1[i] as number), 0) / sizeV
    const rest = w.map((value, i) => value / sizeV - a * (e1[i] as number))
    const b = Math.sqrt(rest.reduce((sum, value) => sum + value * value, 0))
    if (!(b > 1e-12 * Math.max(1, Math.abs(a)))) return null
    const e2 = rest.map((value) => value / b)
    const [m11, m21] = [a, b]
    const [m12, m22] = [(-kappa - a * a) / b, -a]
    const angle = 0.5 * Math.atan2(2 * (m11 * m12 + m21 * m22), m11 * m11 + m21 * m21 - m12 * m12 - m22 * m22)
    let [cos, sin] = [Math.cos(angle), Math.sin(angle)]
    // the nearer of both signs: the vector then moves little from point to point
    if (cos < 0) [cos, sin] = [-cos, -sin]
    const [first, last] = [m11 * cos + m12 * sin, m21 * cos + m22 * sin]
    const long = Math.hypot(first, last)
    if (!(long > 0 && Number.isFinite(long))) return null
    const c = new Float64Array(n)
    for (let i = 0; i < n; i++) {
      y[v0 + i] = cos * (e1[i] as number) + sin * (e2[i] as number)
      const image = first * (e1[i] as number) + last * (e2[i] as number)
      y[w0 + i] = image
      c[i] = image / long
    }
    return c
  }

  const omega = (y: Float64Array): number => rate * Math.sqrt(Math.max(0, y[size - 1] as number))
  return { kind: 'onset', plane, size, floor: size - 1, rate, fill, renew, omega }
}

/** A system and its unknowns at an onset z with angular frequency omega; null where the pair is not simple. */
export function onsetAt(plane: Plane, z: Float64Array, omega: number): { system: OnsetSystem; y: Float64Array } | null {
  const { n, width } = plane
  if (!(omega > 0) || !linearisePlane(plane, z)) return null
  const vectors = createEigenvectors(n)
  if (eigenvectors(vectors, statesBlock(plane), 0, omega) === null) return null
  // A (u + i v) = i omega (u + i v): A u = -omega v, A v = omega u
  const size = Math.sqrt(vectors.qRe.reduce((sum, value) => sum + value * value, 0))
  if (!(size > 0)) return null
  const system = createOnsetSystem(plane, omega)
  const y = new Float64Array(system.size)
  y.set(z)
  for (let i = 0; i < n; i++) {
    y[width + i] = (vectors.qRe[i] as number) / size
    y[width + n + i] = -(vectors.qIm[i] as number) / size
  }
  y[system.size - 1] = 1
  return { system, y }
}

/** A system and its unknowns at a double zero: `generalised` is mapped by A onto the null vector. */
export function onsetAtDoubleZero(
  plane: Plane,
  z: Float64Array,
  generalised: Float64Array,
): { system: OnsetSystem; y: Float64Array } | null {
  const { n, width } = plane
  if (!linearisePlane(plane, z)) return null
  const size = Math.sqrt(generalised.reduce((sum, value) => sum + value * value, 0))
  const v = generalised.map((value) => value / size)
  const image = new Float64Array(n)
  for (let i = 0; i < n; i++)
    for (let j = 0; j < n; j++)
      image[i] = (image[i] as number) + (plane.derivatives[i * width + j] as number) * (v[j] as number)
  const rate = Math.sqrt(image.reduce((sum, value) => sum + value * value, 0))
  if (!(rate > 0 && Number.isFinite(rate))) return null
  const system = createOnsetSystem(plane, rate)
  const y = new Float64Array(system.size)
  y.set(z)
  y.set(v, width)
  y.set(
    image.map((value) => value / rate),
    width + n,
  )
  return { system, y }
}
