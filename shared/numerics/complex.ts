/** Small helpers for complex numbers and vectors. Vectors are pairs of Float64Array, scalars pairs of numbers. */

/** A complex number, as it stands in a card: `{ "re": -0.5, "im": 1 }`. */
export interface Complex {
  re: number
  im: number
}

/** Modulus without overflow. */
export function modulus(re: number, im: number): number {
  return Math.hypot(re, im)
}

/** Product of two complex numbers. */
export function multiply(a: Complex, b: Complex): Complex {
  return { re: a.re * b.re - a.im * b.im, im: a.re * b.im + a.im * b.re }
}

/** Quotient of two complex numbers by Smith's method (no overflow in between). */
export function divide(a: Complex, b: Complex): Complex {
  if (Math.abs(b.re) >= Math.abs(b.im)) {
    const t = b.im / b.re
    const d = b.re + b.im * t
    return { re: (a.re + a.im * t) / d, im: (a.im - a.re * t) / d }
  }
  const t = b.re / b.im
  const d = b.re * t + b.im
  return { re: (a.re * t + a.im) / d, im: (a.im * t - a.re) / d }
}

/** <u, v> = sum of conj(u_j) v_j over the first n entries. */
export function innerProduct(
  ur: Float64Array,
  ui: Float64Array,
  vr: Float64Array,
  vi: Float64Array,
  n = ur.length,
): Complex {
  let re = 0
  let im = 0
  for (let j = 0; j < n; j++) {
    const a = ur[j] as number
    const b = ui[j] as number
    const c = vr[j] as number
    const d = vi[j] as number
    re += a * c + b * d
    im += a * d - b * c
  }
  return { re, im }
}

/** Euclidean norm of a complex vector, scaled against overflow and underflow. */
export function complexNorm(vr: Float64Array, vi: Float64Array, n = vr.length): number {
  let largest = 0
  for (let j = 0; j < n; j++) largest = Math.max(largest, Math.abs(vr[j] as number), Math.abs(vi[j] as number))
  if (largest === 0 || !Number.isFinite(largest)) return largest
  let sum = 0
  for (let j = 0; j < n; j++) {
    const a = (vr[j] as number) / largest
    const b = (vi[j] as number) / largest
    sum += a * a + b * b
  }
  return largest * Math.sqrt(sum)
}

/** Multiplies a complex vector in place by the complex number (re, im). */
export function scaleVector(vr: Float64Array, vi: Float64Array, re: number, im: number, n = vr.length): void {
  for (let j = 0; j < n; j++) {
    const a = vr[j] as number
    const b = vi[j] as number
    vr[j] = a * re - b * im
    vi[j] = a * im + b * re
  }
}
