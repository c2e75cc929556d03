/**
 * Interval Newton steps for square systems F(x) = 0: contraction by the preconditioned Gauss-Seidel step of Hansen &
 * Sengupta, a test that F is one-to-one on a box, and Krawczyk's proof that a box holds exactly one zero.
 *
 * Preconditioned matrices are kept as midpoint and radius; their rounding is bounded by gamma = (n + 4) 2^-52 times the
 * sum of the absolute values, twice the classical bound for sums of n products (Higham, Accuracy and Stability of
 * Numerical Algorithms, section 3.1). Source of the methods: Neumaier, Interval Methods for Systems of Equations,
 * chapters 4 and 5.
 */

import { createLu, factorInPlace, invertLu, type Lu } from './linear-solve.ts'

/** Enclosures of F and of its Jacobian (row-major) over a box; both write lower and upper bounds. */
export interface IntervalSystem {
  readonly n: number
  value(xlo: Float64Array, xhi: Float64Array, outLo: Float64Array, outHi: Float64Array): void
  jacobian(xlo: Float64Array, xhi: Float64Array, outLo: Float64Array, outHi: Float64Array): void
  /** True where F and J are defined and F is continuous on the whole box. */
  isDefined(xlo: Float64Array, xhi: Float64Array): boolean
}

/** Work arrays for systems of n unknowns; what they hold belongs to the last call. */
export interface NewtonWorkspace {
  readonly n: number
  readonly lu: Lu
  readonly jlo: Float64Array
  readonly jhi: Float64Array
  readonly radius: Float64Array
  /** Preconditioner: approximate inverse of the midpoint Jacobian. */
  readonly inverse: Float64Array
  /** Preconditioned Jacobian, midpoint and radius. */
  readonly middle: Float64Array
  readonly spread: Float64Array
  readonly center: Float64Array
  readonly flo: Float64Array
  readonly fhi: Float64Array
  readonly dlo: Float64Array
  readonly dhi: Float64Array
  readonly klo: Float64Array
  readonly khi: Float64Array
}

/** Makes work arrays for n unknowns. */
export function createNewton(n: number): NewtonWorkspace {
  const vector = (): Float64Array => new Float64Array(n)
  const matrix = (): Float64Array => new Float64Array(n * n)
  return {
    n,
    lu: createLu(n),
    jlo: matrix(),
    jhi: matrix(),
    radius: matrix(),
    inverse: matrix(),
    middle: matrix(),
    spread: matrix(),
    center: vector(),
    flo: vector(),
    fhi: vector(),
    dlo: vector(),
    dhi: vector(),
    klo: vector(),
    khi: vector(),
  }
}

/**
 * Encloses the Jacobian over the box and preconditions it. False where an entry is unbounded or the midpoint matrix is
 * singular: the steps below say nothing then.
 */
export function linearise(ws: NewtonWorkspace, system: IntervalSystem, xlo: Float64Array, xhi: Float64Array): boolean {
  const { n, lu, jlo, jhi, radius, inverse, middle, spread } = ws
  system.jacobian(xlo, xhi, jlo, jhi)
  for (let k = 0; k < n * n; k++) {
    const low = jlo[k] as number
    const high = jhi[k] as number
    const mid = low + 0.5 * (high - low)
    const rad = Math.max(high - mid, mid - low) * (1 + 2 ** -50) + 1e-320
    if (!(rad < 1e300)) return false
    lu.lu[k] = mid
    radius[k] = low === high ? 0 : rad
    // jlo keeps the midpoints from here on.
    jlo[k] = mid
  }
  if (!factorInPlace(lu)) return false
  invertLu(lu, inverse)
  const gamma = (n + 4) * 2 ** -52
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      let sum = 0
      let size = 0
      let spreadSum = 0
      for (let k = 0; k < n; k++) {
        const y = inverse[i * n + k] as number
        if (y === 0) continue
        const product = y * (jlo[k * n + j] as number)
        sum += product
        size += Math.abs(product)
        spreadSum += Math.abs(y) * (radius[k * n + j] as number)
      }
      middle[i * n + j] = sum
      spread[i * n + j] = (spreadSum + gamma * (size + spreadSum)) * (1 + 2 ** -50) + 1e-300
    }
  }
  for (const value of inverse) if (!Number.isFinite(value)) return false
  return true
}

/** After `linearise`: is F one-to-one on that box (norm of 1 - Y J below one in the box's own scale)? */
export function isInjective(ws: NewtonWorkspace, xlo: Float64Array, xhi: Float64Array): boolean {
  const { n, middle, spread } = ws
  for (let i = 0; i < n; i++) {
    let sum = 0
    for (let j = 0; j < n; j++) {
      const deviation = Math.abs((i === j ? 1 : 0) - (middle[i * n + j] as number)) + (spread[i * n + j] as number)
      sum += deviation * Math.max((xhi[j] as number) - (xlo[j] as number), 1e-300)
    }
    if (!(sum < 0.999 * Math.max((xhi[i] as number) - (xlo[i] as number), 1e-300))) return false
  }
  return true
}

/** Y F(c) as an enclosure in (klo, khi). False where F is unbounded there. */
function residual(ws: NewtonWorkspace, system: IntervalSystem): boolean {
  const { n, center, flo, fhi, inverse, klo, khi } = ws
  system.value(center, center, flo, fhi)
  const gamma = (n + 4) * 2 ** -52
  for (let i = 0; i < n; i++) {
    let mid = 0
    let rad = 0
    let size = 0
    for (let k = 0; k < n; k++) {
      const low = flo[k] as number
      const high = fhi[k] as number
      const m = low + 0.5 * (high - low)
      const r = Math.max(high - m, m - low) * (1 + 2 ** -50)
      if (!(r < 1e300)) return false
      const y = inverse[i * n + k] as number
      mid += y * m
      size += Math.abs(y * m)
      rad += Math.abs(y) * r
    }
    const slack = (rad + gamma * (size + rad)) * (1 + 2 ** -50) + 1e-300
    klo[i] = mid - slack
    khi[i] = mid + slack
  }
  return true
}

