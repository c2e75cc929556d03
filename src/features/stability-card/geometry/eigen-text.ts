import type { Complex } from './eigen-paths.ts'
import { figure, signedFigure } from './figures.ts'

/** An eigenvalue, or a pair of them, as one text: "−0.125" or "−0.125 ± 14.6i". */
export interface EigenText {
  text: string
  growth: number
}

/**
 * Eigenvalues as people read them: slowest to die out first, a complex pair once. Two are a pair where one is the other's
 * conjugate to rounding.
 */
export function eigenTexts(eigenvalues: readonly Complex[]): EigenText[] {
  return eigenvalues
    .filter((value) => value.im >= 0 || !eigenvalues.some((other) => conjugate(value, other)))
    .sort((a, b) => b.re - a.re || a.im - b.im)
    .map((value) => {
      const paired = value.im !== 0 && eigenvalues.some((other) => conjugate(value, other))
      if (paired) return { text: `${figure(value.re)} ± ${figure(Math.abs(value.im))}i`, growth: value.re }
      const rotation = value.im === 0 ? '' : ` ${signedFigure(value.im)}i`
      return { text: figure(value.re) + rotation, growth: value.re }
    })
}

function conjugate(a: Complex, b: Complex): boolean {
  if (a.im === 0 || Math.sign(a.im) === Math.sign(b.im)) return false
  const size = Math.hypot(a.re, a.im)
  return Math.abs(a.re - b.re) <= 1e-6 * size && Math.abs(a.im + b.im) <= 1e-6 * size
}
