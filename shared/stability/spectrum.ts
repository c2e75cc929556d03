import { createEigen, type EigenWorkspace, eigenvalues } from '#shared/numerics/eigenvalues.ts'

/** Rounding of a double. */
const epsilon = 2 ** -52

/**
 * All eigenvalues of one Jacobian, by falling real part, conjugate pairs together with the positive imaginary part
 * first. Unit: 1 / time. `size` is a norm of the balanced matrix: rounding of it is the error of the eigenvalues.
 */
export interface Spectrum {
  readonly n: number
  readonly re: Float64Array
  readonly im: Float64Array
  readonly size: number
}

/** Workspace for spectra of n x n matrices. */
export function createSpectra(n: number): EigenWorkspace {
  return createEigen(n)
}

/** Eigenvalues of the row-major `jacobian`; null where it is not finite or the iteration fails. */
export function spectrumOf(ws: EigenWorkspace, jacobian: Float64Array): Spectrum | null {
  const { n } = ws
  const re = new Float64Array(n)
  const im = new Float64Array(n)
  if (!eigenvalues(ws, jacobian, re, im)) return null
  let size = 0
  for (let i = 0; i < n; i++) size = Math.max(size, Math.hypot(re[i] as number, im[i] as number))
  return { n, re, im, size }
}

/** Size below which a real part (or a whole real eigenvalue) of the spectrum is rounding and not a finding. */
export function noiseOf(spectrum: Spectrum): number {
  return 8 * spectrum.n * epsilon * spectrum.size
}

/**
 * True where eigenvalue i cannot be told from one on the imaginary axis: its real part is within 1e-9 of its own
 * modulus, or (a real one) it is rounding of the largest. Judged by its own size, so that slow modes of stiff models
 * (1e-6 beside 1e6) are not taken for zero.
 */
export function onAxis(spectrum: Spectrum, i: number): boolean {
  const real = Math.abs(spectrum.re[i] as number)
  const imaginary = Math.abs(spectrum.im[i] as number)
  if (imaginary === 0) return real <= noiseOf(spectrum)
  return real <= 1e-9 * Math.hypot(real, imaginary)
}

/** The card's rule: every real part below -1e-9 |lambda| of its own eigenvalue (and not zero but for rounding). */
export function isStable(spectrum: Spectrum): boolean {
  for (let i = 0; i < spectrum.n; i++) {
    if ((spectrum.re[i] as number) >= 0 || onAxis(spectrum, i)) return false
  }
  return true
}

/** As it stands in the card. */
export function eigenvalueList(spectrum: Spectrum): { re: number; im: number }[] {
  // + 0 turns a negative zero into zero, which JSON and comparisons prefer
  return Array.from(spectrum.re, (re, i) => ({ re: re + 0, im: (spectrum.im[i] as number) + 0 }))
}
