import type { BranchPath } from './branches.ts'
import type { Vertex } from './continuation.ts'
import { type Sample, sampleBetween } from './corrector.ts'
import { distance, type Frame } from './frame.ts'
import type { BranchHopf } from './hopf.ts'
import { onAxis, type Spectrum } from './spectrum.ts'

/**
 * Branch points at which an even number of real eigenvalues passes zero at once (two equal parts of one model): the
 * determinant does not change its sign there, so the walk does not see them. What is left of the change in the number of
 * unstable eigenvalues, after Hopf points and marked vertices, gives them away. Each becomes a marked vertex of its
 * path; the kind is "other", and no branch is switched to from here (branches beside it are found from other values).
 *
 * Returns the points, and the Hopf points with their segments counted anew.
 */
export function markRealCrossings(
  frame: Frame,
  path: BranchPath,
  hopf: readonly BranchHopf[],
): { points: Float64Array[]; hopf: BranchHopf[] } {
  const points: Float64Array[] = []
  const { vertices } = path
  let moved = [...hopf]
  for (let i = 0; i + 1 < vertices.length; i++) {
    const a = vertices[i] as Vertex
    const b = vertices[i + 1] as Vertex
    if (a.mark !== null || b.mark !== null || moved.some(({ segment }) => segment === i)) continue
    if (!clear(a.sample.spectrum) || !clear(b.sample.spectrum)) continue
    if (unstable(a.sample.spectrum) === unstable(b.sample.spectrum)) continue
    const sample = bisect(frame, a.sample, b.sample)
    if (!sample) continue
    points.push(sample.z)
    vertices.splice(i + 1, 0, { sample, mark: 'branch-point' })
    moved = moved.map((point) => (point.segment > i ? { ...point, segment: point.segment + 1 } : point))
    i++
  }
  return { points, hopf: moved }
}

function clear(s: Spectrum): boolean {
  for (let i = 0; i < s.n; i++) if (onAxis(s, i)) return false
  return true
}

function unstable(s: Spectrum): number {
  return s.re.reduce((count, re) => count + (re > 0 ? 1 : 0), 0)
}

function bisect(frame: Frame, from: Sample, to: Sample): Sample | null {
  let a = from
  let b = to
  const before = unstable(a.spectrum)
  for (let pass = 0; pass < 40 && distance(a.z, b.z) > 1e-12; pass++) {
    const half = sampleBetween(frame, a, b, 0.5)
    if (!half) break
    if (unstable(half.spectrum) === before) a = half
    else b = half
  }
  return distance(a.z, b.z) < 1e-6 ? b : null
}
