import type { OnsetForms } from './onset-forms.ts'

/**
 * Complex vectors for the forms along an onset: pairs of real ones, of n entries (scaled states) or, as directions, of
 * n + m (states, then parameters; see onset-forms.ts).
 */
export interface Vector {
  readonly re: Float64Array
  readonly im: Float64Array
}

export interface Scalar {
  readonly re: number
  readonly im: number
}

/** a + s b. */
export const add = (a: Float64Array, b: Float64Array, s = 1): Float64Array =>
  a.map((value, i) => value + s * (b[i] as number))

/** a + b. */
export const addVector = (a: Vector, b: Vector): Vector => ({ re: add(a.re, b.re), im: add(a.im, b.im) })

/** Real n-vector as a direction of n + m entries. */
export function lifted(v: Float64Array, m: number): Float64Array {
  const wide = new Float64Array(v.length + m)
  wide.set(v)
  return wide
}

/** <p, v>, conjugated in p. */
export function inner(p: Vector, v: Vector): Scalar {
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
export function bilinearOf(forms: OnsetForms, a: Vector, b: Vector): Vector {
  const rr = forms.bilinear(a.re, b.re)
  const ii = forms.bilinear(a.im, b.im)
  const ri = forms.bilinear(a.re, b.im)
  const ir = forms.bilinear(a.im, b.re)
  return { re: add(rr, ii, -1), im: add(ri, ir) }
}

/** Complex conjugate. */
export const conjugate = (v: Vector): Vector => ({ re: v.re, im: v.im.map((value) => -value) })
/** A real vector as a complex one. */
export const realVector = (re: Float64Array): Vector => ({ re, im: new Float64Array(re.length) })
/** A complex n-vector as a direction. */
export const widen = (v: Vector, m: number): Vector => ({ re: lifted(v.re, m), im: lifted(v.im, m) })
