import {
  type ComplexLu,
  createComplexLu,
  factorComplexLu,
  factorShifted,
  solveComplexLu,
} from '#shared/numerics/complex-solve.ts'
import type { Frame } from './frame.ts'
import type { LocatedHopf } from './hopf-point.ts'
import type { CriticalPair } from './normal-form.ts'
import { createOnsetForms, type OnsetForms } from './onset-forms.ts'
import { addVector, conjugate, inner, lifted, realVector, type Vector } from './onset-vectors.ts'

/**
 * The second Lyapunov coefficient l2 = Re c2 / omega (with <q,q> = 1 in the model's units) at a Hopf point where Re c1
 * cannot be told from zero; w' = iω w + c1 w|w|² + c2 w|w|⁴. Null where one of the linear systems is singular (1:2, 1:3 or
 * a zero eigenvalue). Exact derivatives up to the fifth order.
 *
 * 12 c2 = <p, E(q,q,q,q̄,q̄) + D(q,q,q,h̄20) + 3 D(q,q̄,q̄,h20) + 6 D(q,q,q̄,h11)
 *            + C(q̄,q̄,h30) + 3 C(q,q,h̄21) + 6 C(q,q̄,h21) + 3 C(q,h̄20,h20) + 6 C(q,h11,h11) + 6 C(q̄,h20,h11)
 *            + 2 B(q̄,h31) + 3 B(q,h22) + B(h̄20,h30) + 3 B(h̄21,h20) + 6 B(h11,h21)>
 *
 * Source: Kuznetsov, Elements of Applied Bifurcation Theory (3rd ed.), section 8.7.3.
 */
export function secondLyapunov(frame: Frame, point: LocatedHopf, pair: CriticalPair): number | null {
  const { n, model } = frame
  const { m } = model
  const forms = createOnsetForms(frame, point.sample.z)
  const algebra = algebraOf(forms, m)
  const { add, times, conj, b, c, cWith, dWith } = algebra
  const q: Vector = { re: pair.q.re.slice(0, n), im: pair.q.im.slice(0, n) }
  const p: Vector = { re: pair.pRe, im: pair.pIm }
  const solvers = [0, 2, 3].map((k) => shifted(pair.jacobian, n, k * pair.omega))
  const critical = criticalSolver(pair, q, p, n)
  const [zero, double, triple] = solvers
  if (!zero || !double || !triple || !critical) return null

  const pure = pureForms(forms, q, m)
  const h20 = double(pure.bqq)
  const h11 = zero(pure.bqqBar)
  const rest21 = add(add(pure.cqqqBar, b(conj(q), h20)), times(b(q, h11), 2))
  const c1 = half(inner(p, rest21))
  const h21 = critical(add(rest21, scaled(q, -2 * c1.re, -2 * c1.im)))
  const h30 = triple(add(pure.cqqq, times(b(q, h20), 3)))

  // forms with q twice or three times and one other vector
  const with11 = cWith(q, h11)
  const with20 = cWith(q, h20)
  const with20Bar = cWith(q, conj(h20))
  const with21 = cWith(q, h21)
  const with21Bar = cWith(q, conj(h21))
  const with30 = cWith(q, h30)
  const d20 = dWith(q, h20)
  const d20Bar = dWith(q, conj(h20))
  const d11 = dWith(q, h11)

  const sum = (...terms: Vector[]): Vector => terms.reduce(add)
  const h31 = double(
    sum(
      pure.dqqqqBar,
      times(with11.qq, 3),
      times(with20.qqBar, 3),
      times(b(h20, h11), 3),
      b(conj(q), h30),
      times(b(q, h21), 3),
      scaled(h20, -6 * c1.re, -6 * c1.im),
    ),
  )
  const h22 = zero(
    sum(
      pure.dqqqBarqBar,
      times(with11.qqBar, 4),
      with20.qBarqBar,
      with20Bar.qq,
      times(b(h11, h11), 2),
      times(b(q, conj(h21)), 2),
      times(b(conj(q), h21), 2),
      b(conj(h20), h20),
      times(h11, -4 * c1.re),
    ),
  )
  const total = sum(
    pure.eqqqqBarqBar,
    d20Bar.qqq,
    times(d20.qqBarqBar, 3),
    times(d11.qqqBar, 6),
    with30.qBarqBar,
    times(with21Bar.qq, 3),
    times(with21.qqBar, 6),
    times(c(q, conj(h20), h20), 3),
    times(c(q, h11, h11), 6),
    times(c(conj(q), h20, h11), 6),
    times(b(conj(q), h31), 2),
    times(b(q, h22), 3),
    b(conj(h20), h30),
    times(b(conj(h21), h20), 3),
    times(b(h11, h21), 6),
  )
  const c2 = inner(p, total).re / 12
  const value = c2 / pair.size ** 2 / pair.omega
  return Number.isFinite(value) ? value : null
}

const half = (z: { re: number; im: number }) => ({ re: z.re / 2, im: z.im / 2 })

function scaled(v: Vector, re: number, im: number): Vector {
  return {
    re: v.re.map((x, i) => x * re - (v.im[i] as number) * im),
    im: v.re.map((x, i) => x * im + (v.im[i] as number) * re),
  }
}

/** Solves (i shift - A) h = v; null where singular. */
function shifted(jacobian: Float64Array, n: number, shift: number): ((v: Vector) => Vector) | null {
  const lu = createComplexLu(n)
  return factorShifted(lu, jacobian, 0, shift, -1) ? solver(lu) : null
}

function solver(lu: ComplexLu): (v: Vector) => Vector {
  return (v) => {
    const x = { re: v.re.slice(), im: v.im.slice() }
    solveComplexLu(lu, x.re, x.im)
    return x
  }
}

