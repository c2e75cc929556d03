import type { OnsetForms } from './onset-forms.ts'
import { lifted, type Vector } from './onset-vectors.ts'

/** Forms with one place free, as linear maps of real n-vectors of states: made once, applied for every parameter. */
export interface Tables {
  readonly bU: LinearMap
  readonly bV: LinearMap
  readonly bMean: LinearMap
  readonly bSecondRe: LinearMap
  readonly bSecondIm: LinearMap
  readonly cUU: LinearMap
  readonly cUV: LinearMap
  readonly cVV: LinearMap
}

/** Applies a form to a real n-vector in its free place. */
export type LinearMap = (v: Float64Array) => Float64Array

/** Fills the tables at a Hopf point. */
export function tablesOf(forms: OnsetForms, n: number, q: Vector, mean: Float64Array, second: Vector): Tables {
  const m = q.re.length - n
  const map = (form: (axis: Float64Array) => Float64Array): LinearMap => {
    const columns = Array.from({ length: n }, (_, j) => {
      const axis = new Float64Array(n + m)
      axis[j] = 1
      return form(axis)
    })
    return (v) => {
      const out = new Float64Array(n)
      columns.forEach((column, j) => {
        for (let i = 0; i < n; i++) out[i] = (out[i] as number) + (v[j] as number) * (column[i] as number)
      })
      return out
    }
  }
  const with1 = (a: Float64Array): LinearMap => map((axis) => forms.bilinear(a, axis))
  const with2 = (a: Float64Array, b: Float64Array): LinearMap => map((axis) => forms.trilinear(a, b, axis))
  return {
    bU: with1(q.re),
    bV: with1(q.im),
    bMean: with1(lifted(mean, m)),
    bSecondRe: with1(lifted(second.re, m)),
    bSecondIm: with1(lifted(second.im, m)),
    cUU: with2(q.re, q.re),
    cUV: with2(q.re, q.im),
    cVV: with2(q.im, q.im),
  }
}
