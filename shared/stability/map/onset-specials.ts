import { besidePair, pairOnAxis, pairTest, realTest } from './beside-the-pair.ts'
import { type CurveVertex, vertexBetween } from './curve.ts'
import type { Judge, VertexJudgement } from './judge-vertex.ts'
import { rootBetween, type SpecialPoint, sharpen, zerosAlong } from './special-points.ts'
import type { Curve } from './walk-curve.ts'

/** An onset curve with its special points and what is said of each vertex (null where nothing can be). */
export interface JudgedCurve {
  readonly curve: Curve
  readonly specials: SpecialPoint[]
  readonly judged: (VertexJudgement | null)[]
}

/** Special points of an onset curve, each placed among its vertices; judges every vertex. */
export function judgeOnsetCurve(curve: Curve, judge: Judge): JudgedCurve {
  const { plane, system } = curve.tracer
  const omegaAt = ({ y }: CurveVertex): number => system.omega(y) ?? 0
  const specials: SpecialPoint[] = []
  curve.ends.forEach((end, i) => {
    const vertex = curve.vertices.at(i === 0 ? 0 : -1)
    if (end.kind === 'double-zero' && vertex) specials.push({ kind: 'double-zero', vertex, omega: null, other: null })
  })
  const rest = (vertex: CurveVertex) => besidePair(plane, vertex.y, omegaAt(vertex))
  const noise = (vertex: CurveVertex): number => 1e-11 * (rest(vertex)?.size ?? 0)
  if (plane.n > 2) {
    const real = (vertex: CurveVertex): number | null => {
      const others = rest(vertex)
      return others && realTest(others)
    }
    for (const vertex of zerosAlong(curve, real, noise)) {
      specials.push({ kind: 'zero-hopf', vertex, omega: omegaAt(vertex), other: null })
    }
  }
  if (plane.n > 3) {
    const pair = (vertex: CurveVertex): number | null => {
      const others = rest(vertex)
      return others && pairTest(others)
    }
    for (const vertex of zerosAlong(curve, pair, noise)) {
      const others = rest(vertex)
      const other = others && pairOnAxis(others)
      if (other !== null) specials.push({ kind: 'double-hopf', vertex, omega: omegaAt(vertex), other })
    }
  }
  for (const { kind, vertex } of specials) if (kind !== 'double-zero') sharpen(curve, vertex)
  const changeovers = findChangeovers(curve, judge, new Set(specials.map(({ vertex }) => vertex)))
  for (const vertex of changeovers) sharpen(curve, vertex)
  specials.push(...changeovers.map((vertex) => special(vertex, omegaAt(vertex))))
  const known = new Set(changeovers)
  const judged = curve.vertices.map((vertex) => {
    const said = judge.judge(vertex, omegaAt(vertex))
    // located to rounding: whatever is left of the cubic there is rounding
    return said && known.has(vertex) ? { ...said, verdict: 'degenerate' as const } : said
  })
  return { curve, specials, judged }
}

function special(vertex: CurveVertex, omega: number): SpecialPoint {
  return { kind: 'changeover', vertex, omega, other: null }
}

/**
 * Points at which the cubic coefficient passes through zero. Across other special points nothing is concluded: through
 * infinity, as at a zero-Hopf point, is no changeover. Two close together are met where the values on both sides point
 * through zero.
 */
function findChangeovers(curve: Curve, judge: Judge, apart: ReadonlySet<CurveVertex>): CurveVertex[] {
  const { tracer, vertices, closed } = curve
  const test = (vertex: CurveVertex): number | null => {
    if (apart.has(vertex)) return null
    return judge.firstLyapunov(vertex, tracer.system.omega(vertex.y) ?? 0)
  }
  const known: Valued[] = vertices.map((vertex) => ({ vertex, value: test(vertex) }))
  const chain: Valued[] = []
  known.forEach((here, i) => {
    chain.push(here)
    const dip = dipBetween(curve, known.slice(Math.max(0, i - 1), i + 3), i > 0, test)
    if (dip) chain.push(dip)
  })
  const found: CurveVertex[] = []
  const rich: CurveVertex[] = []
  const around = (i: number): Valued | undefined => (closed ? chain[(i + chain.length) % chain.length] : chain[i])
  chain.forEach((a, i) => {
    rich.push(a.vertex)
    const [before, b] = [around(i - 1), around(i + 1)]
    if (a.value === null) return
    if (isRounding(a.value, before, b)) {
      // a vertex that lies on the zero itself, perhaps at the end of the range
      const passes = before && b ? before.value && b.value && before.value > 0 !== b.value > 0 : true
      if (passes) found.push(a.vertex)
      return
    }
    if (!b?.value || a.value > 0 === b.value > 0 || isRounding(b.value, a, around(i + 2))) return
    const root = rootBetween(curve, a.vertex, b.vertex, { a: a.value, b: b.value }, test)
    if (!root) return
    rich.push(root)
    found.push(root)
  })
  vertices.splice(0, vertices.length, ...rich)
  return found
}

interface Valued {
  readonly vertex: CurveVertex
  readonly value: number | null
}

/** True where a value is nothing beside that of a neighbour. */
function isRounding(value: number, before: Valued | undefined, after: Valued | undefined): boolean {
  return Math.abs(value) <= 1e-10 * Math.max(Math.abs(before?.value ?? 0), Math.abs(after?.value ?? 0))
}

/** A point between the middle two of four neighbours of one sign at which the sign is the other one; null as a rule. */
function dipBetween(
  curve: Curve,
  four: readonly Valued[],
  whole: boolean,
  test: (v: CurveVertex) => number | null,
): Valued | null {
  const [before, a, b, after] = four
  if (!whole || !before?.value || !a?.value || !b?.value || !after?.value) return null
  const sign = Math.sign(a.value)
  if ([before, b, after].some(({ value }) => Math.sign(value ?? 0) !== sign)) return null
  // straight on from both sides the value would pass zero before the other end
  if ((2 * a.value - before.value) * sign >= 0 && (2 * b.value - after.value) * sign >= 0) return null
  for (const share of [0.5, 0.25, 0.75]) {
    const vertex = vertexBetween(curve.tracer, a.vertex, b.vertex, share)
    const value = vertex && test(vertex)
    if (vertex && value !== null && value * sign < 0) return { vertex, value }
  }
  return null
}
