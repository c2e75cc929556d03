import { degree, nodes, nodeWeights, slopeAtNodes } from '#shared/numerics/gauss-collocation.ts'
import { transfer } from '#shared/numerics/mesh.ts'

/**
 * One cycle as a piecewise polynomial over its period, in the frame's scaled coordinates (see ../frame.ts): `u` holds
 * the states at the nodes of `mesh` (layout: see numerics/mesh.ts), `period` is in the model's time unit, `p` is the
 * control over its range.
 */
export interface Cycle {
  readonly mesh: Float64Array
  readonly u: Float64Array
  readonly period: number
  readonly p: number
}

/** A direction in the space of cycles on one mesh; `period` is relative to the cycle's own. */
export interface Direction {
  readonly u: Float64Array
  readonly period: number
  readonly p: number
}

/** Scalar product of two directions: the mean over the period of that of the states, plus period and control. */
export function directionDot(mesh: Float64Array, n: number, a: Direction, b: Direction): number {
  let sum = a.period * b.period + a.p * b.p
  for (let j = 0; j + 1 < mesh.length; j++) {
    const length = (mesh[j + 1] as number) - (mesh[j] as number)
    for (let k = 0; k < nodes; k++) {
      const at = (j * degree + k) * n
      let part = 0
      for (let i = 0; i < n; i++) part += (a.u[at + i] as number) * (b.u[at + i] as number)
      sum += length * (nodeWeights[k] as number) * part
    }
  }
  return sum
}

/** `cycle` moved by `step` along a direction. */
export function moved(cycle: Cycle, along: Direction, step: number): Cycle {
  const u = new Float64Array(cycle.u.length)
  for (let k = 0; k < u.length; k++) u[k] = (cycle.u[k] as number) + step * (along.u[k] as number)
  return { mesh: cycle.mesh, u, period: cycle.period * (1 + step * along.period), p: cycle.p + step * along.p }
}

/** From a to b (both on one mesh), relative to a's period. */
export function difference(a: Cycle, b: Cycle): Direction {
  const u = new Float64Array(a.u.length)
  for (let k = 0; k < u.length; k++) u[k] = (b.u[k] as number) - (a.u[k] as number)
  return { u, period: b.period / a.period - 1, p: b.p - a.p }
}

export function scaledDirection(d: Direction, factor: number): Direction {
  return { u: d.u.map((value) => value * factor), period: d.period * factor, p: d.p * factor }
}

/** The same cycle on another mesh. */
export function onMesh(cycle: Cycle, n: number, mesh: Float64Array): Cycle {
  return { mesh, u: transfer(cycle.mesh, cycle.u, n, mesh), period: cycle.period, p: cycle.p }
}

/** Lowest and highest value of scaled state i at the nodes. */
export function extentOf({ u }: Cycle, n: number, i: number): { low: number; high: number } {
  let low = Number.POSITIVE_INFINITY
  let high = Number.NEGATIVE_INFINITY
  for (let k = i; k < u.length; k += n) {
    low = Math.min(low, u[k] as number)
    high = Math.max(high, u[k] as number)
  }
  return { low, high }
}

/** Half the largest peak-to-peak of any scaled state. */
export function sizeOf(cycle: Cycle, n: number): number {
  let size = 0
  for (let i = 0; i < n; i++) {
    const { low, high } = extentOf(cycle, n, i)
    size = Math.max(size, (high - low) / 2)
  }
  return size
}

/** Weights of the phase condition: integral of u'(reference) times u, node by node. */
export function phaseRow(reference: Cycle, n: number): Float64Array {
  const { mesh, u } = reference
  const row = new Float64Array((mesh.length - 1) * nodes * n)
  for (let j = 0; j + 1 < mesh.length; j++) {
    for (let k = 0; k < nodes; k++) {
      for (let i = 0; i < n; i++) {
        let slope = 0
        for (let l = 0; l < nodes; l++) {
          slope += (slopeAtNodes[k * nodes + l] as number) * (u[(j * degree + l) * n + i] as number)
        }
        // the interval's length cancels: slope per share of the interval, weight per length
        row[(j * nodes + k) * n + i] = slope * (nodeWeights[k] as number)
      }
    }
  }
  return row
}
