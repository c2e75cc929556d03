/**
 * The two quotients that are 0/0 at the origin and smooth there, with all their derivatives:
 *   exprel(x) = (e^x - 1)/x          and          bernoulli(z) = z/(e^z - 1)
 * (the second is the generating function of the Bernoulli numbers; rate constants of nerve models are made of it).
 *
 * Each is computed without cancellation: by its power series near 0 and by recurrence away from it; bernoulli(z) for
 * z < 0 from bernoulli(z) = bernoulli(-z) - z. Relative error of the values about 2 roundings; derivatives up to the
 * sixth are accurate to 1e-14 of the largest value that derivative takes (checked against 50-digit values).
 * Source of the series: NIST Handbook of Mathematical Functions, 24.2.1 and 25.6.2.
 */

/** Value of (e^x - 1)/x, 1 at 0. */
export function exprel(x: number): number {
  if (x === 0) return 1
  return Math.expm1(x) / x
}

/** Value of z/(e^z - 1), 1 at 0; tends to -z and to 0. */
export function bernoulli(z: number): number {
  if (z === 0) return 1
  if (z > 750) return 0
  return z / Math.expm1(z)
}

/** Highest derivative that is kept a table for: a first derivative's own expansion to fifth order, and one to spare. */
const maxOrder = 8
const work = new Float64Array(maxOrder + 1)

/** The `k`-th derivative of exprel, k = 0..8. */
export function exprelDerivative(x: number, k: number): number {
  if (k === 0) return exprel(x)
  exprelTaylor(x, k, work)
  return (work[k] as number) * (factorials[k] as number)
}

/** The `k`-th derivative of bernoulli, k = 0..8. */
export function bernoulliDerivative(z: number, k: number): number {
  if (k === 0) return bernoulli(z)
  bernoulliTaylor(z, k, work)
  return (work[k] as number) * (factorials[k] as number)
}

/** k! for k = 0..8. */
export const factorials = Float64Array.of(1, 1, 2, 6, 24, 120, 720, 5040, 40320)

/** Taylor coefficients f^(k)(x)/k!, k = 0..order (at most 8), of exprel at x. */
export function exprelTaylor(x: number, order: number, out: Float64Array): void {
  if (Math.abs(x) > 3) {
    const top = Math.exp(x)
    out[0] = Math.expm1(x) / x
    for (let k = 1; k <= order; k++) out[k] = (top / (factorials[k] as number) - (out[k - 1] as number)) / x
    return
  }
  // f^(k)(x)/k! = sum over j of x^j C(k+j, j)/(k+j+1)!, and by Kummer's transformation, for x < 0 where that
  // alternates, e^x times the sum of |x|^j/(k+1+j)!: all terms positive in both.
  const size = Math.abs(x)
  const factor = x < 0 ? Math.exp(x) : 1
  let head = 1
  for (let k = 0; k <= order; k++) {
    head /= k + 1
    let term = head
    let sum = term
    for (let j = 1; j < 40; j++) {
      term *= size / (k + j + 1)
      if (x >= 0) term *= (k + j) / j
      const next = sum + term
      if (next === sum) break
      sum = next
    }
    out[k] = factor * sum
  }
}

/** B_2j/(2j)! for j = 0..44, as (-1)^(j+1) 2 zeta(2j)/(2 pi)^(2j). */
export const evenCoefficients = makeEvenCoefficients()

function makeEvenCoefficients(): Float64Array {
  const exact = [1, 1 / 12, -1 / 720, 1 / 30240, -1 / 1209600]
  return Float64Array.from({ length: 45 }, (_, j) => {
    if (j < exact.length) return exact[j] as number
    let zeta = 0
    for (let i = 40; i >= 1; i--) zeta += i ** (-2 * j)
    return ((j % 2 === 1 ? 2 : -2) * zeta) / (2 * Math.PI) ** (2 * j)
  })
}

/**
 * Coefficients of P_k with (d/dz)^k u = (-1)^k P_k(u) for u = 1/(e^z - 1), from u' = -(u + u²):
 * P_0 = u, P_(k+1) = (u + u²) P_k'. Index is the power of u.
 */
export const decayPolynomials = makeDecayPolynomials()

function makeDecayPolynomials(): number[][] {
  const all: number[][] = [[0, 1]]
  for (let k = 0; k < maxOrder; k++) {
    const p = all[k] as number[]
    const next = new Array<number>(p.length + 1).fill(0)
    for (let i = 1; i < p.length; i++) {
      const d = i * (p[i] as number)
      next[i] = (next[i] as number) + d
      next[i + 1] = (next[i + 1] as number) + d
    }
    all.push(next)
  }
  return all
}

/** Taylor coefficients f^(k)(z)/k!, k = 0..order (at most 8), of bernoulli at z. */
export function bernoulliTaylor(z: number, order: number, out: Float64Array): void {
  const size = Math.abs(z)
  if (size < 2.5) nearTaylor(size, order, out)
  else if (size > 750) out.fill(0, 0, order + 1)
  else if (size >= 2.5) farTaylor(size, order, out)
  else out.fill(Number.NaN, 0, order + 1)
  if (z >= 0) return
  for (let k = 1; k <= order; k += 2) out[k] = -(out[k] as number)
  out[0] = (out[0] as number) - z
  if (order >= 1) out[1] = (out[1] as number) - 1
}

/** Even power series minus z/2; radius 2 pi, so 45 terms at 2.5 leave 1e-17 also in the sixth derivative. */
function nearTaylor(z: number, order: number, out: Float64Array): void {
  const terms = z < 0.3 ? 14 : z < 1 ? 24 : 45
  for (let k = 0; k <= order; k++) {
    let sum = 0
    for (let j = terms - 1; 2 * j >= k; j--) {
      // Horner in z² on c_j C(2j, k) z^(2j-k).
      sum = sum * z * z + (evenCoefficients[j] as number) * binomial(2 * j, k)
    }
    out[k] = k % 2 === 1 ? sum * z : sum
  }
  out[0] = (out[0] as number) - z / 2
  if (order >= 1) out[1] = (out[1] as number) - 0.5
}

function binomial(n: number, k: number): number {
  let result = 1
  for (let i = 1; i <= k; i++) result = (result * (n - k + i)) / i
  return result
}

function farTaylor(z: number, order: number, out: Float64Array): void {
  const u = 1 / Math.expm1(z)
  let before = 0
  for (let k = 0; k <= order; k++) {
    const p = decayPolynomials[k] as number[]
    let sum = 0
    for (let i = p.length - 1; i >= 0; i--) sum = sum * u + (p[i] as number)
    const derivative = k % 2 === 1 ? -sum : sum
    out[k] = (z * derivative + k * before) / (factorials[k] as number)
    before = derivative
  }
}
