/**
 * Singular value decomposition of small square matrices by one-sided Jacobi rotations: slow, but accurate to the last
 * digits also for small singular values and null vectors. Source: Golub & Van Loan (4th ed.), section 8.6.3.
 */

/** A = U diag(values) Vᵀ, values falling, all n x n row-major; columns of U and V belong to the values. */
export interface SingularValues {
  values: Float64Array
  u: Float64Array
  v: Float64Array
}

/** Decomposes the row-major n x n matrix `a` (untouched). Allocates its result. Null where a value is not finite. */
export function singularValues(a: Float64Array, n: number): SingularValues | null {
  let unit = 0
  for (let k = 0; k < n * n; k++) unit = Math.max(unit, Math.abs(a[k] as number))
  if (!Number.isFinite(unit)) return null
  if (unit === 0) unit = 1
  // Row i of w is column i of A in units of its largest entry (sums of squares neither overflow nor vanish); rotations
  // act on pairs of rows.
  const w = new Float64Array(n * n)
  const z = new Float64Array(n * n)
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      const value = a[i * n + j] as number
      if (Number.isNaN(value)) return null
      w[j * n + i] = value / unit
    }
    z[i * n + i] = 1
  }
  for (let sweep = 0, turned = true; turned && sweep < 60; sweep++) {
    turned = false
    for (let p = 0; p < n - 1; p++) {
      for (let q = p + 1; q < n; q++) {
        let alpha = 0
        let beta = 0
        let gamma = 0
        for (let i = 0; i < n; i++) {
          const x = w[p * n + i] as number
          const y = w[q * n + i] as number
          alpha += x * x
          beta += y * y
          gamma += x * y
        }
        if (gamma === 0 || Math.abs(gamma) <= 2 ** -53 * Math.sqrt(alpha * beta)) continue
        turned = true
        const zeta = (beta - alpha) / (2 * gamma)
        const t = (zeta >= 0 ? 1 : -1) / (Math.abs(zeta) + Math.hypot(1, zeta))
        const c = 1 / Math.hypot(1, t)
        rotate(w, p * n, q * n, n, c, c * t)
        rotate(z, p * n, q * n, n, c, c * t)
      }
    }
  }
  const norms = Array.from({ length: n }, (_, i) => Math.hypot(...w.subarray(i * n, i * n + n)))
  const order = norms.map((_, i) => i).sort((i, j) => (norms[j] as number) - (norms[i] as number))
  const result = { values: new Float64Array(n), u: new Float64Array(n * n), v: new Float64Array(n * n) }
  order.forEach((from, to) => {
    const size = norms[from] as number
    result.values[to] = size * unit
    for (let i = 0; i < n; i++) {
      result.v[i * n + to] = z[from * n + i] as number
      result.u[i * n + to] = size > 0 ? (w[from * n + i] as number) / size : 0
    }
  })
  completeBasis(result.u, result.values, n)
  return result
}

function rotate(w: Float64Array, p: number, q: number, n: number, c: number, s: number): void {
  for (let i = 0; i < n; i++) {
    const x = w[p + i] as number
    const y = w[q + i] as number
    w[p + i] = c * x - s * y
    w[q + i] = s * x + c * y
  }
}

/** Left vectors of vanishing singular values cannot be read off A v: fill them up by Gram-Schmidt on unit vectors. */
function completeBasis(u: Float64Array, values: Float64Array, n: number): void {
  const threshold = 2 ** -50 * n * (values[0] ?? 0)
  const trial = new Float64Array(n)
  for (let k = 0; k < n; k++) {
    if ((values[k] as number) > threshold) continue
    let best = 0
    for (let unit = 0; unit < n && best < 0.5; unit++) {
      trial.fill(0)
      trial[unit] = 1
      for (let pass = 0; pass < 2; pass++) {
        for (let j = 0; j < k; j++) {
          let dot = 0
          for (let i = 0; i < n; i++) dot += (trial[i] as number) * (u[i * n + j] as number)
          for (let i = 0; i < n; i++) trial[i] = (trial[i] as number) - dot * (u[i * n + j] as number)
        }
      }
      const norm = Math.hypot(...trial)
      if (norm <= best || norm < 1e-8) continue
      best = norm
      for (let i = 0; i < n; i++) u[i * n + k] = (trial[i] as number) / norm
    }
  }
}
