import type { CardWarning } from '#shared/model/card-document.ts'
import type { Expression, ModelSystem } from '#shared/model/expression.ts'

/** Collects warnings, each once, in the order they come up. */
export interface WarningList {
  add(warning: CardWarning): void
  list(): CardWarning[]
}

export function createWarnings(first: readonly CardWarning[]): WarningList {
  const all: CardWarning[] = []
  const told = new Set<string>()
  const add = (warning: CardWarning): void => {
    const id = `${warning.code} ${warning.line ?? ''} ${warning.path ?? ''} ${warning.message}`
    if (told.has(id)) return
    told.add(id)
    all.push(warning)
  }
  for (const warning of first) add(warning)
  return { add, list: () => all }
}

const kinked = new Set(['abs', 'sign', 'min', 'max'])

function hasKink(expression: Expression): boolean {
  switch (expression.kind) {
    case 'negate':
      return hasKink(expression.of)
    case 'binary':
      return hasKink(expression.left) || hasKink(expression.right)
    case 'call':
      return kinked.has(expression.name) || expression.args.some(hasKink)
    default:
      return false
  }
}

/** Lines on which abs, sign, min or max stand. */
export function kinkLines(system: ModelSystem): number[] {
  const lines = [...system.helpers, ...system.equations]
    .filter(({ expression }) => hasKink(expression))
    .map(({ line }) => line)
  return [...new Set(lines)].sort((a, b) => a - b)
}

/** A place in the model's own words: "mu = -0.5, x = 0.1". Four digits: a place to look at, not a result. */
export function placeText(system: ModelSystem, p: number, x: ArrayLike<number>): string {
  const control = system.parameters[system.control]?.symbol ?? ''
  const number = (value: number): string => String(Number(value.toPrecision(4)))
  const parts = [`${control} = ${number(p)}`]
  system.states.forEach(({ symbol }, i) => {
    if (i < 4) parts.push(`${symbol} = ${number(x[i] as number)}`)
  })
  if (system.states.length > 4) parts.push('...')
  return parts.join(', ')
}
