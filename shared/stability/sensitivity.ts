import type { StabilityCard } from '#shared/model/card-document.ts'
import { createComplexLu, factorShifted, solveComplexLu } from '#shared/numerics/complex-solve.ts'
import { createLu, factorLu, solveLu } from '#shared/numerics/linear-solve.ts'
import { eigenvectorsAlong } from './eigenvector-derivatives.ts'
import { type Frame, place } from './frame.ts'
import { type CriticalPair, criticalPair } from './normal-form.ts'
import { createOnsetForms, type OnsetForms } from './onset-forms.ts'
import { type Tables, tablesOf } from './onset-tables.ts'
import {
  add,
  addVector,
  bilinearOf,
  conjugate,
  inner,
  lifted,
  realVector,
  type Scalar,
  type Vector,
  widen,
} from './onset-vectors.ts'
import type { ListedHopf } from './window.ts'

type Sensitivity = NonNullable<StabilityCard['sensitivity']>[number]

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
  readonly cubic: Vector
  readonly first: Vector
  readonly last: Vector
  readonly tables: Tables
  readonly solveReal: (b: Float64Array) => Float64Array
  readonly solveSecond: (b: Vector) => Vector
  /** Re c1. */
  readonly cubicTerm: number
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
  const first = bilinearOf(forms, q, realVector(lifted(mean, m)))
  const last = bilinearOf(forms, conjugate(q), widen(second, m))
  const cubicTerm = 0.5 * (inner(p, cubic).re - 2 * inner(p, first).re + inner(p, last).re)
  const byControl = responseTo(frame, z, frame.control, forms, solveReal)
  const direction = lifted(byControl, m)
  direction[n + frame.control] = 1
  const rate = inner(p, bilinearOf(forms, realVector(direction), q))
  const tables = tablesOf(forms, n, q, mean, second)
  return { ...base, mean, second, byControl, rate, cubicTerm, cubic, first, last, tables }
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
  const wideMean = lifted(mean, m)
  const wideSecond = widen(second, m)
  const vectors = eigenvectorsAlong(setting, d, omega)

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

  const { bU, bV, bMean, bSecondRe, bSecondIm } = setting.tables
  const { re: a, im: b } = vectors.q
  // mean' : A m' = C(d,q,q̄) + 2 Re B(q',q̄) - B(d,m)
  const meanAlong = solveReal(add(add(cdqBar, add(bU(a), bV(b)), 2), forms.bilinear(d, wideMean), -1))
  // second' : (2iω - A) s' = C(d,q,q) + 2 B(q,q') + B(d,s) - 2iω' s
  const bqq = { re: add(bU(a), bV(b), -1), im: add(bU(b), bV(a)) }
  const bds = bilinearOf(forms, realVector(d), wideSecond)
  const secondAlong = solveSecond({
    re: cdqq.re.map(
      (x, i) => x + 2 * (bqq.re[i] as number) + (bds.re[i] as number) + 2 * omega * (second.im[i] as number),
    ),
    im: cdqq.im.map(
      (x, i) => x + 2 * (bqq.im[i] as number) + (bds.im[i] as number) - 2 * omega * (second.re[i] as number),
    ),
  })

  const cubicAlongD = addVector(fourth, cubicWith(setting.tables, vectors.q))
  const firstAlong = addVector(trilinearWithReal(forms, d, q, wideMean), {
    re: add(bMean(a), bU(meanAlong)),
    im: add(bMean(b), bV(meanAlong)),
  })
  const lastAlong = addVector(trilinearWith(forms, d, conjugate(q), wideSecond), {
    re: add(add(bSecondRe(a), bSecondIm(b)), add(bU(secondAlong.re), bV(secondAlong.im))),
    im: add(add(bSecondIm(a), bSecondRe(b), -1), add(bU(secondAlong.im), bV(secondAlong.re), -1)),
  })
  const total = (vector: Vector, cube: Vector, one: Vector, two: Vector): number =>
    0.5 * (inner(vector, cube).re - 2 * inner(vector, one).re + inner(vector, two).re)
  const c1 = total(vectors.p, setting.cubic, setting.first, setting.last) + total(p, cubicAlongD, firstAlong, lastAlong)

  const k = pair.observed
  const dk = observedAlong(setting, d, vectors.q)
  const size = k.re * k.re + k.im * k.im
  const sizeAlong = 2 * (k.re * dk.re + k.im * dk.im)
  return (c1 - (setting.cubicTerm * sizeAlong) / size) / (4 * size)
}

/** 2 C(q',q,q̄) + C(q,q,q̄') with q = u + iv, q' = a + ib. */
function cubicWith({ cUU, cUV, cVV }: Tables, { re: a, im: b }: Vector): Vector {
  const [uua, vva, uva] = [cUU(a), cVV(a), cUV(a)]
  const [uub, vvb, uvb] = [cUU(b), cVV(b), cUV(b)]
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
