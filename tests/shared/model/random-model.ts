/** Random expressions and hand-built systems for the tests of the tapes. */

import fc from 'fast-check'
import type { Expression, FunctionName, ModelSystem } from '#shared/model/expression.ts'

export const num = (value: number): Expression => ({ kind: 'number', value })
export const sym = (key: string): Expression => ({ kind: 'symbol', key })
export const neg = (of: Expression): Expression => ({ kind: 'negate', of })
export const call = (name: FunctionName, ...args: Expression[]): Expression => ({ kind: 'call', name, args })
const binary =
  (operator: '+' | '-' | '*' | '/' | '^') =>
  (left: Expression, right: Expression): Expression => ({
    kind: 'binary',
    operator,
    left,
    right,
  })
export const [add, sub, mul, div, pow] = [binary('+'), binary('-'), binary('*'), binary('/'), binary('^')]

/** A system with the given right-hand sides; states x, y, z ... of the given box, parameters by name and value. */
export function system(
  equations: Record<string, Expression>,
  options: { box?: [number, number]; parameters?: Record<string, number>; helpers?: Record<string, Expression> } = {},
): ModelSystem {
  const [low, high] = options.box ?? [-2, 2]
  const keys = Object.keys(equations)
  const helpers = Object.entries(options.helpers ?? {})
  return {
    parameters: Object.entries({ c: 0.5, ...options.parameters }).map(([key, value]) => ({
      key,
      symbol: key,
      value,
      low: value - 1,
      high: value + 1,
    })),
    states: keys.map((key) => ({ key, symbol: key, low, high, start: (low + high) / 2 })),
    helpers: helpers.map(([key, expression], i) => ({ key, expression, line: i + 1 })),
    equations: Object.entries(equations).map(([key, expression], i) => ({
      key,
      expression,
      line: helpers.length + i + 1,
    })),
    control: 0,
    secondControl: null,
    observed:
      helpers.length > 0
        ? { kind: 'helper', index: 0, symbol: helpers[0]?.[0] ?? '' }
        : { kind: 'state', index: 0, symbol: keys[0] ?? '' },
    timeUnit: null,
  }
}

export const parameters = (model: ModelSystem): Float64Array => Float64Array.from(model.parameters, (p) => p.value)

const smoothFunctions: FunctionName[] = ['exp', 'sin', 'cos', 'atan', 'sinh', 'cosh', 'tanh', 'expm1', 'exprel']
const partialFunctions: FunctionName[] = ['log', 'log10', 'sqrt', 'tan', 'asin', 'acos', 'log1p']
const kinkedFunctions: FunctionName[] = ['abs', 'sign', 'min', 'max']

/** Expressions in x, y and the parameter c, up to five levels deep. `kinks` lets abs, sign, min and max in. */
export function randomExpression(kinks: boolean): fc.Arbitrary<Expression> {
  const leaf = fc.oneof(
    { weight: 4, arbitrary: fc.constantFrom('x', 'y', 'c').map(sym) },
    { weight: 2, arbitrary: fc.constantFrom(0.5, 1, 2, 3, -1.5, 0.1).map(num) },
    {
      weight: 1,
      arbitrary: fc.constantFrom<Expression>({ kind: 'constant', name: 'pi' }, { kind: 'constant', name: 'e' }),
    },
  )
  const { tree } = fc.letrec<{ tree: Expression }>((tie) => ({
    tree: fc.oneof(
      { maxDepth: 5, depthSize: 'medium' },
      leaf,
      fc.tuple(fc.constantFrom(add, sub, mul, div), tie('tree'), tie('tree')).map(([f, a, b]) => f(a, b)),
      fc.tuple(fc.constantFrom(...smoothFunctions, ...partialFunctions), tie('tree')).map(([name, a]) => call(name, a)),
      fc.tuple(tie('tree'), fc.constantFrom(2, 3, 4, -1, -2, 0.5, 1.5)).map(([a, k]) => pow(a, num(k))),
      tie('tree').map(neg),
      ...(kinks
        ? [
            fc
              .tuple(fc.constantFrom(...kinkedFunctions), tie('tree'), tie('tree'))
              .map(([name, a, b]) => (name === 'min' || name === 'max' ? call(name, a, b) : call(name, a))),
          ]
        : []),
    ),
  }))
  return tree
}

/**
 * Plain evaluation of a tree by the Math functions, as the meaning of the text; pi and e as doubles. NaN as soon as a
 * value on the way is infinite: what floating point makes of infinities and signed zeros is no part of the meaning.
 */
export function evaluate(e: Expression, values: Record<string, number>): number {
  const value = step(e, values)
  return Number.isFinite(value) ? value : Number.NaN
}

function step(e: Expression, values: Record<string, number>): number {
  switch (e.kind) {
    case 'number':
      return e.value
    case 'constant':
      return e.name === 'pi' ? Math.PI : Math.E
    case 'symbol':
      return values[e.key] ?? Number.NaN
    case 'negate':
      return -evaluate(e.of, values)
    case 'binary': {
      const [a, b] = [evaluate(e.left, values), evaluate(e.right, values)]
      if (e.operator === '+') return a + b
      if (e.operator === '-') return a - b
      if (e.operator === '*') return a * b
      return e.operator === '/' ? a / b : a ** b
    }
    case 'call': {
      const args = e.args.map((arg) => evaluate(arg, values))
      const [a = Number.NaN] = args
      if (e.name === 'exprel') return a === 0 ? 1 : Math.expm1(a) / a
      if (e.name === 'min') return Math.min(...args)
      if (e.name === 'max') return Math.max(...args)
      return Math[e.name](a)
    }
  }
}

/** Coordinates in -1.9 .. 1.9 with zero among them, but none so small that products of three leave the range of doubles. */
export const randomCoordinate = fc
  .double({ min: -1.9, max: 1.9, noNaN: true })
  .map((value) => (Math.abs(value) < 1e-60 ? 0 : value))
