import type { ModelSystem } from './expression.ts'

/**
 * What the stability methods may ask of a model. The one implementation is compile.ts (tapes, see there); tests may
 * hand in closed forms. All arrays are Float64Array, matrices are row-major n x n, states and parameters are in
 * document order. Nothing here allocates unless it says so; `out` is filled and nothing is returned.
 *
 * A non-finite result (log of a negative number, division by zero) is written as such; callers test with
 * `Number.isFinite` and never let it into a card.
 */
export interface CompiledModel {
  readonly system: ModelSystem
  /** Number of states. */
  readonly n: number
  /** Number of parameters. */
  readonly m: number
  /** False where the model uses abs, sign, min or max anywhere. */
  readonly smooth: boolean

  /** F(x; p). `out` has n entries. Unit: state per time. */
  rhs(x: Float64Array, p: Float64Array, out: Float64Array): void
  /** F and its Jacobian with respect to the states, dF_i/dx_j at [i*n + j], in one pass. */
  jacobian(x: Float64Array, p: Float64Array, outF: Float64Array, outJ: Float64Array): void
  /** dF/dp_k for one parameter. `out` has n entries. */
  parameterDerivative(x: Float64Array, p: Float64Array, k: number, out: Float64Array): void
  /**
   * Taylor coefficients of s -> F(x + s u; p + s w): out[k*n + i] is the coefficient of s^k in F_i, k = 0..order.
   * `u` has n entries; `w` has m entries or is null (parameters fixed). Order 1 to 5.
   * Exact to rounding (truncated Taylor arithmetic on the tape): Griewank & Walther, Evaluating Derivatives (2nd ed.), ch. 13.
   */
  jet(x: Float64Array, p: Float64Array, u: Float64Array, w: Float64Array | null, order: number, out: Float64Array): void
  /** The observed quantity and its gradient with respect to the states (n entries). Returns the value. */
  observed(x: Float64Array, p: Float64Array, outGradient: Float64Array): number
  /** Taylor coefficients of the observed quantity along x + s u (a helper may be nonlinear): out[0..order]. */
  observedJet(x: Float64Array, p: Float64Array, u: Float64Array, order: number, out: Float64Array): void
  /** Values of all helpers, in the system's order. */
  helpers(x: Float64Array, p: Float64Array, out: Float64Array): void
  /**
   * True where a kink (argument of abs or sign at zero, two arguments of min or max equal) lies within `tolerance`,
   * relative to the sizes involved, of the point. A kink elsewhere does no harm.
   */
  kinkAt(x: Float64Array, p: Float64Array, tolerance: number): boolean
  /** Lines whose value or derivative is not finite at the point; empty where all is well. */
  notFiniteLines(x: Float64Array, p: Float64Array): number[]
  /**
   * Interval enclosure of F over the box [xlo, xhi] x [plo, phi] (outward rounded). Writes lower and upper bounds;
   * -Infinity / Infinity where nothing can be said. Never NaN, never empty for a box the model is defined on.
   */
  rhsInterval(
    xlo: Float64Array,
    xhi: Float64Array,
    plo: Float64Array,
    phi: Float64Array,
    outLo: Float64Array,
    outHi: Float64Array,
  ): void
  /** Interval enclosure of the Jacobian over the box, row-major. Kinks give the convex hull of both slopes. */
  jacobianInterval(
    xlo: Float64Array,
    xhi: Float64Array,
    plo: Float64Array,
    phi: Float64Array,
    outLo: Float64Array,
    outHi: Float64Array,
  ): void
}
