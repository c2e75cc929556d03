import type { StabilityCard } from '#shared/model/card-document.ts'
import {
  createComplexLu,
  factorComplexLu,
  factorShifted,
  solveComplexLu,
  solveComplexLuAdjoint,
} from '#shared/numerics/complex-solve.ts'
import { createLu, factorLu, solveLu } from '#shared/numerics/linear-solve.ts'
import { type Frame, place } from './frame.ts'
import { type CriticalPair, criticalPair } from './normal-form.ts'
import { createOnsetForms, type OnsetForms } from './onset-forms.ts'
import type { ListedHopf } from './window.ts'

type Sensitivity = NonNullable<StabilityCard['sensitivity']>[number]

/** Complex vector of n + m entries (states scaled, parameters) or of n entries. */
interface Vector {
  readonly re: Float64Array
  readonly im: Float64Array
}

interface Scalar {
  readonly re: number
  readonly im: number
}

/** What one Hopf point's sensitivities share. */
interface Setting {
  readonly frame: Frame
  readonly z: Float64Array
  readonly forms: OnsetForms
  readonly pair: CriticalPair
  readonly q: Vector
  readonly p: Vector
  /** B(q, q̄), mean = A⁻¹ B(q, q̄), second = (2iω I - A)⁻¹ B(q, q), and c1. */
  readonly mean: Float64Array
  readonly second: Vector
  /** -A⁻¹ F_p per unit of the control, and dλ/dp per unit of the control. */
  readonly byControl: Float64Array
  readonly rate: Scalar
  readonly solveReal: (b: Float64Array) => Float64Array
  readonly solveSecond: (b: Vector) => Vector
  readonly cubicTerm: Scalar
}

/**
 * How each parameter but the control moves an operating onset: total derivatives, along the onset, of its control value,
 * of omega and of the cubic coefficient, in the model's units; elasticity (θ/p_c) dp_c/dθ, null where p_c is zero.
 *
 * dp_c/dθ = -Re λ_θ / Re λ_p with λ_θ = <p, (A_θ + B(x_θ, ·)) q>, x_θ = -A⁻¹ F_θ. The cubic term's formula is
 * differentiated by the product rule, with derivatives up to the fourth from exact jets; the eigenvectors' derivatives
 * solve bordered systems. No finite differences (but for the gradient of an observed helper).
 * Source: Lancaster 1964; Seyranian & Mailybaev, Multiparameter Stability Theory 2003, sections 2.3 and 2.4.
 */
export function sensitivitiesOf(frame: Frame, hopf: ListedHopf): Sensitivity[] {
  const setting = settingOf(frame, hopf)
  if (!setting) return []
  const { parameters } = frame.model.system
  const entries: Sensitivity[] = []
  parameters.forEach((parameter, k) => {
    if (k === frame.control || frame.budget.spent()) return
    const moved = alongOnset(setting, k)
    const scale = setting.forms.scale[k] as number
    const onset = (moved.control * (frame.unit[frame.n] as number)) / scale
    const frequency = moved.omega / scale
    const cubic = hopf.card.cubic === null ? null : moved.cubic() / scale
    if (!Number.isFinite(onset) || !Number.isFinite(frequency)) return
    const atZero = Math.abs(hopf.card.p) <= 1e-9 * (frame.high - frame.low)
    entries.push({
      hopf: hopf.index,
      symbol: parameter.symbol,
      onset,
      elasticity: atZero ? null : (parameter.value / hopf.card.p) * onset,
      frequency,
      cubic: cubic !== null && Number.isFinite(cubic) ? cubic : null,
      flip: null,
    })
  })
  return entries
}

const add = (a: Float64Array, b: Float64Array, s = 1): Float64Array => a.map((value, i) => value + s * (b[i] as number))

/** Real n-vector as a direction of n + m entries. */
function lifted(v: Float64Array, m: number): Float64Array {
  const wide = new Float64Array(v.length + m)
  wide.set(v)
  return wide
}

function inner(p: Vector, v: Vector): Scalar {
  let re = 0
  let im = 0
  for (let i = 0; i < v.re.length; i++) {
    const [a, b] = [p.re[i] as number, p.im[i] as number]
    const [c, d] = [v.re[i] as number, v.im[i] as number]
    re += a * c + b * d
    im += a * d - b * c
  }
  return { re, im }
}

/** B(a, b) for complex a and real or complex b, by its real parts. */
function bilinearOf(forms: OnsetForms, a: Vector, b: Vector): Vector {
  const rr = forms.bilinear(a.re, b.re)
  const ii = forms.bilinear(a.im, b.im)
  const ri = forms.bilinear(a.re, b.im)
  const ir = forms.bilinear(a.im, b.re)
  return { re: add(rr, ii, -1), im: add(ri, ir) }
}

