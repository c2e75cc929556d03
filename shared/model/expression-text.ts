import type { Expression } from './expression.ts'

const strength = { '+': 1, '-': 1, '*': 2, '/': 2, '^': 4 } as const
const strengthOfSign = 3

/**
 * An expression as one would type it, with no bracket more than needed and symbols as `spell` gives them. Reading it back
 * gives the same tree.
 */
export function expressionText(expression: Expression, spell: (key: string) => string): string {
  const write = (at: Expression, least: number): string => {
    switch (at.kind) {
      case 'number':
        return String(at.value)
      case 'constant':
        return at.name
      case 'symbol':
        return spell(at.key)
      case 'call':
        return `${at.name}(${at.args.map((arg) => write(arg, 0)).join(', ')})`
      case 'negate': {
        const text = `-${write(at.of, strengthOfSign)}`
        return least > strengthOfSign ? `(${text})` : text
      }
      case 'binary': {
        const own = strength[at.operator]
        const power = at.operator === '^'
        const left = write(at.left, power ? own + 1 : own)
        // The right of a power may carry a sign; the right of - and / must be stronger than they are.
        const right = write(at.right, power ? strengthOfSign : own + 1)
        const text = own === 1 ? `${left} ${at.operator} ${right}` : `${left}${at.operator}${right}`
        return least > own ? `(${text})` : text
      }
    }
  }
  return write(expression, 0)
}
