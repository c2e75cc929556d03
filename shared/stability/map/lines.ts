import type { CompiledModel } from '#shared/model/compiled-model.ts'
import { type BranchPath, createBranchSet, growBranches } from '../branches.ts'
import type { Budget } from '../budget.ts'
import { axisVector, between, correct } from '../corrector.ts'
import { createForms } from '../forms.ts'
import { createFrame, type Frame, stateOf } from '../frame.ts'
import { findHopfPoints } from '../hopf.ts'
import { findSteadyStates } from '../steady-states.ts'
import type { Plane } from './plane.ts'

/** A point from which a curve can be traced: an onset (omega its angular frequency) or a turning point (omega null). */
export interface CurveStart {
  readonly z: Float64Array
  readonly omega: number | null
}

/** Values of each control between its ends at which lines are laid across the plane; fewer for large models. */
const valuesBetween = (n: number): number => (n <= 6 ? 15 : 9)

/** The own value first (where it is in range), then both ends, then values between. */
function valuesOf(own: number, low: number, high: number, count: number): number[] {
  const inner = Array.from({ length: count }, (_, i) => low + ((high - low) * (i + 1)) / (count + 1))
  return [...new Set([...(own >= low && own <= high ? [own] : []), low, high, ...inner])]
}

/**
 * Onsets and turning points on lines across the plane: branches of steady states with the control fixed (the second one
 * moves), then with the second one fixed. Steady states are searched for on the first lines and carried over to the
 * others where they cross. A closed curve that falls between the lines of both directions is not found.
 */
export function findCurveStarts(
  plane: Plane,
  options: { shouldStop?: () => boolean; onProgress?: (share: number) => void },
): CurveStart[] {
  const { frame, n, second } = plane
  const { model } = frame
  const budget = weighted(frame.budget, Math.ceil(n / 4))
  const firstValues = valuesOf(frame.own, frame.low, frame.high, valuesBetween(n))
  const secondValues = valuesOf(plane.own, plane.low, plane.high, valuesBetween(n))
  // searches with proof grow steeply with the number of states
  const searched = valuesOf(plane.own, plane.low, plane.high, n <= 4 ? 7 : n <= 8 ? 3 : 1)
  const starts: CurveStart[] = []
  const lines: { p: number; frame: Frame; paths: BranchPath[] }[] = []
  const total = firstValues.length + secondValues.length
  const { shouldStop } = options

  firstValues.forEach((p, i) => {
    options.onProgress?.(i / total)
    if (budget.spent()) return
    const across = lineFrame(model, second, frame.control, p, budget)
    const found = searched.map((s) => {
      const parameters = across.parameters.slice()
      parameters[second] = s
      const { states } = findSteadyStates(model, parameters, shouldStop ? { shouldStop } : {})
      budget.spend(64)
      return { p: s, states: states.map(({ x }) => x) }
    })
    lines.push({ p, frame: across, paths: pathsThrough(across, found) })
    collect(across, lines[lines.length - 1]?.paths ?? [], (x, s) => place(plane, x, p, s), starts)
  })
  secondValues.forEach((s, i) => {
    options.onProgress?.((firstValues.length + i) / total)
    if (budget.spent()) return
    const along = lineFrame(model, frame.control, second, s, budget)
    const found = lines.map((line) => ({ p: line.p, states: crossings(line.frame, line.paths, s) }))
    collect(along, pathsThrough(along, found), (x, p) => place(plane, x, p, s), starts)
  })
  return starts
}

/** Along a branch every evaluation goes with eigenvalues, which grow faster with the states than the evaluation itself. */
function weighted(budget: Budget, weight: number): Budget {
  return { spend: (units) => budget.spend(weight * units), spent: budget.spent, reason: budget.reason }
}

/** A frame of the same model whose control is `moving`, with parameter `fixed` at a value. */
function lineFrame(model: CompiledModel, moving: number, fixed: number, value: number, budget: Budget): Frame {
  const frame = createFrame({ ...model, system: { ...model.system, control: moving } }, budget)
  frame.parameters[fixed] = value
  return frame
}

function pathsThrough(frame: Frame, starts: { p: number; states: Float64Array[] }[]): BranchPath[] {
  const set = createBranchSet()
  const forms = createForms(frame)
  for (const start of starts) growBranches(frame, forms, set, start)
  return set.paths
}

function place({ n, unit, width }: Plane, x: Float64Array, p: number, s: number): Float64Array {
  const z = new Float64Array(width)
  for (let i = 0; i < n; i++) z[i] = (x[i] as number) / (unit[i] as number)
  z[n] = p / (unit[n] as number)
  z[n + 1] = s / (unit[n + 1] as number)
  return z
}

function collect(
  frame: Frame,
  paths: readonly BranchPath[],
  placed: (x: Float64Array, moving: number) => Float64Array,
  starts: CurveStart[],
): void {
  const forms = createForms(frame)
  const put = (z: Float64Array, omega: number | null): void => {
    starts.push({ z: placed(stateOf(frame, z), (z[frame.n] as number) * (frame.unit[frame.n] as number)), omega })
  }
  for (const { vertices, ends } of paths) {
    const samples = vertices.map(({ sample }) => sample)
    const [first, last] = ends.map(({ kind }) => kind === 'range-end' || kind === 'box-left')
    if (frame.n > 1) {
      for (const { sample, omega } of findHopfPoints(frame, forms, samples, first ?? false, last ?? false)) {
        put(sample.z, omega)
      }
    }
    for (const { sample, mark } of vertices) if (mark === 'fold') put(sample.z, null)
  }
}

/** Steady states where the branches of a line pass a value of its moving control. */
function crossings(frame: Frame, paths: readonly BranchPath[], value: number): Float64Array[] {
  const { n, unit } = frame
  const level = value / (unit[n] as number)
  const found: Float64Array[] = []
  for (const { vertices } of paths) {
    for (let i = 0; i + 1 < vertices.length; i++) {
      const [a, b] = [vertices[i]?.sample, vertices[i + 1]?.sample]
      if (!a || !b || frame.budget.spent()) continue
      const [from, to] = [(a.z[n] as number) - level, (b.z[n] as number) - level]
      // the first vertex belongs to a segment, the last one only to the last: none is counted twice
      const passes = from === 0 || from * to < 0 || (to === 0 && i + 2 === vertices.length)
      if (!passes) continue
      const z = between(a, b, from === to ? 0 : from / (from - to))
      z[n] = level
      if (!correct(frame, z, axisVector(frame, n)).ok) continue
      z[n] = level
      found.push(stateOf(frame, z))
    }
  }
  return found
}
