import type { ModelDocument } from '#shared/model/document.ts'
import type { ModelError } from '#shared/model/errors.ts'
import type { Expression } from '#shared/model/expression.ts'
import { checkModel } from '#shared/model/system.ts'

/** The reference oscillator: q2 helper, one parameter, two states. Overrides replace whole members. */
export function sampleModel(overrides: Partial<ModelDocument> = {}): ModelDocument {
  return {
    format: 'brinkbook-model',
    version: 1,
    title: 'sample',
    equations: 'q2 = x^2 + y^2\ndx/dt = mu*x - y - x*q2\ndy/dt = x + mu*y - y*q2',
    parameters: [{ symbol: 'mu', value: -0.5, low: -1, high: 1, unit: '1', meaning: '' }],
    states: [
      { symbol: 'x', low: -2, high: 2, unit: '1', start: 0.1 },
      { symbol: 'y', low: -2, high: 2, unit: '1', start: 0.1 },
    ],
    control: 'mu',
    observed: 'x',
    ...overrides,
  }
}

/** A model of one state x, parameters a, b, mu and the given right-hand side. */
export function oneState(right: string, more = ''): ModelDocument {
  return sampleModel({
    equations: `dx/dt = ${right}${more}`,
    parameters: [
      { symbol: 'mu', value: 0, low: -1, high: 1 },
      { symbol: 'a', value: 2 },
      { symbol: 'b', value: 3 },
    ],
    states: [{ symbol: 'x', low: -1, high: 1 }],
  })
}

/** All faults of a model; empty where it is accepted. */
export function faultsOf(input: unknown): ModelError[] {
  const checked = checkModel(input)
  return checked.ok ? [] : checked.errors
}

/** Faults as "code@line:column", or "code path" for those without a line. */
export function faultPlaces(input: unknown): string[] {
  return faultsOf(input).map((error) =>
    error.line === undefined
      ? `${error.code} ${error.path ?? ''}`.trim()
      : `${error.code}@${error.line}:${error.column}`,
  )
}

/** The tree of the right-hand side of x, or an error that says what was refused. */
export function treeOf(right: string): Expression {
  const checked = checkModel(oneState(right))
  if (!checked.ok) throw new Error(`${right}: ${JSON.stringify(checked.errors)}`)
  const [equation] = checked.system.equations
  if (!equation) throw new Error('no equation')
  return equation.expression
}

/** Plain evaluation, for tests that ask what a text means. */
export function evaluate(expression: Expression, values: Readonly<Record<string, number>>): number {
  const of = (at: Expression): number => {
    switch (at.kind) {
      case 'number':
        return at.value
      case 'constant':
        return at.name === 'pi' ? Math.PI : Math.E
      case 'symbol':
        return values[at.key] ?? Number.NaN
      case 'negate':
        return -of(at.of)
      case 'binary': {
        const left = of(at.left)
        const right = of(at.right)
        if (at.operator === '+') return left + right
        if (at.operator === '-') return left - right
        if (at.operator === '*') return left * right
        return at.operator === '/' ? left / right : left ** right
      }
      case 'call': {
        const args = at.args.map(of)
        const [first = Number.NaN] = args
        if (at.name === 'exprel') return first === 0 ? 1 : Math.expm1(first) / first
        if (at.name === 'min' || at.name === 'max') return Math[at.name](...args)
        return Math[at.name](first)
      }
    }
  }
  return of(expression)
}
