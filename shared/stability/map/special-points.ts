import { type CurveVertex, gap, vertexBetween } from './curve.ts'
import type { Curve } from './walk-curve.ts'

/** Special points of the map. */
export type SpecialKind = 'changeover' | 'zero-hopf' | 'double-zero' | 'double-hopf' | 'cusp'

/** A special point on a curve: `vertex` is one of the curve's vertices. */
export interface SpecialPoint {
  readonly kind: SpecialKind
  readonly vertex: CurveVertex
  /** Angular frequency of the onset, or of the other pair of a double Hopf; null where there is none. */
  readonly omega: number | null
  readonly other: number | null
}

/** A test function along a curve: zero at special points; null where it has no value. */
export type TestFunction = (vertex: CurveVertex) => number | null

/**
 * The zero of a test function between two neighbours with values of opposite sign, by false position with halving
 * (Illinois), to rounding. Null where the sign changes through a pole or a jump: there the value does not shrink.
 * Source: Dowell & Jarratt 1971.
 */
export function rootBetween(
  curve: Curve,
  a: CurveVertex,
  b: CurveVertex,
  values: { a: number; b: number },
  test: TestFunction,
): CurveVertex | null {
  let [low, high] = [0, 1]
  let [valueLow, valueHigh] = [values.a, values.b]
  const least = Math.min(Math.abs(values.a), Math.abs(values.b))
  const length = gap(curve.tracer, a.y, b.y)
  let best: { vertex: CurveVertex; value: number } | null = null
  for (let pass = 0; pass < 60; pass++) {
    const share = valueLow === valueHigh ? 0.5 * (low + high) : low - (valueLow * (high - low)) / (valueHigh - valueLow)
    // a share at an end would be that end again
    const s = Math.min(high - 1e-3 * (high - low), Math.max(low + 1e-3 * (high - low), share))
    const vertex = vertexBetween(curve.tracer, a, b, pass > 40 ? 0.5 * (low + high) : s)
    const value = vertex && test(vertex)
    if (!vertex || value === null || !Number.isFinite(value)) break
    if (!best || Math.abs(value) < Math.abs(best.value)) best = { vertex, value }
    if (value === 0 || (high - low) * length < 1e-14) break
    const at = pass > 40 ? 0.5 * (low + high) : s
    if (value > 0 === valueLow > 0) {
      if (at - low < 1e-12 && pass > 3) break
      low = at
      valueLow = value
      valueHigh /= 2
    } else {
      if (high - at < 1e-12 && pass > 3) break
      high = at
      valueHigh = value
      valueLow /= 2
    }
  }
  return best && Math.abs(best.value) <= 1e-5 * least ? best.vertex : null
}

/**
 * Vertices at which a test function is zero, found or placed on the curve (new ones are put in between). `noise` is the
 * size below which a value is rounding: a vertex that happens to lie on a zero is that zero.
 */
export function zerosAlong(curve: Curve, test: TestFunction, noise: (vertex: CurveVertex) => number): CurveVertex[] {
  const { vertices } = curve
  const found: CurveVertex[] = []
  const signOf = (vertex: CurveVertex | undefined): { value: number; sign: number } => {
    const value = vertex ? test(vertex) : null
    if (!vertex || value === null || Math.abs(value) <= noise(vertex)) return { value: 0, sign: 0 }
    return { value, sign: Math.sign(value) }
  }
  let before: { index: number; value: number; sign: number } | null = null
  // one round more on a closed curve: from the last vertex to the first
  for (let i = 0; i < vertices.length + (curve.closed ? 1 : 0); i++) {
    const vertex = vertices[i % vertices.length]
    if (curve.tracer.plane.frame.budget.spent()) break
    const here = signOf(vertex)
    if (here.sign === 0) continue
    if (before && before.sign !== here.sign) {
      const [a, b] = [vertices[before.index], vertices[i % vertices.length]]
      if (i === before.index + 2) {
        const middle = vertices[i - 1]
        if (middle) found.push(middle)
      } else if (i === before.index + 1 && a && b) {
        const root = rootBetween(curve, a, b, { a: before.value, b: here.value }, test)
        if (root) {
          vertices.splice(i, 0, root)
          found.push(root)
          i++
        }
      }
    }
    before = { index: i, ...here }
  }
  return found
}

/** Puts vertices a thousandth of box and ranges before and after a vertex, so that what changes there is drawn sharp. */
export function sharpen(curve: Curve, at: CurveVertex): void {
  const { vertices, tracer } = curve
  for (const way of [1, 0]) {
    const index = vertices.indexOf(at)
    const [a, b] = [vertices[index - 1 + way], vertices[index + way]]
    if (index < 0 || !a || !b) continue
    const length = gap(tracer, a.y, b.y)
    if (length < 3e-3) continue
    const between = vertexBetween(tracer, a, b, way === 1 ? 1e-3 / length : 1 - 1e-3 / length)
    if (between) vertices.splice(index + way, 0, between)
  }
}
