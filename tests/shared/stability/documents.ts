import type { StabilityCard } from '#shared/model/card-document.ts'
import { compileModel } from '#shared/model/compile.ts'
import type { CompiledModel } from '#shared/model/compiled-model.ts'
import { checkModel } from '#shared/model/system.ts'
import { analyse } from '#shared/stability/card.ts'

type Range = readonly [low: number, high: number, start?: number]

/** A model in short form: the control's value and range, fixed parameters, ranges (and start values) of the states. */
export interface ShortModel {
  equations: string
  control: Record<string, readonly [value: number, low: number, high: number]>
  parameters?: Record<string, number>
  states: Record<string, Range>
  observed: string
}

/** The model document of a short form. */
export function documentOf({ equations, control, parameters = {}, states, observed }: ShortModel) {
  const [symbol = '', [value, low, high] = [0, 0, 1]] = Object.entries(control)[0] ?? []
  const fixed = Object.entries(parameters).map(([name, number]) => ({ symbol: name, value: number }))
  return {
    format: 'brinkbook-model',
    version: 1,
    title: 'Test model',
    equations,
    parameters: [{ symbol, value, low, high }, ...fixed],
    states: Object.entries(states).map(([name, [from, to, start]]) =>
      start === undefined ? { symbol: name, low: from, high: to } : { symbol: name, low: from, high: to, start },
    ),
    control: symbol,
    observed,
  }
}

/** Its card, parts steady and hopf. */
export function cardOf(model: ShortModel): StabilityCard {
  const result = analyse(documentOf(model), { parts: ['steady', 'hopf'] })
  if (!result.ok) throw new Error(JSON.stringify(result.errors))
  return result.card
}

/** The compiled model. */
export function compiled(model: ShortModel): CompiledModel {
  const checked = checkModel(documentOf(model))
  if (!checked.ok) throw new Error(JSON.stringify(checked.errors))
  return compileModel(checked.system)
}

/** Codes of a card's warnings, each once, sorted. */
export function warningCodes(card: StabilityCard): string[] {
  return [...new Set(card.warnings.map(({ code }) => code))].sort()
}

/** x' = mu x - y - x q, y' = x + mu y - y q, q = x² + y²: cubic -1, omega 1, crossing 1 at mu = 0. */
export const normalForm: ShortModel = {
  equations: 'q2 = x^2 + y^2\ndx/dt = mu*x - y - x*q2\ndy/dt = x + mu*y - y*q2',
  control: { mu: [-0.5, -1, 1] },
  states: { x: [-2, 2, 0.1], y: [-2, 2, 0.1] },
  observed: 'x',
}
