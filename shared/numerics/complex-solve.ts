/**
 * Dense linear systems, complex: LU with implicitly row-scaled partial pivoting. Real and imaginary parts are separate
 * row-major arrays. The real counterpart, with the reasons for the scaling, is linear-solve.ts.
 */

/** Workspace of a complex factorisation. Reused without allocation. */
export interface ComplexLu {
  readonly n: number
  readonly re: Float64Array
  readonly im: Float64Array
  readonly pivots: Int32Array
  readonly scale: Float64Array
  /** True where a pivot was exactly zero or the matrix not finite. */
  singular: boolean
  /** Smallest pivot relative to its row's largest entry. */
  smallestPivot: number
}

/** Makes a workspace for complex n x n systems. */
export function createComplexLu(n: number): ComplexLu {
  return {
    n,
    re: new Float64Array(n * n),
    im: new Float64Array(n * n),
    pivots: new Int32Array(n),
    scale: new Float64Array(n),
    singular: false,
    smallestPivot: 0,
  }
}

/**
 * Loads A - (re + i im) I for a real row-major `a` and factors it. Returns false where exactly singular. With `sign`
 * = -1 the matrix is (re + i im) I - A.
 */
export function factorShifted(ws: ComplexLu, a: Float64Array, re: number, im: number, sign: 1 | -1 = 1): boolean {
  const { n } = ws
  for (let i = 0; i < n * n; i++) {
    ws.re[i] = sign * (a[i] as number)
    ws.im[i] = 0
  }
  for (let i = 0; i < n; i++) {
    ws.re[i * n + i] = (ws.re[i * n + i] as number) - sign * re
    ws.im[i * n + i] = -sign * im
  }
  return factorComplexInPlace(ws)
}

/** Factors the complex matrix with parts `re` and `im` (left untouched). Returns false where exactly singular. */
export function factorComplexLu(ws: ComplexLu, re: Float64Array, im: Float64Array): boolean {
  ws.re.set(re)
  ws.im.set(im)
  return factorComplexInPlace(ws)
}

/** Factors what the caller has written into `ws.re` and `ws.im` itself. */
export function factorComplexInPlace(ws: ComplexLu): boolean {
  const { n, re, im, pivots, scale } = ws
  ws.singular = false
  ws.smallestPivot = Number.POSITIVE_INFINITY
  for (let i = 0; i < n; i++) {
    let largest = 0
    for (let j = 0; j < n; j++) {
      const size = Math.abs(re[i * n + j] as number) + Math.abs(im[i * n + j] as number)
      if (size > largest) largest = size
      else if (Number.isNaN(size)) largest = Number.POSITIVE_INFINITY
    }
    if (largest === 0 || largest === Number.POSITIVE_INFINITY) ws.singular = true
    scale[i] = largest === 0 ? 0 : 1 / largest
  }
  for (let k = 0; k < n; k++) {
    let best = -1
    let row = k
    for (let i = k; i < n; i++) {
      const size = (Math.abs(re[i * n + k] as number) + Math.abs(im[i * n + k] as number)) * (scale[i] as number)
      if (size > best) {
        best = size
        row = i
      }
    }
    pivots[k] = row
    if (row !== k) {
      for (let j = 0; j < n; j++) {
        const tr = re[k * n + j] as number
        re[k * n + j] = re[row * n + j] as number
        re[row * n + j] = tr
        const ti = im[k * n + j] as number
        im[k * n + j] = im[row * n + j] as number
        im[row * n + j] = ti
      }
      scale[row] = scale[k] as number
    }
    if (best < ws.smallestPivot) ws.smallestPivot = best
    const pr = re[k * n + k] as number
    const pi = im[k * n + k] as number
    if (!(Math.abs(pr) + Math.abs(pi) > 0)) {
      ws.singular = true
      continue
    }
    for (let i = k + 1; i < n; i++) {
      const ar = re[i * n + k] as number
      const ai = im[i * n + k] as number
      if (ar === 0 && ai === 0) continue
      // Smith's quotient: no overflow for large or small pivots.
      let fr: number
      let fi: number
      if (Math.abs(pr) >= Math.abs(pi)) {
        const t = pi / pr
        const d = pr + pi * t
        fr = (ar + ai * t) / d
        fi = (ai - ar * t) / d
      } else {
        const t = pr / pi
        const d = pr * t + pi
        fr = (ar * t + ai) / d
        fi = (ai * t - ar) / d
      }
      re[i * n + k] = fr
      im[i * n + k] = fi
      for (let j = k + 1; j < n; j++) {
        const ur = re[k * n + j] as number
        const ui = im[k * n + j] as number
        re[i * n + j] = (re[i * n + j] as number) - (fr * ur - fi * ui)
        im[i * n + j] = (im[i * n + j] as number) - (fr * ui + fi * ur)
      }
    }
  }
  if (ws.singular) ws.smallestPivot = 0
  return !ws.singular
}