/**
 * After `linearise` on the same box: one Gauss-Seidel sweep around the point `center` (inside the box), shrinking the
 * box in place. Returns false where it is proved that the box holds no zero.
 */
export function sweep(
  ws: NewtonWorkspace,
  system: IntervalSystem,
  center: Float64Array,
  xlo: Float64Array,
  xhi: Float64Array,
): boolean {
  const { n, middle, spread, dlo, dhi, klo, khi } = ws
  for (let j = 0; j < n; j++) {
    ws.center[j] = center[j] as number
    dlo[j] = ((xlo[j] as number) - (center[j] as number)) * (1 + 2 ** -50)
    dhi[j] = ((xhi[j] as number) - (center[j] as number)) * (1 + 2 ** -50)
  }
  if (!residual(ws, system)) return true
  const gamma = (n + 6) * 2 ** -52
  for (let i = 0; i < n; i++) {
    const diagonal = middle[i * n + i] as number
    const half = spread[i * n + i] as number
    if (Math.abs(diagonal) <= half) continue
    let low = klo[i] as number
    let high = khi[i] as number
    let size = Math.max(Math.abs(low), Math.abs(high))
    for (let j = 0; j < n; j++) {
      if (j === i) continue
      const m = middle[i * n + j] as number
      const s = spread[i * n + j] as number
      const a = dlo[j] as number
      const b = dhi[j] as number
      const wide = Math.max(Math.abs(a), Math.abs(b))
      const reach = s * wide
      low += (m > 0 ? m * a : m * b) - reach
      high += (m > 0 ? m * b : m * a) + reach
      size += (Math.abs(m) + s) * wide
    }
    const slack = gamma * size + 1e-300
    // Divide [-high, -low] by the diagonal.
    const top = -low + slack
    const bottom = -high - slack
    const small = Math.abs(diagonal) - half
    const large = Math.abs(diagonal) + half
    let from = bottom > 0 ? bottom / large : bottom / small
    let to = top < 0 ? top / large : top / small
    if (diagonal < 0) {
      const t = from
      from = -to
      to = -t
    }
    from -= Math.abs(from) * 2 ** -50 + 1e-300
    to += Math.abs(to) * 2 ** -50 + 1e-300
    if (from > (dhi[i] as number) || to < (dlo[i] as number)) return false
    if (from > (dlo[i] as number)) {
      dlo[i] = from
      xlo[i] = Math.max(xlo[i] as number, roundDown((center[i] as number) + from, center[i] as number, from))
    }
    if (to < (dhi[i] as number)) {
      dhi[i] = to
      xhi[i] = Math.min(xhi[i] as number, roundUp((center[i] as number) + to, center[i] as number, to))
    }
    if ((xlo[i] as number) > (xhi[i] as number)) return false
  }
  return true
}

function roundDown(sum: number, a: number, b: number): number {
  return sum - (Math.abs(a) + Math.abs(b)) * 2 ** -52
}

function roundUp(sum: number, a: number, b: number): number {
  return sum + (Math.abs(a) + Math.abs(b)) * 2 ** -52
}

/**
 * Krawczyk's test on the box around `center`: true proves that the box holds exactly one zero of F (F must be defined
 * on all of it, which is tested too). Makes its own linearisation.
 */
export function provesZero(
  ws: NewtonWorkspace,
  system: IntervalSystem,
  center: Float64Array,
  xlo: Float64Array,
  xhi: Float64Array,
): boolean {
  const { n, middle, spread, klo, khi } = ws
  if (!system.isDefined(xlo, xhi) || !linearise(ws, system, xlo, xhi)) return false
  ws.center.set(center)
  if (!residual(ws, system)) return false
  for (let i = 0; i < n; i++) {
    let reach = 0
    for (let j = 0; j < n; j++) {
      const wide = Math.max((xhi[j] as number) - (center[j] as number), (center[j] as number) - (xlo[j] as number))
      reach += (Math.abs((i === j ? 1 : 0) - (middle[i * n + j] as number)) + (spread[i * n + j] as number)) * wide
    }
    reach *= 1 + (n + 6) * 2 ** -51
    const c = center[i] as number
    const low = c - (khi[i] as number) - reach
    const high = c - (klo[i] as number) + reach
    const slack = (Math.abs(c) + Math.abs(klo[i] as number) + Math.abs(khi[i] as number) + reach) * 2 ** -50 + 1e-300
    if (!(low - slack > (xlo[i] as number) && high + slack < (xhi[i] as number))) return false
  }
  return true
}

/**
 * ε-inflation: grows a box around an approximate zero until Krawczyk's test succeeds. `scale` is the size of each
 * unknown; the first box is `start` times it, each further one ten times the last, up to `end`. Returns the relative
 * radius that was proved, or null. The box is left in (outLo, outHi).
 */
export function proveNear(
  ws: NewtonWorkspace,
  system: IntervalSystem,
  zero: Float64Array,
  scale: Float64Array,
  outLo: Float64Array,
  outHi: Float64Array,
  start = 1e-13,
  end = 1e-5,
): number | null {
  const { n } = ws
  for (let relative = start; relative <= end; relative *= 10) {
    for (let j = 0; j < n; j++) {
      const r = relative * (scale[j] as number)
      outLo[j] = (zero[j] as number) - r
      outHi[j] = (zero[j] as number) + r
    }
    if (provesZero(ws, system, zero, outLo, outHi)) return relative
  }
  return null
}
