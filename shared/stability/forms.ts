import { dot, type Frame, place } from './frame.ts'

/**
 * Second and third derivatives of the scaled right-hand side along given directions, exact to rounding: Taylor
 * coefficients along single directions, and polarisation for the mixed forms.
 *
 *     D2(a, b) = (c2(a + b) - c2(a - b)) / 2,   c2 the second Taylor coefficient along a direction
 *
 * Directions are scaled vectors of n + 1 entries (states, control). They may be of very different size: the second is
 * brought to the size of the first, so that nothing cancels.
 * Source: Griewank & Walther, Evaluating Derivatives (2nd ed.), section 13.3 (tensors by directional jets).
 */
export interface Forms {
  /** D2(a, a) into `out` (n entries). */
  quadratic(z: Float64Array, a: Float64Array, out: Float64Array): void
  /** D2(a, b) into `out` (n entries). */
  bilinear(z: Float64Array, a: Float64Array, b: Float64Array, out: Float64Array): void
  /** D2(a, a) and D3(a, a, a) in one pass. */
  quadraticAndCubic(z: Float64Array, a: Float64Array, outQuadratic: Float64Array, outCubic: Float64Array): void
}

/** Makes the forms of a frame's model, with workspaces of their own. */
export function createForms(frame: Frame): Forms {
  const { n, model, unit, control } = frame
  const u = new Float64Array(n)
  const w = new Float64Array(model.m)
  const jet = new Float64Array(4 * n)
  const plus = new Float64Array(n + 1)
  const minus = new Float64Array(n + 1)
  const sumForm = new Float64Array(n)

  function along(z: Float64Array, a: Float64Array, order: number): void {
    place(frame, z)
    for (let i = 0; i < n; i++) u[i] = (a[i] as number) * (unit[i] as number)
    w[control] = (a[n] as number) * (unit[n] as number)
    frame.budget.spend(1)
    model.jet(frame.x, frame.parameters, u, a[n] === 0 ? null : w, order, jet)
  }

  function quadratic(z: Float64Array, a: Float64Array, out: Float64Array): void {
    along(z, a, 2)
    for (let i = 0; i < n; i++) out[i] = (2 * (jet[2 * n + i] as number)) / (unit[i] as number)
  }

  return {
    quadratic,
    bilinear(z, a, b, out) {
      const sizeA = Math.sqrt(dot(a, a))
      const sizeB = Math.sqrt(dot(b, b))
      if (sizeA === 0 || sizeB === 0) {
        out.fill(0)
        return
      }
      for (let i = 0; i <= n; i++) {
        const first = (a[i] as number) / sizeA
        const second = (b[i] as number) / sizeB
        plus[i] = first + second
        minus[i] = first - second
      }
      quadratic(z, plus, sumForm)
      quadratic(z, minus, out)
      const scale = (sizeA * sizeB) / 4
      for (let i = 0; i < n; i++) out[i] = scale * ((sumForm[i] as number) - (out[i] as number))
    },
    quadraticAndCubic(z, a, outQuadratic, outCubic) {
      along(z, a, 3)
      for (let i = 0; i < n; i++) {
        outQuadratic[i] = (2 * (jet[2 * n + i] as number)) / (unit[i] as number)
        outCubic[i] = (6 * (jet[3 * n + i] as number)) / (unit[i] as number)
      }
    },
  }
}
