import { type CurveVertex, createTracer, gap, startVertex } from './curve.ts'
import { foldSpecials, generalisedVector } from './fold-specials.ts'
import { foldAt, turnsAt } from './fold-system.ts'
import { createJudge, type VertexJudgement } from './judge-vertex.ts'
import { type CurveStart, findCurveStarts } from './lines.ts'
import { judgeOnsetCurve } from './onset-specials.ts'
import { onsetAt, onsetAtDoubleZero } from './onset-system.ts'
import { insidePlane, type Plane } from './plane.ts'
import type { SpecialPoint } from './special-points.ts'
import { type Curve, liesOn, traceCurve } from './walk-curve.ts'

/** A curve of the map with its special points; `judged` beside its vertices on onset curves, empty on others. */
export interface FoundCurve {
  readonly kind: 'onset' | 'fold'
  readonly curve: Curve
  readonly specials: readonly SpecialPoint[]
  readonly judged: readonly (VertexJudgement | null)[]
}

/** All that was found, in the order found. */
export interface FoundCurves {
  readonly curves: FoundCurve[]
  /** Starts through which no curve could be traced (pairs of multiplicity two, for one). */
  readonly untraced: CurveStart[]
}

/** A start for the search from a special point: its onset begins or passes there, or its turning points do. */
type Start = CurveStart | { readonly z: Float64Array; readonly doubleZero: true }

/**
 * Every onset curve and curve of turning points that passes one of the lines across the plane, and those that pass a
 * special point of another: at a double zero and a zero-Hopf point both kinds meet, at a double Hopf point two onsets.
 *
 * @param onCurve  handed each curve as soon as it is known.
 */
export function findCurves(
  plane: Plane,
  options: { shouldStop?: () => boolean; onProgress?: (share: number) => void; onCurve?: (found: FoundCurve) => void },
): FoundCurves {
  const tell = options.onProgress ?? (() => undefined)
  const judge = createJudge(plane)
  const waiting: Start[] = findCurveStarts(plane, { ...options, onProgress: (share) => tell(0.5 * share) })
  const curves: FoundCurve[] = []
  const untraced: CurveStart[] = []
  let done = 0
  for (let start = waiting.shift(); start; start = waiting.shift()) {
    if (plane.frame.budget.spent()) break
    done++
    tell(0.5 + (0.5 * done) / (done + waiting.length))
    if (isKnown(curves, start)) continue
    // where two branches cross along a whole curve nothing turns
    if (!('doubleZero' in start) && start.omega === null && !turnsAt(plane, start.z)) continue
    const at = tracerAt(plane, start)
    const vertex = at && startVertex(at.tracer, at.y)
    if (!at || !vertex || gap(at.tracer, vertex.y, start.z) > 1e-5) {
      if (!('doubleZero' in start) && !untraced.some((known) => sameStart(known, start))) untraced.push(start)
      continue
    }
    const curve = traceCurve(at.tracer, vertex)
    // a point, not a curve: it touches the corner of the plane
    if (curve.vertices.length < 2) continue
    const found: FoundCurve =
      at.tracer.system.kind === 'onset'
        ? { kind: 'onset', ...judgeOnsetCurve(curve, judge) }
        : { kind: 'fold', curve, specials: foldSpecials(curve), judged: [] }
    curves.push(found)
    options.onCurve?.(found)
    waiting.push(...startsAt(found))
  }
  return { curves, untraced: untraced.filter((start) => !curves.some((found) => isBeside(found, start))) }
}

function tracerAt(plane: Plane, start: Start) {
  const made =
    'doubleZero' in start
      ? atDoubleZero(plane, start.z)
      : start.omega === null
        ? foldAt(plane, start.z)
        : onsetAt(plane, start.z, start.omega)
  return made && { tracer: createTracer(made.system), y: made.y }
}

function atDoubleZero(plane: Plane, z: Float64Array) {
  const generalised = generalisedVector(plane, z)
  return generalised && onsetAtDoubleZero(plane, z, generalised)
}

function sameStart(a: CurveStart, b: CurveStart): boolean {
  if ((a.omega === null) !== (b.omega === null)) return false
  return a.z.every((value, i) => Math.abs(value - (b.z[i] as number)) <= 1e-6)
}

/** Where a curve ends for want of a value of the model, what lies just beyond its end is no loss. */
function isBeside({ kind, curve }: FoundCurve, { z, omega }: CurveStart): boolean {
  if ((kind === 'fold') !== (omega === null)) return false
  return curve.vertices.some(({ y }) => gap(curve.tracer, y, z) < 1e-4)
}

function isKnown(curves: readonly FoundCurve[], start: Start): boolean {
  if ('doubleZero' in start) {
    return curves.some(({ kind, curve, specials }) => {
      if (kind !== 'onset') return false
      return specials.some((point) => point.kind === 'double-zero' && gap(curve.tracer, point.vertex.y, start.z) < 1e-6)
    })
  }
  const kind = start.omega === null ? 'fold' : 'onset'
  return curves.some((found) => found.kind === kind && liesOn(found.curve, start.z, start.omega))
}

/** Where other curves set out from the special points of one. */
function startsAt({ kind, curve, specials }: FoundCurve): Start[] {
  const { plane } = curve.tracer
  const pointOf = ({ y }: CurveVertex): Float64Array => y.slice(0, plane.width)
  const starts: Start[] = []
  for (const { kind: special, vertex, omega, other } of specials) {
    const z = pointOf(vertex)
    if (!insidePlane(plane, z)) continue
    if (special === 'double-hopf' && other !== null) starts.push({ z, omega: other })
    if (special === 'zero-hopf' || special === 'double-zero') {
      if (kind === 'fold') starts.push(special === 'double-zero' ? { z, doubleZero: true } : { z, omega })
      else starts.push({ z, omega: null })
    }
  }
  return starts
}
