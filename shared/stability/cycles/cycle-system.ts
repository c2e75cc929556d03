import { type CondensedSystem, condenseBlock, createCondensed, solveCondensed } from '#shared/numerics/condensation.ts'
import { degree, nodes, nodeWeights, slopeAtGauss, valueAtGauss } from '#shared/numerics/gauss-collocation.ts'
import { computeMultipliers, createMultipliers, type Multipliers } from '#shared/numerics/multipliers.ts'
import { type Frame, linearise } from '../frame.ts'
import {
  type Cycle,
  type Direction,
  difference,
  directionDot,
  moved,
  phaseRow,
  scaledDirection,
  sizeOf,
} from './cycle.ts'

/** Intervals of the finest mesh. */
export const mostIntervals = 120

/** What Newton's method on cycles works in. */
export interface CycleSpace {
  readonly frame: Frame
  readonly n: number
  readonly system: CondensedSystem
  readonly multipliers: Multipliers
  readonly z: Float64Array
}

/** Makes the workspace for a frame; its budget is the frame's. */
export function createCycleSpace(frame: Frame): CycleSpace {
  const { n } = frame
  return {
    frame,
    n,
    system: createCondensed(n, mostIntervals),
    multipliers: createMultipliers(n),
    z: new Float64Array(n + 1),
  }
}

/** A converged cycle with the unit tangent of its branch and its multipliers. */
export interface Solution {
  readonly cycle: Cycle
  readonly tangent: Direction
  /** Nontrivial multipliers, n - 1 of them. */
  readonly re: Float64Array
  readonly im: Float64Array
  /** Distance of the trivial multiplier from 1. */
  readonly trivialError: number
  /** Newton steps taken. */
  readonly steps: number
}

/**
 * Assembles and solves the linearised equations at a cycle. Equations, for u' = T F(u, p) on each interval of length h:
 *
 *     sum_k l_k'(g_i) u_k - h T F(sum_k l_k(g_i) u_k, p) = 0   at the Gauss points g_i,
 *     phase:  integral of u_ref' (du) = 0,      arc:  <row, (du, dT/T, dp)> = 0
 *
 * Right-hand sides: minus the residual, and the unit vector of the arc row (which gives the tangent).
 */
function solveLinearised(space: CycleSpace, cycle: Cycle, phase: Float64Array, arc: Direction): boolean {
  const { frame, n, system, z } = space
  const { mesh, u, period, p } = cycle
  const { blocks, rows, cols } = system
  const count = mesh.length - 1
  const inner = (degree - 1) * n
  // position of node k in a block's columns: interior nodes first, then left, then right
  const columnOf = (k: number): number => (k === 0 ? inner : k === degree ? inner + n : (k - 1) * n)
  const last = inner + 2 * n
  z[n] = p
  for (let j = 0; j < count; j++) {
    const base = j * rows * cols
    blocks.fill(0, base, base + rows * cols)
    const h = (mesh[j + 1] as number) - (mesh[j] as number)
    const scale = h * period
    for (let g = 0; g < degree; g++) {
      for (let i = 0; i < n; i++) {
        let sum = 0
        for (let k = 0; k < nodes; k++) {
          sum += (valueAtGauss[g * nodes + k] as number) * (u[(j * degree + k) * n + i] as number)
        }
        z[i] = sum
      }
      if (!linearise(frame, z)) return false
      const { derivatives, residual } = frame
      for (let i = 0; i < n; i++) {
        const row = base + (g * n + i) * cols
        let slope = 0
        for (let k = 0; k < nodes; k++) {
          const value = valueAtGauss[g * nodes + k] as number
          const column = row + columnOf(k)
          for (let c = 0; c < n; c++) {
            blocks[column + c] = -scale * value * (derivatives[i * (n + 1) + c] as number)
          }
          const diagonal = slopeAtGauss[g * nodes + k] as number
          blocks[column + i] = (blocks[column + i] as number) + diagonal
          slope += diagonal * (u[(j * degree + k) * n + i] as number)
        }
        const field = scale * (residual[i] as number)
        blocks[row + last] = -field
        blocks[row + last + 1] = -scale * (derivatives[i * (n + 1) + n] as number)
        blocks[row + last + 2] = field - slope
      }
    }
    const phaseAt = base + degree * n * cols
    const arcAt = phaseAt + cols
    for (let k = 0; k < nodes; k++) {
      const weight = h * (nodeWeights[k] as number)
      for (let i = 0; i < n; i++) {
        blocks[phaseAt + columnOf(k) + i] = phase[(j * nodes + k) * n + i] as number
        blocks[arcAt + columnOf(k) + i] = weight * (arc.u[(j * degree + k) * n + i] as number)
      }
    }
    if (j === 0) {
      blocks[arcAt + last] = arc.period
      blocks[arcAt + last + 1] = arc.p
      blocks[arcAt + last + 3] = 1
    }
    if (!condenseBlock(system, j)) return false
    if (frame.budget.spend(2 + (n * n) / 4) && frame.budget.reason() === 'stopped') return false
  }
  return solveCondensed(system, count)
}

