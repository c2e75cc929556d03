import type { StabilityCard } from '#shared/model/card-document.ts'
import type { CompiledModel } from '#shared/model/compiled-model.ts'
import { createBudget } from '../budget.ts'
import { placeText, type WarningList } from '../card-warnings.ts'
import { controlOf, snapped, stateOf } from '../frame.ts'
import { type FoundCurve, findCurves } from './find-curves.ts'
import { createJudge, type Judge } from './judge-vertex.ts'
import { createPlane, enter, insidePlane, type Plane, secondOf } from './plane.ts'
import { liesInPlane } from './same-in-plane.ts'

/** The map of two parameters as the card holds it. */
export type PlaneMap = NonNullable<StabilityCard['map']>

export interface MapOptions {
  /** Asked at least every 50 ms; `true` ends the work with what there is. */
  shouldStop?: () => boolean
  /** Told as work goes on: the share done, 0 to 1. */
  onProgress?: (stage: 'map', share: number) => void
  /** Handed the map so far each time a curve was added. */
  onMap?: (map: PlaneMap) => void
}

/** Evaluations of F and its Jacobian for one map. */
const allowance = 6_000_000

/**
 * The map of a model's control and second control: curves of onsets with their verdict, curves of turning points of
 * steady states, and their special points. Curves that lie on each other in the plane (mirror images) are listed once.
 * Null, with a warning, where the model has no second control; what is missing of the map is told by warnings.
 */
export function mapOfPlane(model: CompiledModel, warnings: WarningList, options: MapOptions = {}): PlaneMap | null {
  const plane = createPlane(model, createBudget(allowance, options.shouldStop))
  if (!plane) {
    const message = 'A map needs a second control with a range: choose one and ask again.'
    warnings.add({ code: 'no-second-control', message })
    return null
  }
  const judge = createJudge(plane)
  const listed: FoundCurve[] = []
  const { curves, untraced } = findCurves(plane, {
    ...(options.shouldStop ? { shouldStop: options.shouldStop } : {}),
    onProgress: (share) => options.onProgress?.('map', share),
    onCurve: (found) => {
      if (listed.some((known) => liesInPlane(found, known))) return
      listed.push(found)
      options.onMap?.(written(plane, judge, listed))
    },
  })
  warn(plane, curves, warnings)
  for (const { z, omega } of plane.frame.budget.spent() ? [] : untraced) {
    const what = omega === null ? 'turning points' : 'onsets'
    const message = `No curve of ${what} could be followed through ${placeOf(plane, z)}.`
    warnings.add({ code: 'budget-spent', message })
  }
  return written(plane, judge, listed)
}

/** Where a point of the plane lies, in the model's own words. */
function placeOf(plane: Plane, z: Float64Array): string {
  const { system } = plane.frame.model
  const inFrame = enter(plane, z)
  const second = `${system.parameters[plane.second]?.symbol ?? ''} = ${Number(secondOf(plane, z).toPrecision(4))}`
  return `${second}, ${placeText(system, controlOf(plane.frame, inFrame), stateOf(plane.frame, inFrame))}`
}

function warn(plane: Plane, curves: readonly FoundCurve[], warnings: WarningList): void {
  for (const { curve } of curves) {
    curve.ends.forEach((end, i) => {
      const vertex = curve.vertices.at(i === 0 ? 0 : -1)
      if (!vertex) return
      if (end.kind === 'box-left') {
        const symbol = plane.frame.model.system.states[end.state]?.symbol ?? ''
        const message = `A curve of the map leaves the range of ${symbol} at ${placeOf(plane, vertex.y)}.`
        warnings.add({ code: 'branch-left-box', message })
      }
      if (end.kind === 'lost' && !plane.frame.budget.spent()) {
        const message = `A curve of the map could not be followed beyond ${placeOf(plane, vertex.y)}.`
        warnings.add({ code: 'budget-spent', message })
      }
    })
  }
  if (plane.frame.budget.spent()) {
    const message =
      'The work allowed for the map was used up: curves may be missing. Narrow the ranges of both controls.'
    warnings.add({ code: 'budget-spent', message })
  }
  const message =
    'Curves of the map were searched for on lines across it: a small closed one between them may be missing.'
  warnings.add({ code: 'searched-not-proved', message })
}

function written(plane: Plane, judge: Judge, found: readonly FoundCurve[]): PlaneMap {
  const { system } = plane.frame.model
  const pOf = (y: Float64Array): number => snapped(plane.frame, controlOf(plane.frame, y.subarray(0, plane.n + 1)))
  const curves: PlaneMap['curves'] = []
  const points: PlaneMap['points'] = []
  for (const each of found) {
    const line = each.curve.vertices.map((vertex, i) => {
      const { y } = vertex
      const place = { p: pOf(y), s: secondOf(plane, y) }
      if (each.kind === 'fold') return place
      const omega = each.curve.tracer.system.omega(y) ?? 0
      const said = each.judged[i]
      if (said) return { ...place, omega, verdict: said.verdict, operating: said.operating }
      // where the two eigenvalues have met at zero there is neither; what was not judged is not told
      return omega === 0 ? { ...place, omega, verdict: 'degenerate' as const, operating: false } : { ...place, omega }
    })
    const [first, last] = [line[0], line[line.length - 1]]
    if (first && last && !each.curve.closed && (last.s < first.s || (last.s === first.s && last.p < first.p)))
      line.reverse()
    curves.push({ kind: each.kind, closed: each.curve.closed, points: line })
    for (const special of each.specials) {
      if (!insidePlane(plane, special.vertex.y)) continue
      const place = { p: pOf(special.vertex.y), s: secondOf(plane, special.vertex.y) }
      if (points.some((known) => known.kind === special.kind && isSamePlace(plane, known, place))) continue
      const point: PlaneMap['points'][number] = { kind: special.kind, ...place }
      if (special.omega !== null) point.omega = special.omega
      if (special.kind === 'changeover' && special.omega !== null) {
        point.secondLyapunov = judge.secondLyapunov(special.vertex, special.omega)
      }
      points.push(point)
    }
  }
  const order = { onset: 0, fold: 1, 'cycle-fold': 2 } as const
  curves.sort((a, b) => order[a.kind] - order[b.kind] || compare(a.points[0], b.points[0]))
  points.sort((a, b) => compare(a, b))
  const control = system.parameters[system.control]?.symbol ?? ''
  return { control, second: system.parameters[plane.second]?.symbol ?? '', curves, points }
}

interface Place {
  readonly p: number
  readonly s: number
}

function compare(a: Place | undefined, b: Place | undefined): number {
  if (!a || !b) return 0
  return a.s - b.s || a.p - b.p
}

function isSamePlace({ frame, low, high }: Plane, a: Place, b: Place): boolean {
  return Math.abs(a.p - b.p) <= 1e-6 * (frame.high - frame.low) && Math.abs(a.s - b.s) <= 1e-6 * (high - low)
}
