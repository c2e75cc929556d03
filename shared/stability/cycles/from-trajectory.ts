import { degree } from '#shared/numerics/gauss-collocation.ts'
import { uniformMesh, valueAt } from '#shared/numerics/mesh.ts'
import type { Frame } from '../frame.ts'
import { type CycleAt, cycleAt } from './branch-point.ts'
import { type Cycle, sizeOf } from './cycle.ts'
import { type CycleSpace, controlRow, correctCycle } from './cycle-system.ts'
import { remeshed } from './walk-cycles.ts'

/** One accepted step of an integration: time, state and slope, in the model's units. */
export interface Sample {
  readonly t: number
  readonly y: Float64Array
  readonly dy: Float64Array
}

/** State at time t between two samples, by the cubic through both with their slopes. */
export function interpolated(a: Sample, b: Sample, t: number): Float64Array {
  const h = b.t - a.t
  const s = (t - a.t) / h
  const h00 = (1 + 2 * s) * (1 - s) * (1 - s)
  const h10 = s * (1 - s) * (1 - s) * h
  const h01 = s * s * (3 - 2 * s)
  const h11 = s * s * (s - 1) * h
  return a.y.map(
    (value, i) => h00 * value + h10 * (a.dy[i] as number) + h01 * (b.y[i] as number) + h11 * (b.dy[i] as number),
  )
}

/**
 * The cycle that a nearly closed piece of a trajectory, from time `from` to `to`, lies next to: mesh by the steps of the
 * integration (which are short where the motion is quick), gap spread over the period, then Newton's method at this
 * control value. Null where there is none within a tenth of its size.
 */
export function cycleFromTrajectory(
  space: CycleSpace,
  samples: readonly Sample[],
  from: number,
  to: number,
  p: number,
): CycleAt | null {
  const { frame, n } = space
  const inside = samples.filter(({ t }) => t > from && t < to)
  if (inside.length < 3) return null
  const marks = [from, ...inside.map(({ t }) => t), to]
  const count = Math.min(60, Math.max(24, Math.round(inside.length / 2)))
  const mesh = new Float64Array(count + 1)
  for (let j = 1; j < count; j++) {
    const at = (j / count) * (marks.length - 1)
    const k = Math.floor(at)
    const t = (marks[k] as number) + (at - k) * ((marks[k + 1] as number) - (marks[k] as number))
    // half by steps, half by time: no interval may become very long
    mesh[j] = 0.7 * ((t - from) / (to - from)) + 0.3 * (j / count)
  }
  mesh[count] = 1
  const guess: Cycle = { mesh, u: valuesOn(frame, samples, from, to, mesh), period: to - from, p }
  const size = sizeOf(guess, n)
  const solution = correctCycle(space, guess, guess, controlRow(guess), 0.1 * size + 0.1 * Math.sqrt(size) * size)
  if (!solution || sizeOf(solution.cycle, n) < 0.5 * size) return null
  const rough = cycleAt(frame, solution)
  // the trajectory's steps give a mesh that serves; the cycle's own is better
  return rough && (remeshed(space, rough, 60) ?? rough)
}

function valuesOn(
  frame: Frame,
  samples: readonly Sample[],
  from: number,
  to: number,
  mesh: Float64Array,
): Float64Array {
  const { n, unit } = frame
  const last = (mesh.length - 1) * degree
  const u = new Float64Array((last + 1) * n)
  let k = 0
  for (let node = 0; node <= last; node++) {
    const j = Math.min(Math.floor(node / degree), mesh.length - 2)
    const share = (node - j * degree) / degree
    const t = from + (to - from) * ((mesh[j] as number) + share * ((mesh[j + 1] as number) - (mesh[j] as number)))
    while (k + 2 < samples.length && (samples[k + 1] as Sample).t < t) k++
    const y = interpolated(samples[k] as Sample, samples[k + 1] as Sample, t)
    for (let i = 0; i < n; i++) u[node * n + i] = (y[i] as number) / (unit[i] as number)
  }
  for (let i = 0; i < n; i++) {
    const gap = (u[last * n + i] as number) - (u[i] as number)
    for (let j = 0; j + 1 < mesh.length; j++) {
      for (let part = 0; part < degree; part++) {
        const share = (mesh[j] as number) + (part / degree) * ((mesh[j + 1] as number) - (mesh[j] as number))
        const at = (j * degree + part) * n + i
        u[at] = (u[at] as number) - share * gap
      }
    }
    u[last * n + i] = u[i] as number
  }
  return u
}

/**
 * A cycle found from several loops may be one cycle gone round several times: then it is given as gone round once. Else,
 * or where Newton's method fails, it is returned as it is.
 */
export function traversedOnce(space: CycleSpace, at: CycleAt, loops: number): CycleAt {
  const { n, frame } = space
  const { mesh, u, period, p } = at.solution.cycle
  const size = sizeOf(at.solution.cycle, n)
  const here = new Float64Array(n)
  const there = new Float64Array(n)
  for (let times = loops; times >= 2; times--) {
    let gap = 0
    for (let k = 0; k < 40; k++) {
      const t = k / 40
      valueAt(mesh, u, n, t, here)
      valueAt(mesh, u, n, (t + 1 / times) % 1, there)
      for (let i = 0; i < n; i++) gap = Math.max(gap, Math.abs((here[i] as number) - (there[i] as number)))
    }
    if (gap > 1e-3 * size) continue
    const single = uniformMesh(48)
    const values = new Float64Array((48 * degree + 1) * n)
    for (let node = 0; node <= 48 * degree; node++) {
      valueAt(mesh, u, n, (node % (48 * degree)) / (48 * degree) / times, here)
      values.set(here, node * n)
    }
    const guess = { mesh: single, u: values, period: period / times, p }
    const solution = correctCycle(space, guess, guess, controlRow(guess), 0.2 * size)
    const once = solution && cycleAt(frame, solution)
    if (once) return once
  }
  return at
}