const conjugate = (v: Vector): Vector => ({ re: v.re, im: v.im.map((value) => -value) })
const realVector = (re: Float64Array): Vector => ({ re, im: new Float64Array(re.length) })
const widen = (v: Vector, m: number): Vector => ({ re: lifted(v.re, m), im: lifted(v.im, m) })

function settingOf(frame: Frame, hopf: ListedHopf): Setting | null {
  const { n } = frame
  const { m } = frame.model
  const pair = criticalPair(frame, hopf.point)
  if (!pair) return null
  const { z } = hopf.point.sample
  const forms = createOnsetForms(frame, z)
  const lu = createLu(n)
  const complexLu = createComplexLu(n)
  if (!factorLu(lu, pair.jacobian) || !factorShifted(complexLu, pair.jacobian, 0, 2 * pair.omega, -1)) return null
  const solveReal = (b: Float64Array): Float64Array => {
    const x = b.slice()
    solveLu(lu, x)
    return x
  }
  const solveSecond = (b: Vector): Vector => {
    const x = { re: b.re.slice(), im: b.im.slice() }
    solveComplexLu(complexLu, x.re, x.im)
    return x
  }
  const q = widen({ re: pair.q.re.slice(0, n), im: pair.q.im.slice(0, n) }, m)
  const p = { re: pair.pRe, im: pair.pIm }
  const base = { frame, z, forms, pair, q, p, solveReal, solveSecond }
  const { bqq, bqBar, cubic } = formsOfPair(base)
  const mean = solveReal(bqBar)
  const second = solveSecond(bqq)
  const first = inner(p, bilinearOf(forms, q, realVector(lifted(mean, m))))
  const last = inner(p, bilinearOf(forms, conjugate(q), widen(second, m)))
  const third = inner(p, cubic)
  const cubicTerm = {
    re: 0.5 * (third.re - 2 * first.re + last.re),
    im: 0.5 * (third.im - 2 * first.im + last.im),
  }
  const byControl = responseTo(frame, z, frame.control, forms, solveReal)
  const direction = lifted(byControl, m)
  direction[n + frame.control] = 1
  const rate = inner(p, bilinearOf(forms, realVector(direction), q))
  return { ...base, mean, second, byControl, rate, cubicTerm }
}

/** -A⁻¹ F_θ for parameter k, per unit of its entry. */
function responseTo(
  frame: Frame,
  z: Float64Array,
  k: number,
  forms: OnsetForms,
  solve: (b: Float64Array) => Float64Array,
): Float64Array {
  const { n, unit, model } = frame
  const out = new Float64Array(n)
  place(frame, z)
  model.parameterDerivative(frame.x, frame.parameters, k, out)
  for (let i = 0; i < n; i++) out[i] = (-(out[i] as number) * (forms.scale[k] as number)) / (unit[i] as number)
  return solve(out)
}

function formsOfPair({ forms, q }: Pick<Setting, 'forms' | 'q'>) {
  const uu = forms.bilinear(q.re, q.re)
  const vv = forms.bilinear(q.im, q.im)
  const uv = forms.bilinear(q.re, q.im)
  const uuu = forms.trilinear(q.re, q.re, q.re)
  const vvv = forms.trilinear(q.im, q.im, q.im)
  const uuv = forms.trilinear(q.re, q.re, q.im)
  const uvv = forms.trilinear(q.re, q.im, q.im)
  return {
    bqq: { re: add(uu, vv, -1), im: uv.map((value) => 2 * value) },
    bqBar: add(uu, vv),
    cubic: { re: add(uuu, uvv), im: add(uuv, vvv) },
  }
}

/** Derivatives along the onset per unit of parameter k's entry; the cubic's on demand, it costs most. */
function alongOnset(setting: Setting, k: number): { control: number; omega: number; cubic: () => number } {
  const { frame, forms, p, q, rate } = setting
  const { n } = frame
  const { m } = frame.model
  const alone = lifted(responseTo(frame, setting.z, k, forms, setting.solveReal), m)
  alone[n + k] = 1
  const moved = inner(p, bilinearOf(forms, realVector(alone), q))
  const control = -moved.re / rate.re
  const omega = moved.im + rate.im * control
  const along = lifted(add(alone.slice(0, n), setting.byControl, control), m)
  along[n + k] = 1
  along[n + frame.control] = control
  return { control, omega, cubic: () => cubicAlong(setting, along, omega) }
}