/** Solves (iω - A) h = v with <p, h> = 0 for <p, v> = 0: the critical eigenvalue is moved away by the rank-one q pᴴ. */
function criticalSolver(pair: CriticalPair, q: Vector, p: Vector, n: number): ((v: Vector) => Vector) | null {
  const re = new Float64Array(n * n)
  const im = new Float64Array(n * n)
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      const [a, b, c, e] = [q.re[i] as number, q.im[i] as number, p.re[j] as number, -(p.im[j] as number)]
      re[i * n + j] = -(pair.jacobian[i * n + j] as number) + pair.omega * (a * c - b * e)
      im[i * n + j] = (i === j ? pair.omega : 0) + pair.omega * (a * e + b * c)
    }
  }
  const lu = createComplexLu(n)
  return factorComplexLu(lu, re, im) ? solver(lu) : null
}

/** Forms of q and q̄ alone, by a discrete Fourier sum over directions cos θ u + sin θ v = (e^-iθ q + e^iθ q̄) / 2. */
function pureForms(forms: OnsetForms, q: Vector, m: number) {
  const directions = 6
  const powers = Array.from({ length: directions }, (_, k) => forms.powers(turned(q, (Math.PI * k) / directions, m)))
  /** Form of `order` with `bars` factors q̄. */
  const part = (order: number, bars: number): Vector => {
    const factor = 2 ** order / binomial(order, bars) / directions
    const n = q.re.length
    const out = { re: new Float64Array(n), im: new Float64Array(n) }
    powers.forEach((values, k) => {
      const angle = ((order - 2 * bars) * Math.PI * k) / directions
      const value = values[order] as Float64Array
      for (let i = 0; i < n; i++) {
        out.re[i] = (out.re[i] as number) + factor * Math.cos(angle) * (value[i] as number)
        out.im[i] = (out.im[i] as number) + factor * Math.sin(angle) * (value[i] as number)
      }
    })
    return out
  }
  return {
    bqq: part(2, 0),
    bqqBar: part(2, 1),
    cqqq: part(3, 0),
    cqqqBar: part(3, 1),
    dqqqqBar: part(4, 1),
    dqqqBarqBar: part(4, 2),
    eqqqqBarqBar: part(5, 2),
  }
}

function turned(q: Vector, angle: number, m: number): Float64Array {
  const out = new Float64Array(q.re.length + m)
  for (let i = 0; i < q.re.length; i++) {
    out[i] = Math.cos(angle) * (q.re[i] as number) + Math.sin(angle) * (q.im[i] as number)
  }
  return out
}

function binomial(n: number, k: number): number {
  let value = 1
  for (let i = 1; i <= k; i++) value = (value * (n - k + i)) / i
  return value
}

/** Complex vectors and the forms on them. */
function algebraOf(forms: OnsetForms, m: number) {
  const wide = (v: Float64Array): Float64Array => lifted(v, m)
  const add = addVector
  const times = (v: Vector, factor: number): Vector => scaled(v, factor, 0)
  const conj = conjugate
  const plusI = (a: Vector, b: Vector): Vector => add(a, scaled(b, 0, 1))
  const real = realVector
  const b = (x: Vector, y: Vector): Vector => {
    const [xr, xi, yr, yi] = [wide(x.re), wide(x.im), wide(y.re), wide(y.im)]
    const first = plusI(real(forms.bilinear(xr, yr)), real(forms.bilinear(xi, yr)))
    const second = plusI(real(forms.bilinear(xr, yi)), real(forms.bilinear(xi, yi)))
    return plusI(first, second)
  }
  const c = (x: Vector, y: Vector, z: Vector): Vector => {
    const t = (a: Float64Array, e: Float64Array, f: Float64Array): Vector =>
      real(forms.trilinear(wide(a), wide(e), wide(f)))
    const withZ = (f: Float64Array): Vector =>
      plusI(plusI(t(x.re, y.re, f), t(x.im, y.re, f)), plusI(t(x.re, y.im, f), t(x.im, y.im, f)))
    return plusI(withZ(z.re), withZ(z.im))
  }
  /** C(·,·,h) and D(·,·,·,h) with q and q̄ in the free places, for real h, by the Fourier sum over four directions. */
  const along = (q: Vector, h: Float64Array) => {
    const directions = 4
    const passes = Array.from({ length: directions }, (_, k) =>
      forms.alongWith(turned(q, (Math.PI * k) / directions, m), wide(h)),
    )
    const part = (order: 2 | 3, bars: number): Vector => {
      const factor = 2 ** order / binomial(order, bars) / directions
      return passes.reduce<Vector>(
        (sum, pass, k) => {
          const angle = ((order - 2 * bars) * Math.PI * k) / directions
          const value = real(order === 2 ? pass.third : pass.fourth)
          return add(sum, scaled(value, factor * Math.cos(angle), factor * Math.sin(angle)))
        },
        real(new Float64Array(q.re.length)),
      )
    }
    return part
  }
  const complexAlong = (q: Vector, h: Vector) => {
    const re = along(q, h.re)
    const im = along(q, h.im)
    return (order: 2 | 3, bars: number): Vector => plusI(re(order, bars), im(order, bars))
  }
  const cWith = (q: Vector, h: Vector) => {
    const part = complexAlong(q, h)
    return { qq: part(2, 0), qqBar: part(2, 1), qBarqBar: part(2, 2) }
  }
  const dWith = (q: Vector, h: Vector) => {
    const part = complexAlong(q, h)
    return { qqq: part(3, 0), qqqBar: part(3, 1), qqBarqBar: part(3, 2) }
  }
  return { add, times, conj, b, c, cWith, dWith }
}
