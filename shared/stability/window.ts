import type { HopfPoint, RunningWindow } from '#shared/model/card-document.ts'
import { type BranchPath, findOnPaths } from './branches.ts'
import type { Vertex, WalkEnd } from './continuation.ts'
import { controlOf, type Frame, snapped } from './frame.ts'
import type { BranchHopf } from './hopf.ts'
import { isStable } from './spectrum.ts'

/** A Hopf point of the card with its position in the card's list. */
export interface ListedHopf {
  readonly point: BranchHopf
  readonly card: HopfPoint
  readonly path: BranchPath
  readonly index: number
}

/** What the window needs to know of the card's lists. */
export interface WindowLists {
  readonly paths: readonly BranchPath[]
  readonly hopf: readonly ListedHopf[]
  /** Position of a vertex in the card's `folds` or `branchPoints`; -1 where it is not listed. */
  foldIndex(z: Float64Array): number
  branchPointIndex(z: Float64Array): number
}

type End = RunningWindow['low']

/**
 * The window around the steady state at `z` (stable, at the control's own value): the branch through it is followed in
 * both directions to where its stability ends. Null where z lies on no branch.
 */
export function windowAround(frame: Frame, lists: WindowLists, z: Float64Array): RunningWindow | null {
  const position = findOnPaths(frame, lists.paths, z)
  if (!position) return null
  const { path, segment } = position
  const a = (path.vertices[segment] as Vertex).sample
  const b = (path.vertices[segment + 1] as Vertex).sample
  const share = shareOf(z, a.z, b.z)
  const forward = follow(frame, lists, path, segment, share, 1)
  const backward = follow(frame, lists, path, segment, share, -1)
  const rising = (b.z[frame.n] as number) >= (a.z[frame.n] as number)
  const [low, high] = rising ? [backward, forward] : [forward, backward]
  return { branch: path.id, from: low.p, to: high.p, low: low.end, high: high.end }
}

/** Position of z along the chord from a to b, 0 to 1. */
function shareOf(z: Float64Array, a: Float64Array, b: Float64Array): number {
  let along = 0
  let length = 0
  for (let i = 0; i < z.length; i++) {
    const chord = (b[i] as number) - (a[i] as number)
    along += ((z[i] as number) - (a[i] as number)) * chord
    length += chord * chord
  }
  return length > 0 ? along / length : 0
}

function follow(
  frame: Frame,
  lists: WindowLists,
  path: BranchPath,
  segment: number,
  share: number,
  direction: 1 | -1,
): { p: number; end: End } {
  const { vertices } = path
  const closed = path.ends.some((end) => end.kind === 'closed')
  let at = segment
  for (let count = 0; count < vertices.length; count++) {
    const onset = firstOnset(lists, path, at, direction, count === 0 ? share : null)
    if (onset) {
      const end: End = { kind: 'onset', index: onset.index, verdict: onset.card.verdict }
      return { p: onset.card.p, end }
    }
    const next = direction === 1 ? at + 1 : at
    const vertex = vertices[next] as Vertex
    const stop = stopAt(lists, vertex, vertices[next + direction])
    if (stop === 'unexplained') {
      // stability was lost on the way here, at a point that could not be located: the last stable one is the safe one
      const before = vertices[next - direction] as Vertex
      return { p: edgeOf(frame, before), end: { kind: 'branch-point' } }
    }
    if (stop) return { p: edgeOf(frame, vertex), end: stop }
    const last = next === 0 || next === vertices.length - 1
    if (last && !closed) return { p: edgeOf(frame, vertex), end: endOf(lists, path, direction, vertex) }
    at = last ? (direction === 1 ? 0 : vertices.length - 2) : at + direction
  }
  return { p: edgeOf(frame, vertices[segment] as Vertex), end: { kind: 'range-end' } }
}

/** The first Hopf point met on a segment in one direction, beyond `share` where the walk sets out in it. */
function firstOnset(
  lists: WindowLists,
  path: BranchPath,
  segment: number,
  direction: 1 | -1,
  share: number | null,
): ListedHopf | null {
  const a = (path.vertices[segment] as Vertex).sample.z
  const b = (path.vertices[segment + 1] as Vertex).sample.z
  let first: ListedHopf | null = null
  let nearest = Number.POSITIVE_INFINITY
  for (const listed of lists.hopf) {
    if (listed.path !== path || listed.point.segment !== segment) continue
    const at = shareOf(listed.point.sample.z, a, b)
    const ahead = direction * (at - (share ?? (direction === 1 ? -1 : 2)))
    if (ahead < 0 || ahead >= nearest) continue
    nearest = ahead
    first = listed
  }
  return first
}

/** Control value of a vertex; the ends of the range exactly, as the document has them. */
function edgeOf(frame: Frame, vertex: Vertex): number {
  return snapped(frame, controlOf(frame, vertex.sample.z))
}

/** What ends the stable stretch at a vertex, or null where it goes on. */
function stopAt(lists: WindowLists, vertex: Vertex, beyond: Vertex | undefined): End | 'unexplained' | null {
  const { z, spectrum } = vertex.sample
  if (vertex.mark === 'fold') return indexed('fold', lists.foldIndex(z))
  if (vertex.mark === 'branch-point') {
    return beyond && isStable(beyond.sample.spectrum) ? null : indexed('branch-point', lists.branchPointIndex(z))
  }
  if (isStable(spectrum)) return null
  const index = lists.branchPointIndex(z)
  return index >= 0 ? { kind: 'branch-point', index } : 'unexplained'
}

function indexed(kind: 'fold' | 'branch-point', index: number): End {
  return index >= 0 ? { kind, index } : { kind }
}

function endOf(lists: WindowLists, path: BranchPath, direction: 1 | -1, vertex: Vertex): End {
  const end: WalkEnd = path.ends[direction === 1 ? 1 : 0]
  if (end.kind === 'range-end') return { kind: 'range-end' }
  if (end.kind === 'branch-point') return indexed('branch-point', lists.branchPointIndex(vertex.sample.z))
  // a walk that could not go on (not finite, no budget) knows nothing beyond: the safe reading is the box's
  return { kind: 'box-left' }
}
