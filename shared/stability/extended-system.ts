import { createLu, factorInPlace, solveLu } from '#shared/numerics/linear-solve.ts'

/**
 * Newton's method on an extended system, to rounding.
 *
 * @param unknowns  start, improved in place. Entries of order one (scaled) are assumed.
 * @param fill      writes residual and row-major matrix at the unknowns; false where they are not finite.
 * @returns the largest entry of the last step as the error estimate, or why it failed.
 *
 * The residual has to be exact to rounding, the matrix need not be. Ends when steps are below 1e-14 or stop shrinking
 * below 1e-7 (an ill-conditioned point: the estimate says how well it is known).
 */
export function solveExtended(
  unknowns: Float64Array,
  fill: (unknowns: Float64Array, residual: Float64Array, matrix: Float64Array) => boolean,
): { ok: true; error: number; steps: number } | { ok: false; reason: 'not-finite' | 'no-convergence' } {
  const size = unknowns.length
  const lu = createLu(size)
  const residual = new Float64Array(size)
  let before = Number.POSITIVE_INFINITY
  for (let steps = 1; steps <= 20; steps++) {
    lu.lu.fill(0)
    if (!fill(unknowns, residual, lu.lu)) return { ok: false, reason: 'not-finite' }
    if (!factorInPlace(lu)) return { ok: false, reason: 'no-convergence' }
    solveLu(lu, residual)
    let step = 0
    for (let i = 0; i < size; i++) {
      const part = Math.abs(residual[i] as number)
      if (!(part <= step)) step = part
      unknowns[i] = (unknowns[i] as number) - (residual[i] as number)
    }
    if (!(step < 1e3)) return { ok: false, reason: 'no-convergence' }
    if (step < 1e-14) return { ok: true, error: step, steps }
    if (steps > 3 && step > 0.3 * before && step < 1e-7) return { ok: true, error: Math.max(step, before), steps }
    if (steps > 6 && step > before) return { ok: false, reason: 'no-convergence' }
    before = step
  }
  return before < 1e-7 ? { ok: true, error: before, steps: 20 } : { ok: false, reason: 'no-convergence' }
}
