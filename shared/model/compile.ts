/**
 * Compiles a checked model into tapes and offers them as a `CompiledModel`: values, Jacobian, parameter derivatives,
 * Taylor expansions, interval enclosures. Nothing is generated as program text, so it works under every content
 * security policy. Tapes that a card may not need (parameter derivatives, kinks, intervals) are cut when first asked for.
 */

import { type Coverage, none } from '#shared/numerics/interval.ts'
import type { CompiledModel } from './compiled-model.ts'
import { createContractor } from './contract.ts'
import type { ModelSystem } from './expression.ts'
import { createIntervalRunner } from './interval-tape.ts'
import { createJetRunner } from './jet.ts'
import { findKinks, nonFiniteLines, usesKinks } from './model-checks.ts'
import { buildGraph, functionTape, helperTape, jacobianTape, observedTape, parameterTape } from './model-graph.ts'
import { createRunner, type TapeRunner } from './run-tape.ts'

/** What the compiled tapes offer beyond the interface that closed forms implement as well. */
export interface TapeModel extends CompiledModel {
  /**
   * How far F (or, with `jacobian`, F and J) is defined over the box: `full` on all of it and continuous, `partial` on
   * some, `none` nowhere on it. Existence proofs need `full`.
   */
  coverage(xlo: Float64Array, xhi: Float64Array, plo: Float64Array, phi: Float64Array, jacobian: boolean): Coverage
  /**
   * Shrinks the box in place to a part that holds every zero of F at the parameters `p`; false where it is proved to
   * hold none. Returns through `contractionEffort` what it costs.
   */
  contractBox(xlo: Float64Array, xhi: Float64Array, p: Float64Array): boolean
  /** Interval operations that `contractBox` has done since the model was compiled. */
  contractionEffort(): number
  /** Sizes, for benchmarks and budgets: instructions of F, and of F and J. */
  readonly instructions: { rhs: number; jacobian: number }
}

/** Compiles a model. Throws only where the system is not consistent in itself (a symbol without a declaration). */
export function compileModel(system: ModelSystem): TapeModel {
  const graph = buildGraph(system)
  const { builder, n, m } = graph
  const values = createRunner(functionTape(graph))
  const { tape: both, positions } = jacobianTape(graph)
  const slopes = createRunner(both)

  const parameterRunners: (TapeRunner | undefined)[] = new Array(m)
  const parameterRunner = (k: number): TapeRunner => {
    const known = parameterRunners[k]
    if (known !== undefined) return known
    const made = createRunner(parameterTape(graph, k))
    parameterRunners[k] = made
    return made
  }
  const jets = lazy(() => createJetRunner(values.tape))
  const observed = lazy(() => createRunner(observedTape(graph)))
  const observedJets = lazy(() => createJetRunner(observed().tape))
  const helpers = lazy(() => createRunner(helperTape(graph)))
  const kinks = lazy(() => findKinks(graph))
  const lines = lazy(() => nonFiniteLines(graph))
  const valueBounds = lazy(() => createIntervalRunner(values.tape, builder))
  const contractor = lazy(() => createContractor(values.tape, builder))
  const slopeBounds = lazy(() => createIntervalRunner(both, builder))

  return {
    system,
    n,
    m,
    smooth: !usesKinks(system),
    instructions: { rhs: values.tape.code.length, jacobian: both.code.length },

    rhs(x, p, out) {
      values.run(x, p)
      const { registers, tape } = values
      for (let i = 0; i < n; i++) out[i] = registers[tape.outputs[i] as number] as number
    },

    jacobian(x, p, outF, outJ) {
      slopes.run(x, p)
      const { registers } = slopes
      const { outputs } = both
      for (let i = 0; i < n; i++) outF[i] = registers[outputs[i] as number] as number
      outJ.fill(0, 0, n * n)
      for (let k = 0; k < positions.length; k++) {
        outJ[positions[k] as number] = registers[outputs[n + k] as number] as number
      }
    },

    parameterDerivative(x, p, k, out) {
      const runner = parameterRunner(k)
      runner.run(x, p)
      for (let i = 0; i < n; i++) out[i] = runner.output(i)
    },

    jet(x, p, u, w, order, out) {
      const runner = jets()
      runner.run(x, p, u, w, order)
      for (let k = 0; k <= order; k++) for (let i = 0; i < n; i++) out[k * n + i] = runner.coefficient(i, k)
    },

    observed(x, p, outGradient) {
      const runner = observed()
      runner.run(x, p)
      for (let i = 0; i < n; i++) outGradient[i] = runner.output(1 + i)
      return runner.output(0)
    },

    observedJet(x, p, u, order, out) {
      const runner = observedJets()
      runner.run(x, p, u, null, order)
      for (let k = 0; k <= order; k++) out[k] = runner.coefficient(0, k)
    },

    helpers(x, p, out) {
      const runner = helpers()
      runner.run(x, p)
      for (let k = 0; k < system.helpers.length; k++) out[k] = runner.output(k)
    },

    kinkAt: (x, p, tolerance) => kinks()(x, p, tolerance),
    notFiniteLines: (x, p) => lines()(x, p),

    rhsInterval(xlo, xhi, plo, phi, outLo, outHi) {
      const runner = valueBounds()
      const empty = runner.run(xlo, xhi, plo, phi) === none
      for (let i = 0; i < n; i++) {
        const register = runner.tape.outputs[i] as number
        outLo[i] = empty ? Number.POSITIVE_INFINITY : (runner.lo[register] as number)
        outHi[i] = empty ? Number.NEGATIVE_INFINITY : (runner.hi[register] as number)
      }
    },

    jacobianInterval(xlo, xhi, plo, phi, outLo, outHi) {
      const runner = slopeBounds()
      const empty = runner.run(xlo, xhi, plo, phi) === none
      outLo.fill(0, 0, n * n)
      outHi.fill(0, 0, n * n)
      for (let k = 0; k < positions.length; k++) {
        const register = both.outputs[n + k] as number
        // Where a slope exists nowhere on the box (sqrt at 0 only), nothing is said about it.
        outLo[positions[k] as number] = empty ? Number.NEGATIVE_INFINITY : (runner.lo[register] as number)
        outHi[positions[k] as number] = empty ? Number.POSITIVE_INFINITY : (runner.hi[register] as number)
      }
    },

    contractBox: (xlo, xhi, p) => contractor().contract(xlo, xhi, p),
    contractionEffort: () => contractor().effort.operations,

    coverage: (xlo, xhi, plo, phi, jacobian) => (jacobian ? slopeBounds() : valueBounds()).run(xlo, xhi, plo, phi),
  }
}

function lazy<T>(make: () => T): () => T {
  let made: { value: T } | undefined
  return () => {
    made ??= { value: make() }
    return made.value
  }
}
