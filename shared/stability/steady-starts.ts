/** Start points for Newton: the model's own start, the middle, then points spread over the box. */

import type { CompiledModel } from '#shared/model/compiled-model.ts'

/** Points beyond the start and the middle. */
const spread = 160

/**
 * The start values, the middle of the box and a low-discrepancy sequence (Kronecker's, with powers
 * of the generalised golden ratio as steps), every other point drawn on a logarithmic scale towards zero or the lower
 * end: ranges such as 0 to 1e9 hold their steady states near zero. The same points in every run.
 */
export function startPoints(model: CompiledModel): Float64Array[] {
  const { states } = model.system
  const n = states.length
  const points = [Float64Array.from(states, (state) => state.start)]
  points.push(Float64Array.from(states, (state) => state.low + 0.5 * (state.high - state.low)))
  const ratio = goldenRatio(n)
  const steps = states.map((_, j) => ratio ** -(j + 1))
  for (let k = 1; k <= spread; k++) {
    points.push(
      Float64Array.from(states, (state, j) => {
        const share = (0.5 + k * (steps[j] as number)) % 1
        if (k % 2 === 1) return state.low + share * (state.high - state.low)
        const anchor = Math.min(Math.max(0, state.low), state.high)
        const side = share < 0.5 ? state.low - anchor : state.high - anchor
        const reach = side === 0 ? (share < 0.5 ? state.high : state.low) - anchor : side
        return anchor + reach * 10 ** (-9 * ((2 * share) % 1))
      }),
    )
  }
  return points
}

/** The positive root of x^(n+1) = x + 1. */
function goldenRatio(n: number): number {
  let x = 2
  for (let i = 0; i < 60; i++) x = (1 + x) ** (1 / (n + 1))
  return x
}
