/**
 * The implicit double-shift QR sweep on an upper Hessenberg matrix (row-major, in place).
 * Source: Golub & Van Loan, Matrix Computations (4th ed.), section 7.5.5.
 */

const epsilon = 2 ** -52

/** One implicit double-shift sweep over rows first..last. Every tenth try uses shifts that break cycles. */
export function francisStep(h: Float64Array, n: number, first: number, last: number, tries: number): void {
  let h11 = h[(last - 1) * n + last - 1] as number
  let h12 = h[(last - 1) * n + last] as number
  let h21 = h[last * n + last - 1] as number
  let h22 = h[last * n + last] as number
  if (tries % 10 === 0) {
    const bottom = tries % 20 === 0
    const corner = bottom ? last : first + 2
    const s = Math.abs(h[corner * n + corner - 1] as number) + Math.abs(h[(corner - 1) * n + corner - 2] as number)
    h11 = 0.75 * s + (h[(bottom ? last : first) * n + (bottom ? last : first)] as number)
    h12 = -0.4375 * s
    h21 = s
    h22 = h11
  }
  // The two shifts: eigenvalues of the trailing block; of a real pair the one nearer to the corner, twice.
  let r1 = 0
  let r2 = 0
  let i1 = 0
  let i2 = 0
  const unit = Math.abs(h11) + Math.abs(h12) + Math.abs(h21) + Math.abs(h22)
  if (unit > 0) {
    h11 /= unit
    h12 /= unit
    h21 /= unit
    h22 /= unit
    const middle = (h11 + h22) / 2
    const det = (h11 - middle) * (h22 - middle) - h12 * h21
    const root = Math.sqrt(Math.abs(det))
    if (det >= 0) {
      r1 = middle * unit
      r2 = r1
      i1 = root * unit
      i2 = -i1
    } else {
      r1 = (Math.abs(middle + root - h22) <= Math.abs(middle - root - h22) ? middle + root : middle - root) * unit
      r2 = r1
    }
  }
  // Start where two subdiagonals in a row are small.
  let v1 = 0
  let v2 = 0
  let v3 = 0
  let m = last - 2
  for (; m >= first; m--) {
    const hmm = h[m * n + m] as number
    const below = h[(m + 1) * n + m] as number
    const s = Math.abs(hmm - r2) + Math.abs(i2) + Math.abs(below)
    const q = below / s
    v1 = q * (h[m * n + m + 1] as number) + (hmm - r1) * ((hmm - r2) / s) - i1 * (i2 / s)
    v2 = q * (hmm + (h[(m + 1) * n + m + 1] as number) - r1 - r2)
    v3 = q * (h[(m + 2) * n + m + 1] as number)
    const sum = Math.abs(v1) + Math.abs(v2) + Math.abs(v3)
    if (sum > 0) {
      v1 /= sum
      v2 /= sum
      v3 /= sum
    }
    if (m === first) break
    const before = Math.abs(h[(m - 1) * n + m - 1] as number)
    const after = Math.abs(h[(m + 1) * n + m + 1] as number)
    const left = Math.abs(h[m * n + m - 1] as number) * (Math.abs(v2) + Math.abs(v3))
    if (left <= epsilon * Math.abs(v1) * (before + Math.abs(hmm) + after)) break
  }
  for (let k = m; k < last; k++) {
    const three = k + 2 <= last
    if (k > m) {
      v1 = h[k * n + k - 1] as number
      v2 = h[(k + 1) * n + k - 1] as number
      v3 = three ? (h[(k + 2) * n + k - 1] as number) : 0
    }
    // Householder reflection 1 - t w wᵀ with w = (1, w2, w3) that takes (v1, v2, v3) to (beta, 0, 0).
    const size = Math.max(Math.abs(v1), Math.abs(v2), Math.abs(v3))
    let t = 0
    let w2 = 0
    let w3 = 0
    let beta = v1
    if (Math.abs(v2) > 0 || Math.abs(v3) > 0) {
      const norm = size * Math.sqrt((v1 / size) ** 2 + (v2 / size) ** 2 + (v3 / size) ** 2)
      beta = v1 >= 0 ? -norm : norm
      t = (beta - v1) / beta
      w2 = v2 / (v1 - beta)
      w3 = v3 / (v1 - beta)
    }
    if (k > m) {
      h[k * n + k - 1] = beta
      h[(k + 1) * n + k - 1] = 0
      if (three) h[(k + 2) * n + k - 1] = 0
    } else if (m > first) {
      h[k * n + k - 1] = (h[k * n + k - 1] as number) * (1 - t)
    }
    if (t === 0) continue
    for (let j = k; j <= last; j++) {
      const c = three ? (h[(k + 2) * n + j] as number) : 0
      const sum = ((h[k * n + j] as number) + w2 * (h[(k + 1) * n + j] as number) + w3 * c) * t
      h[k * n + j] = (h[k * n + j] as number) - sum
      h[(k + 1) * n + j] = (h[(k + 1) * n + j] as number) - sum * w2
      if (three) h[(k + 2) * n + j] = c - sum * w3
    }
    const end = Math.min(k + 3, last)
    for (let i = first; i <= end; i++) {
      const c = three ? (h[i * n + k + 2] as number) : 0
      const sum = ((h[i * n + k] as number) + w2 * (h[i * n + k + 1] as number) + w3 * c) * t
      h[i * n + k] = (h[i * n + k] as number) - sum
      h[i * n + k + 1] = (h[i * n + k + 1] as number) - sum * w2
      if (three) h[i * n + k + 2] = c - sum * w3
    }
  }
}
