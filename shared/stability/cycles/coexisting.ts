import type { Frame } from '../frame.ts'
import type { CycleBranch } from './cycle-branches.ts'
import { stableStretches } from './way-back.ts'
import type { WindowLine } from './window-line.ts'

/** A stretch of the control (over the range). */
export interface Stretch1 {
  readonly from: number
  readonly to: number
}

/** Shortest stretch that is told, as a share of the range. */
const shortest = 1e-7

/** Parts of the window in which a stable cycle of one of the branches exists beside the steady state. */
export function besideCycles(branches: readonly CycleBranch[], line: WindowLine): Stretch1[] {
  const all = branches.flatMap((branch) => stableStretches(branch).map(({ from, to }) => ({ from, to })))
  return merged(all.map((stretch) => clipped(stretch, line)).filter(isStretch))
}

export function clipped({ from, to }: Stretch1, line: Stretch1): Stretch1 {
  return { from: Math.max(from, line.from), to: Math.min(to, line.to) }
}

export function isStretch({ from, to }: Stretch1): boolean {
  return to - from > shortest
}

/** Overlapping stretches made one, in rising order. */
export function merged(stretches: readonly Stretch1[]): Stretch1[] {
  const out: Stretch1[] = []
  for (const each of [...stretches].sort((a, b) => a.from - b.from)) {
    const last = out[out.length - 1]
    if (last && each.from <= last.to + shortest)
      out[out.length - 1] = { from: last.from, to: Math.max(last.to, each.to) }
    else out.push(each)
  }
  return out
}

/** In the control's unit. */
export function inUnits(frame: Frame, { from, to }: Stretch1): Stretch1 {
  const unit = frame.unit[frame.n] as number
  return { from: from * unit, to: to * unit }
}
