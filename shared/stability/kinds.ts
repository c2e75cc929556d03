import type { SteadyState } from '#shared/model/card-document.ts'
import { onAxis, type Spectrum } from './spectrum.ts'

/**
 * The word for a steady state, from its eigenvalues.
 *
 * A zero eigenvalue makes it degenerate. Pairs on the imaginary axis and nothing else make a centre; pairs on the axis
 * beside others leave the kind to nonlinear terms: degenerate. One sign of all real parts gives node, star (one
 * repeated eigenvalue whose matrix is that number times the identity) or spiral (a complex pair takes part); both signs
 * give saddle, or saddle-focus where a complex pair takes part.
 *
 * @param jacobian  row-major n x n, to tell a star from a node with one direction.
 * Source: Strogatz, Nonlinear Dynamics and Chaos, chapter 5 (planar); the words for n > 2 are common practice, no source.
 */
export function kindOf(spectrum: Spectrum, jacobian: Float64Array): SteadyState['kind'] {
  const { re, im, n } = spectrum
  let negative = 0
  let positive = 0
  let complex = false
  let onAxisPairs = false
  for (let i = 0; i < n; i++) {
    const real = re[i] ?? 0
    const imaginary = im[i] ?? 0
    if (imaginary !== 0) complex = true
    if (onAxis(spectrum, i)) {
      if (imaginary === 0) return 'degenerate'
      onAxisPairs = true
    } else if (real < 0) negative++
    else positive++
  }
  if (onAxisPairs) return negative + positive === 0 ? 'centre' : 'degenerate'
  if (negative > 0 && positive > 0) return complex ? 'saddle-focus' : 'saddle'
  if (complex) return negative > 0 ? 'stable spiral' : 'unstable spiral'
  if (isMultipleOfIdentity(jacobian, n)) return negative > 0 ? 'stable star' : 'unstable star'
  return negative > 0 ? 'stable node' : 'unstable node'
}

/** Off-diagonal entries are compared without units, through their product with the mirror entry and one by one. */
function isMultipleOfIdentity(jacobian: Float64Array, n: number): boolean {
  if (n < 2) return false
  const first = jacobian[0] ?? 0
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      const entry = jacobian[i * n + j] ?? 0
      if (i === j ? Math.abs(entry - first) > 1e-12 * Math.abs(first) : entry !== 0) return false
    }
  }
  return true
}
