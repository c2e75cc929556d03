import type { RunningWindow } from '#shared/model/card-document.ts'
import { findOnPaths } from '../branches.ts'
import type { Vertex } from '../continuation.ts'
import type { Frame } from '../frame.ts'
import type { WindowLists } from '../window.ts'
import type { SteadyNear } from './homoclinic.ts'
import { between } from './steady-at.ts'

/** The steady states of the window, as one line from its lower to its upper end. Controls are over the range. */
export interface WindowLine {
  readonly from: number
  readonly to: number
  /** The steady state at p in [from, to], or null where it cannot be computed (a fold's own p). */
  at(p: number): SteadyNear | null
  /** The last points of the line at its two ends (scaled). */
  readonly ends: { readonly low: Float64Array; readonly high: Float64Array }
}

/** Follows the branch through the steady state `z` over the window. Null where `z` is on no branch. */
export function windowLine(
  frame: Frame,
  lists: WindowLists,
  window: RunningWindow,
  z: Float64Array,
): WindowLine | null {
  const { n } = frame
  const unit = frame.unit[n] as number
  const position = findOnPaths(frame, lists.paths, z)
  if (!position) return null
  const { vertices, ends } = position.path
  const closed = ends.some(({ kind }) => kind === 'closed')
  const from = window.from / unit
  const to = window.to / unit
  const line: Float64Array[] = [z]
  const slack = 1e-9
  for (const direction of [1, -1]) {
    let at = direction === 1 ? position.segment + 1 : position.segment
    let before = z[n] as number
    let sense = 0
    for (let count = 0; count < vertices.length; count++) {
      const next = (vertices[at] as Vertex).sample.z
      const p = next[n] as number
      // a stable stretch has no turning point: the control runs one way
      if (sense !== 0 && (p - before) * sense < -slack) break
      if (Math.abs(p - before) > slack) sense = Math.sign(p - before)
      line.push(next)
      before = p
      if (p <= from + slack || p >= to - slack) break
      at += direction
      if (at < 0 || at >= vertices.length) {
        if (!closed) break
        at = at < 0 ? vertices.length - 2 : 1
      }
    }
  }
  line.sort((a, b) => (a[n] as number) - (b[n] as number))
  const nearestTo = (p: number): Float64Array =>
    line.reduce((best, each) => (Math.abs((each[n] as number) - p) < Math.abs((best[n] as number) - p) ? each : best))
  return {
    from,
    to,
    ends: { low: nearestTo(from), high: nearestTo(to) },
    at(p) {
      for (let i = 0; i + 1 < line.length; i++) {
        const near = between(frame, line[i] as Float64Array, line[i + 1] as Float64Array, p)
        if (near) return near
      }
      return null
    },
  }
}
