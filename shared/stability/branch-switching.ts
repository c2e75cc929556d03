import { normalise, nullVectors, type Sample } from './corrector.ts'
import { solveExtended } from './extended-system.ts'
import type { Forms } from './forms.ts'
import { distance, dot, type Frame, linearise } from './frame.ts'

/** A point where two branches of steady states cross. Tangents are unit vectors in scaled coordinates. */
export interface BranchPoint {
  readonly z: Float64Array
  readonly kind: 'transcritical' | 'pitchfork' | 'other'
  /** Tangent of the branch it was found on, in the direction of the walk. */
  readonly own: Float64Array
  /** Tangent of the other branch; null where the crossing is not a simple one. */
  readonly other: Float64Array | null
  /** True where the branch it was found on has no component along the control: it turns here and ends as a branch. */
  readonly ownTurns: boolean
  readonly otherTurns: boolean
}

/** A tangent with a smaller share of the control than this has none. */
const turning = 1e-5

/**
 * The branch point near `guess`, a sample close to it on the branch that was walked.
 *
 * Newton on F + b phi = 0, phiᵀ [F_x F_p] = 0, <phi, phi> = 1 in (x, p, phi, b), which is regular at a simple branch
 * point; b = 0 tells a true crossing from two branches that pass each other closely. Null where there is no crossing
 * within `reach`. The two tangents solve the algebraic branching equation
 * a11 α² + 2 a12 α β + a22 β² = 0, aij = phiᵀ D2(vi, vj), v1 the walked tangent, v2 the null vector across it.
 * Source: Keller 1977; Govaerts, Numerical Methods for Bifurcations of Dynamical Equilibria, sections 8.1 and 8.2.
 */
export function findBranchPoint(frame: Frame, forms: Forms, guess: Sample, reach: number): BranchPoint | null {
  const { n } = frame
  if (!linearise(frame, guess.z)) return null
  const first = nullVectors(frame, guess.t)?.left
  if (!first) return null
  const size = 2 * n + 2
  const unknowns = new Float64Array(size)
  unknowns.set(guess.z)
  unknowns.set(first, n + 1)
  const z = new Float64Array(n + 1)
  const axisA = new Float64Array(n + 1)
  const axisB = new Float64Array(n + 1)
  const form = new Float64Array(n)
  let rate = 0

  const solved = solveExtended(unknowns, (u, residual, matrix) => {
    z.set(u.subarray(0, n + 1))
    if (!linearise(frame, z)) return false
    const b = u[size - 1] as number
    let norm = -1
    rate = 0
    for (let i = 0; i < n; i++) {
      const phi = u[n + 1 + i] as number
      residual[i] = (frame.residual[i] as number) + b * phi
      norm += phi * phi
      for (let j = 0; j <= n; j++) {
        const entry = frame.derivatives[i * (n + 1) + j] as number
        rate = Math.max(rate, Math.abs(entry))
        matrix[i * size + j] = entry
        matrix[(n + j) * size + n + 1 + i] = entry
      }
      matrix[i * size + n + 1 + i] = b
      matrix[i * size + size - 1] = phi
      matrix[(size - 1) * size + n + 1 + i] = 2 * phi
    }
    residual[size - 1] = norm
    for (let j = 0; j <= n; j++) {
      let sum = 0
      for (let i = 0; i < n; i++) sum += (u[n + 1 + i] as number) * (frame.derivatives[i * (n + 1) + j] as number)
      residual[n + j] = sum
      for (let k = j; k <= n; k++) {
        axisA.fill(0)
        axisB.fill(0)
        axisA[j] = 1
        axisB[k] = 1
        if (j === k) forms.quadratic(z, axisA, form)
        else forms.bilinear(z, axisA, axisB, form)
        let second = 0
        for (let i = 0; i < n; i++) second += (u[n + 1 + i] as number) * (form[i] as number)
        matrix[(n + j) * size + k] = second
        matrix[(n + k) * size + j] = second
      }
    }
    return true
  })
  if (!solved.ok || solved.error > 1e-8) return null
  const point = unknowns.slice(0, n + 1)
  if (distance(point, guess.z) > reach) return null
  if (Math.abs(unknowns[size - 1] as number) > 1e-10 * rate) return null
  return classify(frame, forms, point, unknowns.slice(n + 1, 2 * n + 1), guess.t)
}

function classify(
  frame: Frame,
  forms: Forms,
  z: Float64Array,
  phi: Float64Array,
  walked: Float64Array,
): BranchPoint | null {
  if (!linearise(frame, z)) return null
  const across = nullVectors(frame, walked)?.right
  if (!across) return null
  // the walked tangent freed of its error: the null vector across the one across it
  const again = nullVectors(frame, across)?.right
  if (!again) return null
  const first = oriented(again, walked)
  const form = new Float64Array(frame.n)
  forms.quadratic(z, first, form)
  const a11 = dot(phi, form)
  forms.bilinear(z, first, across, form)
  const a12 = dot(phi, form)
  forms.quadratic(z, across, form)
  const a22 = dot(phi, form)
  const discriminant = a12 * a12 - a11 * a22
  const scale = a12 * a12 + Math.abs(a11 * a22)
  const none = { z, kind: 'other', own: first, other: null, ownTurns: false, otherTurns: false } as const
  if (!(discriminant > 1e-8 * scale) || scale === 0) return none
  // both roots (alpha, beta) of the quadratic, without cancellation
  const root = Math.sqrt(discriminant)
  const large = a12 >= 0 ? a12 + root : a12 - root
  const roots = [
    [-large, a11],
    [a22, -large],
  ] as const
  const tangents = roots.map(([alpha, beta]) => combine(first, across, alpha, beta))
  const [one, two] = tangents
  if (!one || !two) return none
  const ownFirst = Math.abs(dot(one, walked)) >= Math.abs(dot(two, walked))
  const own = oriented(ownFirst ? one : two, walked)
  const other = ownFirst ? two : one
  const n = frame.n
  const ownTurns = Math.abs(own[n] as number) < turning
  const otherTurns = Math.abs(other[n] as number) < turning
  const kind = ownTurns && otherTurns ? 'other' : ownTurns || otherTurns ? 'pitchfork' : 'transcritical'
  return { z, kind, own, other, ownTurns: ownTurns && !otherTurns, otherTurns: otherTurns && !ownTurns }
}

function combine(a: Float64Array, b: Float64Array, alpha: number, beta: number): Float64Array | null {
  const v = a.map((value, i) => alpha * value + beta * (b[i] as number))
  return normalise(v) ? v : null
}

function oriented(v: Float64Array, along: Float64Array): Float64Array {
  return dot(v, along) < 0 ? v.map((value) => -value) : v
}
