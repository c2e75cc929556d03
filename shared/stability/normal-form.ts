import { type Complex, innerProduct } from '#shared/numerics/complex.ts'
import { type ComplexLu, createComplexLu, factorShifted, solveComplexLu } from '#shared/numerics/complex-solve.ts'
import { createEigenvectors, eigenvectors } from '#shared/numerics/eigenvectors.ts'
import {
  createLu,
  factorBordered,
  factorLu,
  norm1,
  reciprocalCondition,
  solveLu,
} from '#shared/numerics/linear-solve.ts'
import type { Forms } from './forms.ts'
import { type Frame, linearise, observedAt } from './frame.ts'
import { type LocatedHopf, scaledJacobian } from './hopf-point.ts'
import { onAxis, type Spectrum } from './spectrum.ts'

/** A complex vector of n + 1 entries in scaled coordinates; the control's entry is 0. */
interface Direction {
  readonly re: Float64Array
  readonly im: Float64Array
}

/** Eigenvectors at a Hopf point, in scaled coordinates, and what the conventions of the card need of them. */
export interface CriticalPair {
  readonly omega: number
  /** A q = i omega q, <q, q> = 1 (scaled). */
  readonly q: Direction
  /** Aᵀ p = -i omega p, <p, q> = 1. */
  readonly pRe: Float64Array
  readonly pIm: Float64Array
  /** <q, q> in the model's own units, of the same q. */
  readonly size: number
  /** Component of q along the observed quantity, in its own unit. */
  readonly observed: Complex
  /** Largest part of it that any state could have: what `observed` is small against where it is silent. */
  readonly observedReach: number
  /** Half the observed range (of a helper: what the box allows to first order). */
  readonly halfRange: number
  readonly condition: number
  readonly jacobian: Float64Array
  /** Null vectors of A where a real eigenvalue is zero as well (zero-Hopf). */
  readonly zeroMode: ZeroMode | null
}

interface ZeroMode {
  readonly left: Float64Array
  readonly right: Float64Array
}

/** True where another eigenvalue lies so close to i omega that no single eigenvector is meant. */
function isRepeated(spectrum: Spectrum, omega: number): boolean {
  let close = 0
  for (let i = 0; i < spectrum.n; i++) {
    if (Math.hypot(spectrum.re[i] as number, (spectrum.im[i] as number) - omega) <= 1e-6 * omega) close++
  }
  return close > 1
}

/** Eigenvectors at a located Hopf point; null where the pair is not simple. */
export function criticalPair(frame: Frame, point: LocatedHopf): CriticalPair | null {
  const { n, unit, model } = frame
  if (isRepeated(point.sample.spectrum, point.omega) || !linearise(frame, point.sample.z)) return null
  const jacobian = scaledJacobian(frame)
  const vectors = createEigenvectors(n)
  const condition = eigenvectors(vectors, jacobian, 0, point.omega)
  if (condition === null || condition > 1e9) return null
  const re = new Float64Array(n + 1)
  const im = new Float64Array(n + 1)
  re.set(vectors.qRe)
  im.set(vectors.qIm)
  observedAt(frame, point.sample.z)
  const { gradient } = frame
  let size = 0
  let reach = 0
  let half = 0
  const observed = { re: 0, im: 0 }
  for (let i = 0; i < n; i++) {
    const u = (re[i] as number) * (unit[i] as number)
    const v = (im[i] as number) * (unit[i] as number)
    const slope = gradient[i] as number
    size += u * u + v * v
    observed.re += slope * u
    observed.im += slope * v
    reach += Math.abs(slope) * (unit[i] as number)
    half += (Math.abs(slope) * ((frame.boxHigh[i] as number) - (frame.boxLow[i] as number))) / 2
  }
  const { kind, index } = model.system.observed
  const state = kind === 'state' ? model.system.states[index] : undefined
  const halfRange = state ? (state.high - state.low) / 2 : half
  return {
    omega: point.omega,
    q: { re, im },
    pRe: vectors.pRe,
    pIm: vectors.pIm,
    size,
    observed,
    observedReach: reach,
    halfRange,
    condition,
    jacobian,
    zeroMode: zeroModeOf(point.sample.spectrum, jacobian),
  }
}

function zeroModeOf(spectrum: Spectrum, jacobian: Float64Array): ZeroMode | null {
  const zero = spectrum.im.findIndex((im, i) => im === 0 && onAxis(spectrum, i))
  if (zero < 0) return null
  const vectors = createEigenvectors(spectrum.n)
  if (eigenvectors(vectors, jacobian, spectrum.re[zero] as number, 0) === null) return null
  return { left: vectors.pRe.slice(), right: vectors.qRe.slice() }
}

/**
 * Rate of change of the critical eigenvalue along the branch: real part d = d Re lambda / dp (the crossing), imaginary
 * part how the frequency moves. Total derivative: the steady state moves with the control. Unit: 1 / (time * unit of p).
 *
 *     d lambda / ds = <p, (dA/ds) q>,   dA/ds q = D2(q, t),   dp/ds = t's component along the control
 *
 * Source: Horn & Johnson, Matrix Analysis (2nd ed.), Theorem 6.3.12; Lancaster 1964.
 */