/** Lifts vanishing pivots as `liftZeroPivots` of linear-solve.ts does. */
export function liftZeroComplexPivots(ws: ComplexLu, relative: number, absolute: number): void {
  const { n, re, im, scale } = ws
  for (let k = 0; k < n; k++) {
    const floor = (scale[k] as number) > 0 ? relative / (scale[k] as number) : absolute
    if (Math.abs(re[k * n + k] as number) + Math.abs(im[k * n + k] as number) >= floor) continue
    re[k * n + k] = floor
    im[k * n + k] = 0
  }
  ws.singular = false
}

/** Divides the complex number at index i of (br, bi) by (dr, di). */
function divideAt(br: Float64Array, bi: Float64Array, i: number, dr: number, di: number): void {
  const ar = br[i] as number
  const ai = bi[i] as number
  if (Math.abs(dr) >= Math.abs(di)) {
    const t = di / dr
    const d = dr + di * t
    br[i] = (ar + ai * t) / d
    bi[i] = (ai - ar * t) / d
  } else {
    const t = dr / di
    const d = dr * t + di
    br[i] = (ar * t + ai) / d
    bi[i] = (ai * t - ar) / d
  }
}

function exchange(b: Float64Array, i: number, j: number): void {
  const t = b[i] as number
  b[i] = b[j] as number
  b[j] = t
}

/** Solves A x = b in place of (`br`, `bi`). */
export function solveComplexLu(ws: ComplexLu, br: Float64Array, bi: Float64Array): void {
  const { n, re, im, pivots } = ws
  for (let k = 0; k < n; k++) {
    const row = pivots[k] as number
    if (row === k) continue
    exchange(br, k, row)
    exchange(bi, k, row)
  }
  for (let i = 1; i < n; i++) {
    let sr = br[i] as number
    let si = bi[i] as number
    for (let j = 0; j < i; j++) {
      const lr = re[i * n + j] as number
      const li = im[i * n + j] as number
      sr -= lr * (br[j] as number) - li * (bi[j] as number)
      si -= lr * (bi[j] as number) + li * (br[j] as number)
    }
    br[i] = sr
    bi[i] = si
  }
  for (let i = n - 1; i >= 0; i--) {
    let sr = br[i] as number
    let si = bi[i] as number
    for (let j = i + 1; j < n; j++) {
      const ur = re[i * n + j] as number
      const ui = im[i * n + j] as number
      sr -= ur * (br[j] as number) - ui * (bi[j] as number)
      si -= ur * (bi[j] as number) + ui * (br[j] as number)
    }
    br[i] = sr
    bi[i] = si
    divideAt(br, bi, i, re[i * n + i] as number, im[i * n + i] as number)
  }
}

/** Solves Aᴴ x = b (conjugate transpose) in place of (`br`, `bi`). */
export function solveComplexLuAdjoint(ws: ComplexLu, br: Float64Array, bi: Float64Array): void {
  const { n, re, im, pivots } = ws
  for (let i = 0; i < n; i++) {
    let sr = br[i] as number
    let si = bi[i] as number
    for (let j = 0; j < i; j++) {
      const ur = re[j * n + i] as number
      const ui = -(im[j * n + i] as number)
      sr -= ur * (br[j] as number) - ui * (bi[j] as number)
      si -= ur * (bi[j] as number) + ui * (br[j] as number)
    }
    br[i] = sr
    bi[i] = si
    divideAt(br, bi, i, re[i * n + i] as number, -(im[i * n + i] as number))
  }
  for (let i = n - 2; i >= 0; i--) {
    let sr = br[i] as number
    let si = bi[i] as number
    for (let j = i + 1; j < n; j++) {
      const lr = re[j * n + i] as number
      const li = -(im[j * n + i] as number)
      sr -= lr * (br[j] as number) - li * (bi[j] as number)
      si -= lr * (bi[j] as number) + li * (br[j] as number)
    }
    br[i] = sr
    bi[i] = si
  }
  for (let k = n - 1; k >= 0; k--) {
    const row = pivots[k] as number
    if (row === k) continue
    exchange(br, k, row)
    exchange(bi, k, row)
  }
}
