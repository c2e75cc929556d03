import type { CurveVertex } from './curve.ts'
import type { FoundCurve } from './find-curves.ts'

/** Points of a curve that are compared. */
const compared = 12
/** Distance in the plane, as a share of the ranges, below which curves lie on each other. */
const tolerance = 1e-5

/**
 * True where curve `a` lies on curve `b` in the plane of the two controls, with the same frequency and the same verdict
 * at the points compared: mirror images of each other, as a rule.
 */
export function liesInPlane(a: FoundCurve, b: FoundCurve): boolean {
  if (a.kind !== b.kind || a.curve.closed !== b.curve.closed) return false
  const { vertices, tracer } = a.curve
  const step = Math.max(1, Math.floor(vertices.length / compared))
  for (let i = 0; i < vertices.length; i += step) {
    const vertex = vertices[i] as CurveVertex
    const at = nearest(b, vertex)
    if (!at) return false
    const said = a.judged[i]
    const beside = [b.judged[at.segment], b.judged[(at.segment + 1) % b.curve.vertices.length]]
    const decided = (judged: (typeof beside)[number]): string => (judged ? `${judged.operating} ${judged.verdict}` : '')
    if (said && said.verdict !== 'degenerate' && !beside.some((other) => decided(other) === decided(said))) return false
    const omega = tracer.system.omega(vertex.y)
    if (omega !== null && Math.abs(omega - at.omega) > 1e-3 * omega + 1e-3 * Math.abs(at.omega)) return false
  }
  return true
}

/** Where the other curve, a cubic between its vertices, passes a point of the plane within the tolerance. */
function nearest(found: FoundCurve, vertex: CurveVertex): { segment: number; omega: number } | null {
  const { vertices, closed, tracer } = found.curve
  const { n } = tracer.plane
  const at = (y: Float64Array, k: number): number => y[n + k] as number
  const last = closed ? vertices.length : vertices.length - 1
  for (let segment = 0; segment < last; segment++) {
    const a = vertices[segment] as CurveVertex
    const b = vertices[(segment + 1) % vertices.length] as CurveVertex
    let length = 0
    for (let i = 0; i < tracer.plane.width; i++) length += ((b.y[i] as number) - (a.y[i] as number)) ** 2
    length = Math.sqrt(length)
    const apart = Math.hypot(at(vertex.y, 0) - at(a.y, 0), at(vertex.y, 1) - at(a.y, 1))
    if (apart > 1.5 * length + tolerance) continue
    const distance = (s: number): number =>
      Math.hypot(...[0, 1].map((k) => cubic(a, b, length, n + k, s) - at(vertex.y, k)))
    // the distance has one minimum on so short a piece: golden section
    let [low, high] = [0, 1]
    for (let pass = 0; pass < 40; pass++) {
      const [left, right] = [high - 0.618 * (high - low), low + 0.618 * (high - low)]
      if (distance(left) < distance(right)) high = right
      else low = left
    }
    const s = 0.5 * (low + high)
    if (Math.min(distance(s), distance(0), distance(1)) > tolerance) continue
    const omega = (1 - s) * (tracer.system.omega(a.y) ?? 0) + s * (tracer.system.omega(b.y) ?? 0)
    return { segment, omega }
  }
  return null
}

function cubic(a: CurveVertex, b: CurveVertex, length: number, i: number, s: number): number {
  const h01 = s * s * (3 - 2 * s)
  const slopeA = length * (a.t[i] as number) * s * (1 - s) * (1 - s)
  const slopeB = length * (b.t[i] as number) * s * s * (s - 1)
  return (1 - h01) * (a.y[i] as number) + h01 * (b.y[i] as number) + slopeA + slopeB
}
