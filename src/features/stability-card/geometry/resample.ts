import { along, distance, type Point } from './points.ts'

/**
 * The line in a fixed number of steps of equal length; its ends stay exact. Two pictures of one
 * branch then have as many points, so that the browser can settle the old line into the new one.
 */
export function evenly(points: readonly Point[], count: number): Point[] {
  const first = points[0]
  const last = points.at(-1)
  if (!first || !last || points.length < 2) return [...points]
  const lengths = points.map((point, i) => (i === 0 ? 0 : distance(points[i - 1] ?? point, point)))
  const total = lengths.reduce((a, b) => a + b, 0)
  if (total === 0) return [first, last]
  const result: Point[] = [first]
  let i = 1
  let passed = 0
  for (let k = 1; k < count - 1; k++) {
    const target = (total * k) / (count - 1)
    while (i < points.length - 1 && passed + (lengths[i] ?? 0) < target) {
      passed += lengths[i] ?? 0
      i++
    }
    const a = points[i - 1]
    const b = points[i]
    const length = lengths[i] ?? 0
    if (a && b) result.push(length > 0 ? along(a, b, (target - passed) / length) : b)
  }
  result.push(last)
  return result
}