export function eigenvalueRate(frame: Frame, forms: Forms, point: LocatedHopf, pair: CriticalPair): Complex {
  const { n, unit } = frame
  const { z, t } = point.sample
  const re = new Float64Array(n)
  const im = new Float64Array(n)
  // the first argument keeps its sign in both jets: what a kink adds along q drops out
  forms.bilinear(z, pair.q.re, t, re)
  forms.bilinear(z, pair.q.im, t, im)
  const along = innerProduct(pair.pRe, pair.pIm, re, im, n)
  const control = (t[n] as number) * (unit[n] as number)
  return { re: along.re / control, im: along.im / control }
}

/** c1 for the q of a critical pair, and the size of its rounding error. */
export interface CubicTerm {
  readonly c1: Complex
  readonly error: number
}

/**
 * c1 = 1/2 [ <p, C(q,q,q̄)> - 2 <p, B(q, A⁻¹ B(q,q̄))> + <p, B(q̄, (2iω I - A)⁻¹ B(q,q))> ]
 *
 * for the q of `pair` (scaled <q,q> = 1; the value is the same in every linear coordinate system for the same q). B and C
 * come from four real directional jets by polarisation. `error` sums the roundings of all terms, with the condition of
 * both solves, and what the error of the point itself moves. Null where A or 2iω I - A is singular (zero-Hopf, 1:2).
 * Source: Kuznetsov, Elements of Applied Bifurcation Theory (3rd ed.), section 5.4, the n-dimensional formula.
 */
export function cubicTerm(frame: Frame, forms: Forms, point: LocatedHopf, pair: CriticalPair): CubicTerm | null {
  const { z } = point.sample
  const main = evaluate(frame, forms, z, pair, pair.q, pair.pRe, pair.pIm)
  if (!main) return null
  // the same value from another phase of q: other jets, other roundings
  const turned = rotate(pair, 1)
  const second = evaluate(frame, forms, z, pair, turned.q, turned.pRe, turned.pIm)
  if (!second) return null
  // what a displacement of the point along the branch moves, per unit of scaled length
  const shift = 1e-6
  const moved = z.map((value, i) => value + shift * (point.sample.t[i] as number))
  const beside = evaluate(frame, forms, moved, pair, pair.q, pair.pRe, pair.pIm)
  const slope = beside ? Math.hypot(beside.c1.re - main.c1.re, beside.c1.im - main.c1.im) / shift : 0
  const spread = Math.hypot(second.c1.re - main.c1.re, second.c1.im - main.c1.im)
  const error = main.rounding + 2 * spread + slope * point.error
  return Number.isFinite(main.c1.re + main.c1.im + error) ? { c1: main.c1, error } : null
}

function rotate(pair: CriticalPair, angle: number): { q: Direction; pRe: Float64Array; pIm: Float64Array } {
  const c = Math.cos(angle)
  const s = Math.sin(angle)
  const turn = (re: Float64Array, im: Float64Array): Direction => ({
    re: re.map((value, i) => c * value - s * (im[i] as number)),
    im: re.map((value, i) => s * value + c * (im[i] as number)),
  })
  const q = turn(pair.q.re, pair.q.im)
  const p = turn(pair.pRe, pair.pIm)
  return { q, pRe: p.re, pIm: p.im }
}

interface Evaluation {
  readonly c1: Complex
  readonly rounding: number
}

function evaluate(
  frame: Frame,
  forms: Forms,
  z: Float64Array,
  pair: CriticalPair,
  q: Direction,
  pRe: Float64Array,
  pIm: Float64Array,
): Evaluation | null {
  const { n } = frame
  const { jacobian, omega } = pair
  const { bqqRe, bqqIm, bqqBar, cRe, cIm } = formsOfPair(frame, forms, z, q)
  const complexLu = createComplexLu(n)
  const solved = solveMean(jacobian, bqqBar, pair.zeroMode)
  if (!solved || !factorShifted(complexLu, jacobian, 0, 2 * omega, -1)) return null
  const mean = widened(solved.mean)
  const secondRe = widened(bqqRe)
  const secondIm = widened(bqqIm)
  solveOnFirst(complexLu, secondRe, secondIm, n)
  const bMean = bilinearWith(frame, forms, z, q, { re: mean, im: new Float64Array(n + 1) }, 1)
  const bSecond = bilinearWith(frame, forms, z, q, { re: secondRe, im: secondIm }, -1)
  const cubic = innerProduct(pRe, pIm, cRe, cIm, n)
  const first = innerProduct(pRe, pIm, bMean.re, bMean.im, n)
  const second = innerProduct(pRe, pIm, bSecond.re, bSecond.im, n)
  const c1 = { re: 0.5 * (cubic.re - 2 * first.re + second.re), im: 0.5 * (cubic.im - 2 * first.im + second.im) }
  const worst = 1 / Math.max(1e-16, solved.reciprocalCondition)
  const terms =
    weight(pRe, pIm, cRe, cIm) +
    2 * weight(pRe, pIm, bMean.re, bMean.im) * Math.min(worst, 1e8) +
    weight(pRe, pIm, bSecond.re, bSecond.im)
  return { c1, rounding: 4 * 2 ** -52 * pair.condition * terms }
}