function solutionPart(space: CycleSpace, cycle: Cycle, side: 0 | 1): Direction {
  const { system } = space
  const [period, p] = system.parameters[side]
  return { u: system.values[side].slice(0, cycle.u.length), period: period as number, p: p as number }
}

/** Only the control's entry: as arc row it holds the control value fixed. */
export function controlRow(cycle: Cycle): Direction {
  return { u: new Float64Array(cycle.u.length), period: 0, p: 1 }
}

/**
 * Newton's method from `guess` to the cycle in the plane through it across `arc`; the phase is that of `reference` (on
 * the same mesh). The tangent returned points to the side of `arc` (of a rising control for the control's row).
 *
 * Null where it does not converge in 8 steps, a value is not finite, or the result is further than `reach` from the
 * guess. The last step is below 1e-7 of the cycle's size, so that the error left is rounding.
 * Source: Doedel, Keller & Kernevez 1991 (integral phase condition, pseudo-arclength).
 */
export function correctCycle(
  space: CycleSpace,
  guess: Cycle,
  reference: Cycle,
  arc: Direction,
  reach = Number.POSITIVE_INFINITY,
): Solution | null {
  const { n, frame } = space
  const phase = phaseRow(reference, n)
  let normal = 0
  for (const value of phase) normal = Math.max(normal, Math.abs(value))
  if (!(normal > 0)) return null
  for (let k = 0; k < phase.length; k++) phase[k] = (phase[k] as number) / normal
  let cycle = guess
  let before = Number.POSITIVE_INFINITY
  for (let steps = 1; steps <= 8; steps++) {
    if (frame.budget.spent() || !solveLinearised(space, cycle, phase, arc)) return null
    const step = solutionPart(space, cycle, 0)
    const size = Math.sqrt(directionDot(cycle.mesh, n, step, step))
    const unit = Math.min(1, Math.max(sizeOf(cycle, n), 1e-9))
    if (!(size < 10) || !(step.period > -0.9)) return null
    cycle = moved(cycle, step, 1)
    const relative = size / unit
    const stalled = steps > 3 && size > 0.5 * before
    if (relative < 1e-7 || (stalled && relative < 1e-5)) {
      const away = difference(guess, cycle)
      if (Math.sqrt(directionDot(cycle.mesh, n, away, away)) > reach) return null
      return finish(space, cycle, steps)
    }
    if (stalled && relative > 1e-3) return null
    before = size
  }
  return null
}

/** Tangent and multipliers from the last linearisation, which is within a rounding step of the cycle. */
function finish(space: CycleSpace, cycle: Cycle, steps: number): Solution | null {
  const { n, frame, system, multipliers, z } = space
  const raw = solutionPart(space, cycle, 1)
  const length = Math.sqrt(directionDot(cycle.mesh, n, raw, raw))
  if (!(length > 0) || !Number.isFinite(length)) return null
  for (let i = 0; i < n; i++) z[i] = cycle.u[i] as number
  z[n] = cycle.p
  if (!linearise(frame, z)) return null
  if (!computeMultipliers(multipliers, system.first, system.last, frame.residual)) return null
  const { re, im, trivialError } = multipliers
  return {
    cycle,
    tangent: scaledDirection(raw, 1 / length),
    re: re.slice(),
    im: im.slice(),
    trivialError,
    steps,
  }
}
