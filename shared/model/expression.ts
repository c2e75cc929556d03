/**
 * The checked form of an equation block: trees with shared nodes, no text, no parser objects.
 *
 * Everything after the parser works on these types. A symbol is its canonical key (see symbols.ts): two spellings of
 * one Greek letter are one key. Helper quantities stay references (`symbol` nodes), they are never substituted.
 */

/** Functions a model may call, besides the operators. `abs`, `sign`, `min` and `max` are not smooth. */
export const functionNames = [
  'exp',
  'log',
  'log10',
  'sqrt',
  'sin',
  'cos',
  'tan',
  'asin',
  'acos',
  'atan',
  'sinh',
  'cosh',
  'tanh',
  'expm1',
  'log1p',
  'exprel',
  'abs',
  'sign',
  'min',
  'max',
] as const
export type FunctionName = (typeof functionNames)[number]

export type Expression =
  | { kind: 'number'; value: number }
  | { kind: 'constant'; name: 'pi' | 'e' }
  | { kind: 'symbol'; key: string }
  | { kind: 'negate'; of: Expression }
  | { kind: 'binary'; operator: '+' | '-' | '*' | '/' | '^'; left: Expression; right: Expression }
  | { kind: 'call'; name: FunctionName; args: Expression[] }

/** One statement of the block. `line` is the physical line (from 1) on which the statement begins. */
export interface Definition {
  key: string
  expression: Expression
  line: number
}

/**
 * A model as the numerical core sees it: names resolved, ranges checked, nothing optional left open.
 *
 * `helpers` are in an order in which each uses only earlier ones. `equations[i]` is the right-hand side of `states[i]`.
 * `control` and `secondControl` are positions in `parameters`; `observed` is a position in `states` or in `helpers`.
 */
export interface ModelSystem {
  parameters: { key: string; symbol: string; value: number; low: number | null; high: number | null }[]
  states: { key: string; symbol: string; low: number; high: number; start: number }[]
  helpers: Definition[]
  equations: Definition[]
  control: number
  secondControl: number | null
  observed: { kind: 'state' | 'helper'; index: number; symbol: string }
  timeUnit: string | null
}