/**
 * A⁻¹ b. Where A has a zero eigenvalue there is an answer only if b has no part along it (the mode of another branch that
 * the oscillation does not drive): then the bordered system gives the one without a part along it. Null otherwise: the
 * cubic coefficient is infinite there.
 */
function solveMean(
  jacobian: Float64Array,
  b: Float64Array,
  zeroMode: ZeroMode | null,
): { mean: Float64Array; reciprocalCondition: number } | null {
  const n = b.length
  if (!zeroMode) {
    const lu = createLu(n)
    if (!factorLu(lu, jacobian)) return null
    const mean = b.slice()
    solveLu(lu, mean)
    return { mean, reciprocalCondition: reciprocalCondition(lu, norm1(jacobian, n)) }
  }
  const { left, right } = zeroMode
  const lu = createLu(n + 1)
  if (!factorBordered(lu, jacobian, left, right, 0)) return null
  const solution = widened(b)
  solveLu(lu, solution)
  const size = (v: Float64Array): number => Math.sqrt(v.reduce((sum, value) => sum + value * value, 0))
  if (Math.abs(solution[n] as number) * size(left) > 1e-8 * size(b)) return null
  return { mean: solution.slice(0, n), reciprocalCondition: 1e-3 }
}

/** B(q,q), B(q,q̄) (real) and C(q,q,q̄) from jets along u, v, u + v and u - v, with q = u + iv. */
function formsOfPair(frame: Frame, forms: Forms, z: Float64Array, q: Direction) {
  const { n } = frame
  const make = () => new Float64Array(n)
  const jet = (direction: Float64Array) => {
    const second = make()
    const third = make()
    forms.quadraticAndCubic(z, direction, second, third)
    return { second, third }
  }
  const u = jet(q.re)
  const v = jet(q.im)
  const plus = jet(q.re.map((value, i) => value + (q.im[i] as number)))
  const minus = jet(q.re.map((value, i) => value - (q.im[i] as number)))
  const bqqRe = make()
  const bqqIm = make()
  const bqqBar = make()
  const cRe = make()
  const cIm = make()
  for (let i = 0; i < n; i++) {
    const [uu, vv] = [u.second[i] as number, v.second[i] as number]
    const [uuu, vvv] = [u.third[i] as number, v.third[i] as number]
    const [sum, difference] = [plus.third[i] as number, minus.third[i] as number]
    bqqRe[i] = uu - vv
    bqqIm[i] = ((plus.second[i] as number) - (minus.second[i] as number)) / 2
    bqqBar[i] = uu + vv
    const uvv = (sum + difference - 2 * uuu) / 6
    const uuv = (sum - difference - 2 * vvv) / 6
    cRe[i] = uuu + uvv
    cIm[i] = uuv + vvv
  }
  return { bqqRe, bqqIm, bqqBar, cRe, cIm }
}

/** B(q, h) for sign 1, B(q̄, h) for sign -1. */
function bilinearWith(
  frame: Frame,
  forms: Forms,
  z: Float64Array,
  q: Direction,
  h: Direction,
  sign: 1 | -1,
): Direction {
  const { n } = frame
  const part = (a: Float64Array, b: Float64Array): Float64Array => {
    const out = new Float64Array(n)
    forms.bilinear(z, a, b, out)
    return out
  }
  const rr = part(q.re, h.re)
  const ii = part(q.im, h.im)
  const ri = part(q.re, h.im)
  const ir = part(q.im, h.re)
  return {
    re: rr.map((value, i) => value - sign * (ii[i] as number)),
    im: ri.map((value, i) => value + sign * (ir[i] as number)),
  }
}

/** A vector of n entries with room for the control's, 0. */
function widened(v: Float64Array): Float64Array {
  const wide = new Float64Array(v.length + 1)
  wide.set(v)
  return wide
}

function solveOnFirst(lu: ComplexLu, re: Float64Array, im: Float64Array, n: number): void {
  solveComplexLu(lu, re.subarray(0, n), im.subarray(0, n))
}

/** Sum of |p_i| |b_i|: what the roundings of <p, b> are a share of. */
function weight(pRe: Float64Array, pIm: Float64Array, re: Float64Array, im: Float64Array): number {
  let sum = 0
  for (let i = 0; i < re.length; i++) {
    sum += Math.hypot(pRe[i] as number, pIm[i] as number) * Math.hypot(re[i] as number, im[i] as number)
  }
  return sum
}