/** d/dτ of Re c1 / (4 |q_k|²) along `d`, with dω/dτ = `omega`: the product rule, term by term. */
function cubicAlong(setting: Setting, d: Float64Array, omega: number): number {
  const { frame, forms, pair, p, q, mean, second, solveReal, solveSecond } = setting
  const { m } = frame.model
  const wideMean = realVector(lifted(mean, m))
  const wideSecond = widen(second, m)
  const direction = realVector(d)
  const vectors = eigenvectorsAlong(setting, d, omega)
  const dq = widen(vectors.q, m)

  // B(d,q), C(d,q,q), C(d,q,q̄), D(d,q,q,q̄) from jets along u, v, u + v, u - v
  const u = forms.alongWith(q.re, d)
  const v = forms.alongWith(q.im, d)
  const plus = forms.alongWith(add(q.re, q.im), d)
  const minus = forms.alongWith(add(q.re, q.im, -1), d)
  const fourthOf = (i: number): [number, number] => {
    const [uuu, vvv] = [u.fourth[i] as number, v.fourth[i] as number]
    const [sum, difference] = [plus.fourth[i] as number, minus.fourth[i] as number]
    return [uuu + (sum + difference - 2 * uuu) / 6, (sum - difference - 2 * vvv) / 6 + vvv]
  }
  const fourth = { re: u.fourth.map((_, i) => fourthOf(i)[0]), im: u.fourth.map((_, i) => fourthOf(i)[1]) }
  const cdqq = {
    re: add(u.third, v.third, -1),
    im: plus.third.map((value, i) => (value - (minus.third[i] as number)) / 2),
  }
  const cdqBar = add(u.third, v.third)

  // mean' : A m' = C(d,q,q̄) + 2 Re B(q',q̄) - B(d,m)
  const bqBar = bilinearOf(forms, dq, conjugate(q))
  const meanAlong = solveReal(add(add(cdqBar, bqBar.re, 2), forms.bilinear(d, wideMean.re), -1))
  // second' : (2iω - A) s' = C(d,q,q) + 2 B(q,q') + B(d,s) - 2iω' s
  const bqq = bilinearOf(forms, q, dq)
  const bds = bilinearOf(forms, direction, wideSecond)
  const secondAlong = solveSecond({
    re: cdqq.re.map(
      (x, i) => x + 2 * (bqq.re[i] as number) + (bds.re[i] as number) + 2 * omega * (second.im[i] as number),
    ),
    im: cdqq.im.map(
      (x, i) => x + 2 * (bqq.im[i] as number) + (bds.im[i] as number) - 2 * omega * (second.re[i] as number),
    ),
  })

  const { cubic } = formsOfPair(setting)
  const cubicAlongD = addVector(fourth, cubicWith(forms, q, dq))
  const first = bilinearOf(forms, q, wideMean)
  const firstAlong = addVector(
    addVector(trilinearWithReal(forms, d, q, wideMean.re), bilinearOf(forms, dq, wideMean)),
    bilinearOf(forms, q, realVector(lifted(meanAlong, m))),
  )
  const last = bilinearOf(forms, conjugate(q), wideSecond)
  const lastAlong = addVector(
    addVector(trilinearWith(forms, d, conjugate(q), wideSecond), bilinearOf(forms, conjugate(dq), wideSecond)),
    bilinearOf(forms, conjugate(q), widen(secondAlong, m)),
  )
  const total = (vector: Vector, cube: Vector, one: Vector, two: Vector): number =>
    0.5 * (inner(vector, cube).re - 2 * inner(vector, one).re + inner(vector, two).re)
  const c1 = total(vectors.p, cubic, first, last) + total(p, cubicAlongD, firstAlong, lastAlong)

  const k = pair.observed
  const dk = observedAlong(setting, d, vectors.q)
  const size = k.re * k.re + k.im * k.im
  const sizeAlong = 2 * (k.re * dk.re + k.im * dk.im)
  return (c1 - (setting.cubicTerm.re * sizeAlong) / size) / (4 * size)
}

const addVector = (a: Vector, b: Vector): Vector => ({ re: add(a.re, b.re), im: add(a.im, b.im) })

/** 2 C(q',q,q̄) + C(q,q,q̄') with q = u + iv, q' = a + ib. */
function cubicWith(forms: OnsetForms, q: Vector, dq: Vector): Vector {
  const form = forms.trilinear
  const [uua, vva, uva] = [form(q.re, q.re, dq.re), form(q.im, q.im, dq.re), form(q.re, q.im, dq.re)]
  const [uub, vvb, uvb] = [form(q.re, q.re, dq.im), form(q.im, q.im, dq.im), form(q.re, q.im, dq.im)]
  return {
    re: uua.map((x, i) => 3 * x + (vva[i] as number) + 2 * (uvb[i] as number)),
    im: uub.map((x, i) => x + 3 * (vvb[i] as number) + 2 * (uva[i] as number)),
  }
}

function trilinearWithReal(forms: OnsetForms, d: Float64Array, a: Vector, b: Float64Array): Vector {
  return { re: forms.trilinear(d, a.re, b), im: forms.trilinear(d, a.im, b) }
}

