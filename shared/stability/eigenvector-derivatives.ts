import {
  createComplexLu,
  factorComplexLu,
  solveComplexLu,
  solveComplexLuAdjoint,
} from '#shared/numerics/complex-solve.ts'
import type { CriticalPair } from './normal-form.ts'
import type { OnsetForms } from './onset-forms.ts'
import { bilinearOf, inner, realVector, type Vector } from './onset-vectors.ts'

/** What the derivatives are taken of: the pair at a Hopf point, q as a direction (n + m entries), p of n entries. */
export interface CriticalSetting {
  readonly forms: OnsetForms
  readonly pair: CriticalPair
  readonly q: Vector
  readonly p: Vector
}

/**
 * Derivatives of q and p: (A - iω) q' = -(A' - iω') q with <p, q'> = 0, and (Aᵀ + iω) p' = -(A'ᵀ + iω') p with
 * <p', q> = 0. Solved with A - iω shifted by the rank-one term q pᴴ, which moves only the critical eigenvalue away.
 */
export function eigenvectorsAlong(setting: CriticalSetting, d: Float64Array, omega: number): { q: Vector; p: Vector } {
  const { forms, pair, p, q } = setting
  const n = p.re.length
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
