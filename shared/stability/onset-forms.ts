import { type Frame, place } from './frame.ts'

/**
 * Derivatives of the scaled right-hand side in states and all parameters together, along the onset as a parameter moves.
 *
 * A direction has n + m entries: states in scaled units (frame.ts), then every parameter in units of its own size. Forms
 * are real and multilinear; B, C and D are the second, third and fourth. They come from directional jets by polarisation:
 *
 *     C(a, b, c)    = 1/4 sum over signs of e2 e3 c3(a + e2 b + e3 c)
 *     D(w, w, w, d) = 6 times the odd linear part in r of c4(w + r d), from r = ±1, ±2
 *
 * Source: Griewank & Walther, Evaluating Derivatives (2nd ed.), section 13.3.
 */
export interface OnsetForms {
  /** Model units in one unit of each parameter's entry. */
  readonly scale: Float64Array
  bilinear(a: Float64Array, b: Float64Array): Float64Array
  trilinear(a: Float64Array, b: Float64Array, c: Float64Array): Float64Array
  /** B(w, w), C(w, w, w), D(w, ...) and E(w, ...) at positions 2 to 5 of the result, from one jet of order 5. */
  powers(w: Float64Array): Float64Array[]
  /** B(w, d), C(w, w, d) and D(w, w, w, d) in one pass. */
  alongWith(w: Float64Array, d: Float64Array): { second: Float64Array; third: Float64Array; fourth: Float64Array }
}

/** Forms at the point z. */
export function createOnsetForms(frame: Frame, z: Float64Array): OnsetForms {
  const { n, model, unit, control } = frame
  const { m } = model
  const scale = Float64Array.from(model.system.parameters, (parameter, k) => {
    if (k === control) return unit[n] as number
    const width = parameter.low !== null && parameter.high !== null ? parameter.high - parameter.low : 0
    return Math.abs(parameter.value) || width || 1
  })
  const u = new Float64Array(n)
  const w = new Float64Array(m)
  const jet = new Float64Array(6 * n)

  /** Taylor coefficients of the scaled F along e: entry k n + i is the k-th of component i. */
  function along(e: Float64Array, order: number): Float64Array {
    place(frame, z)
    for (let i = 0; i < n; i++) u[i] = (e[i] as number) * (unit[i] as number)
    let moves = false
    for (let k = 0; k < m; k++) {
      w[k] = (e[n + k] as number) * (scale[k] as number)
      if (w[k] !== 0) moves = true
    }
    frame.budget.spend(1)
    model.jet(frame.x, frame.parameters, u, moves ? w : null, order, jet)
    const out = new Float64Array((order + 1) * n)
    for (let k = 0; k <= order; k++)
      for (let i = 0; i < n; i++) out[k * n + i] = (jet[k * n + i] as number) / (unit[i] as number)
    return out
  }

  const combine = (a: Float64Array, b: Float64Array, s: number): Float64Array =>
    a.map((value, i) => value + s * (b[i] as number))

  function bilinear(a: Float64Array, b: Float64Array): Float64Array {
    const out = new Float64Array(n)
    const [sizeA, sizeB] = [sizeOf(a), sizeOf(b)]
    if (sizeA === 0 || sizeB === 0) return out
    const [first, second] = [times(a, 1 / sizeA), times(b, 1 / sizeB)]
    const plus = along(combine(first, second, 1), 2)
    const minus = along(combine(first, second, -1), 2)
    const back = (sizeA * sizeB) / 2
    return out.map((_, i) => back * ((plus[2 * n + i] as number) - (minus[2 * n + i] as number)))
  }

  function trilinear(a: Float64Array, b: Float64Array, c: Float64Array): Float64Array {
    const out = new Float64Array(n)
    const sizes = [sizeOf(a), sizeOf(b), sizeOf(c)]
    if (sizes.includes(0)) return out
    const [first, second, third] = [a, b, c].map((v, i) => times(v, 1 / (sizes[i] as number))) as [
      Float64Array,
      Float64Array,
      Float64Array,
    ]
    const back = sizes.reduce((product, size) => product * size, 1) / 4
    for (const e2 of [1, -1]) {
      for (const e3 of [1, -1]) {
        const values = along(combine(combine(first, second, e2), third, e3), 3)
        for (let i = 0; i < n; i++) out[i] = (out[i] as number) + back * e2 * e3 * (values[3 * n + i] as number)
      }
    }
    return out
  }

  return {
    scale,
    bilinear,
    trilinear,
    powers(direction) {
      const values = along(direction, 5)
      const factorial = [1, 1, 2, 6, 24, 120]
      return factorial.map((factor, k) => values.slice(k * n, (k + 1) * n).map((value) => factor * value))
    },
    alongWith(direction, d) {
      const [sizeW, sizeD] = [sizeOf(direction), sizeOf(d)]
      const zero = () => new Float64Array(n)
      if (sizeW === 0 || sizeD === 0) return { second: zero(), third: zero(), fourth: zero() }
      const [base, extra] = [times(direction, 1 / sizeW), times(d, 1 / sizeD)]
      const values = [1, -1, 2, -2].map((r) => along(combine(base, extra, r), 4))
      const linear = (order: number, factor: number): Float64Array =>
        zero().map((_, i) => {
          const at = order * n + i
          const [p1, m1, p2, m2] = values.map((each) => each[at] as number) as [number, number, number, number]
          return (factor * (8 * (p1 - m1) - (p2 - m2))) / 12
        })
      return {
        second: linear(2, sizeW * sizeD),
        third: linear(3, 2 * sizeW ** 2 * sizeD),
        fourth: linear(4, 6 * sizeW ** 3 * sizeD),
      }
    },
  }
}

function sizeOf(v: Float64Array): number {
  let sum = 0
  for (const value of v) sum += value * value
  return Math.sqrt(sum)
}

function times(v: Float64Array, factor: number): Float64Array {
  return v.map((value) => factor * value)
}