function trilinearWith(forms: OnsetForms, d: Float64Array, a: Vector, b: Vector): Vector {
  const first = trilinearWithReal(forms, d, a, b.re)
  const second = trilinearWithReal(forms, d, a, b.im)
  return { re: add(first.re, second.im, -1), im: add(first.im, second.re) }
}

/**
 * Derivatives of q and p: (A - iω) q' = -(A' - iω') q with <p, q'> = 0, and (Aᵀ + iω) p' = -(A'ᵀ + iω') p with
 * <p', q> = 0. Solved with A - iω shifted by the rank-one term q pᴴ, which moves only the critical eigenvalue away.
 */
function eigenvectorsAlong(setting: Setting, d: Float64Array, omega: number): { q: Vector; p: Vector } {
  const { frame, forms, pair, p, q } = setting
  const { n } = frame
  const lu = createComplexLu(n)
  const size = Math.max(pair.omega, 1e-300)
  const [qRe, qIm] = [q.re, q.im]
  const re = new Float64Array(n * n)
  const im = new Float64Array(n * n)
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      const [a, b, c, e] = [qRe[i] as number, qIm[i] as number, p.re[j] as number, -(p.im[j] as number)]
      re[i * n + j] = (pair.jacobian[i * n + j] as number) + size * (a * c - b * e)
      im[i * n + j] = size * (a * e + b * c) - (i === j ? pair.omega : 0)
    }
  }
  factorComplexLu(lu, re, im)
  // right: -(A' q - iω' q), its part along q taken out
  const moved = bilinearOf(forms, realVector(d), q)
  const right = {
    re: moved.re.map((x, i) => -x - omega * (qIm[i] as number)),
    im: moved.im.map((x, i) => -x + omega * (qRe[i] as number)),
  }
  takeOut(right, p, { re: qRe.slice(0, n), im: qIm.slice(0, n) })
  solveComplexLu(lu, right.re, right.im)
  // left: component j of A'ᵀ p is <e_j-th column>: p paired with A' e_j
  const left = { re: new Float64Array(n), im: new Float64Array(n) }
  const axis = new Float64Array(d.length)
  for (let j = 0; j < n; j++) {
    axis.fill(0)
    axis[j] = 1
    const column = forms.bilinear(d, axis)
    let [sr, si] = [0, 0]
    for (let i = 0; i < n; i++) {
      sr += (column[i] as number) * (p.re[i] as number)
      si += (column[i] as number) * (p.im[i] as number)
    }
    left.re[j] = -sr + omega * (p.im[j] as number)
    left.im[j] = -si - omega * (p.re[j] as number)
  }
  takeOut(left, { re: qRe.slice(0, n), im: qIm.slice(0, n) }, p)
  solveComplexLuAdjoint(lu, left.re, left.im)
  return { q: right, p: left }
}

/** v minus <along, v> times `by`, where <along, by> = 1. */
function takeOut(v: Vector, along: Vector, by: Vector): void {
  const part = inner(along, v)
  for (let i = 0; i < v.re.length; i++) {
    const [a, b] = [by.re[i] as number, by.im[i] as number]
    v.re[i] = (v.re[i] as number) - (part.re * a - part.im * b)
    v.im[i] = (v.im[i] as number) - (part.re * b + part.im * a)
  }
}

/** Derivative of the observed component of q: gradient times q', and for a helper the gradient's own change times q. */
function observedAlong(setting: Setting, d: Float64Array, dq: Vector): Scalar {
  const { frame, forms, q } = setting
  const { n, unit, model } = frame
  place(frame, setting.z)
  const x = frame.x.slice()
  const parameters = frame.parameters.slice()
  const gradient = new Float64Array(n)
  model.observed(x, parameters, gradient)
  const change = new Float64Array(n)
  if (model.system.observed.kind === 'helper') {
    const step = 1e-5 / Math.max(1e-300, Math.sqrt(d.reduce((sum, value) => sum + value * value, 0)))
    for (const side of [1, -1]) {
      const movedX = x.map((value, i) => value + side * step * (d[i] as number) * (unit[i] as number))
      const movedP = parameters.map(
        (value, k) => value + side * step * (d[n + k] as number) * (forms.scale[k] as number),
      )
      const there = new Float64Array(n)
      model.observed(movedX, movedP, there)
      for (let i = 0; i < n; i++) change[i] = (change[i] as number) + (side * (there[i] as number)) / (2 * step)
    }
  }
  let [re, im] = [0, 0]
  for (let i = 0; i < n; i++) {
    const [g, dg, w] = [gradient[i] as number, change[i] as number, unit[i] as number]
    re += w * (g * (dq.re[i] as number) + dg * (q.re[i] as number))
    im += w * (g * (dq.im[i] as number) + dg * (q.im[i] as number))
  }
  return { re, im }
}
