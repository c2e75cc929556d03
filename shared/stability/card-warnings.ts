import type { CardWarning } from '#shared/model/card-document.ts'
import type { Expression, ModelSystem } from '#shared/model/expression.ts'
import { type BranchSet, findOnPaths } from './branches.ts'
import { controlOf, type Frame, stateOf } from './frame.ts'
import type { SteadyStateResult } from './steady-states.ts'
import type { HopfJudgement } from './verdict.ts'
import type { ListedHopf } from './window.ts'

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
  return { add, list: () => [...all] }
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

function symbolOfControl({ model, control }: Frame): string {
  return model.system.parameters[control]?.symbol ?? ''
}

const fourDigits = (value: number): string => String(Number(value.toPrecision(4)))

/** Looks over the ranges for points without a finite value, and tells each line once with the first place met. */
function warnOfNotFinite(frame: Frame, warnings: WarningList): void {
  const { model, boxLow, boxHigh, n } = frame
  const parameters = Float64Array.from(model.system.parameters, ({ value }) => value)
  const x = new Float64Array(n)
  const told = new Set<number>()
  for (let k = 0; k < 64; k++) {
    for (let i = 0; i < n; i++) {
      // the start values first, then points spread by irrational steps
      const share = (0.5 + k * Math.sqrt(2 + i * 3)) % 1
      x[i] = (boxLow[i] as number) + share * ((boxHigh[i] as number) - (boxLow[i] as number))
    }
    if (k === 0) for (let i = 0; i < n; i++) x[i] = model.system.states[i]?.start ?? 0
    for (const line of model.notFiniteLines(x, parameters)) {
      if (told.has(line)) continue
      told.add(line)
      const message = `Line ${line} has no finite value in part of the ranges searched, as at ${placeText(model.system, frame.own, x)}.`
      warnings.add({ code: 'not-finite-here', message, line })
    }
  }
}

/** What the search for steady states at the own value could not do. */
export function warnOfSearch(frame: Frame, own: SteadyStateResult, warnings: WarningList): void {
  const { system } = frame.model
  if (own.notFinite) warnOfNotFinite(frame, warnings)
  if (own.continuum) {
    const message = 'The steady states form a line or surface: there is no list of them, and no branch to follow.'
    warnings.add({ code: 'continuum-of-steady-states', message })
    return
  }
  if (own.states.length === 0) {
    const ranges = system.states.map(({ symbol }) => symbol).join(', ')
    const message = `No steady state was found in the ranges of ${ranges} at ${symbolOfControl(frame)} = ${fourDigits(frame.own)}.`
    warnings.add({ code: 'no-steady-state', message })
  }
  if (!own.complete) {
    const message = 'Steady states were searched for, but it is not proved that the ranges hold no other.'
    warnings.add({ code: 'searched-not-proved', message })
  }
}

/** Where branches ended before the end of the range, and why. */
export function warnOfBranches(frame: Frame, set: BranchSet, warnings: WarningList): void {
  const { system } = frame.model
  for (const path of set.paths) {
    path.ends.forEach((end, index) => {
      const vertex = path.vertices.at(index === 0 ? 0 : -1)
      if (!vertex) return
      const { z } = vertex.sample
      const place = placeText(system, controlOf(frame, z), stateOf(frame, z))
      if (end.kind === 'box-left') {
        const symbol = system.states[end.state]?.symbol ?? ''
        warnings.add({ code: 'branch-left-box', message: `A branch leaves the range of ${symbol} at ${place}.` })
      } else if (end.kind === 'not-finite') {
        const message = `A branch ends where the model has no finite value, near ${place}.`
        for (const line of end.lines) warnings.add({ code: 'not-finite-here', message, line })
        if (end.lines.length === 0) warnings.add({ code: 'not-finite-here', message })
      } else if (end.kind === 'budget') {
        warnings.add({ code: 'budget-spent', message: `A branch could not be followed beyond ${place}.` })
      }
    })
  }
  for (const z of set.lines) {
    const message = `A whole line of steady states stands at ${symbolOfControl(frame)} = ${fourDigits(controlOf(frame, z))}.`
    warnings.add({ code: 'continuum-of-steady-states', message })
  }
  // one that lies on a branch found from another value is not missing
  const missing = set.unfollowed.find((z) => findOnPaths(frame, set.paths, z) === null)
  if (missing) {
    const place = placeText(system, controlOf(frame, missing), stateOf(frame, missing))
    const message = `The steady state at ${place} is a multiple one: no branch could be followed through it.`
    warnings.add({ code: 'budget-spent', message })
  }
  if (frame.budget.spent()) warnOfSpentBudget(warnings)
}

/** The work allowed, or the time of whoever asked, is used up. */
export function warnOfSpentBudget(warnings: WarningList): void {
  const message = 'The work allowed for one card was used up: branches, Hopf points or sensitivities may be missing.'
  warnings.add({ code: 'budget-spent', message })
}

/** What stands beside a verdict. */
export function warnOfHopf(
  frame: Frame,
  listed: readonly ListedHopf[],
  judgements: readonly HopfJudgement[],
  warnings: WarningList,
): void {
  const { system } = frame.model
  listed.forEach(({ card }, i) => {
    const at = `${symbolOfControl(frame)} = ${fourDigits(card.p)}`
    const judged = judgements[i]
    if (judged?.degenerateBy === 'cubic') {
      const message = `At ${at} the cubic coefficient cannot be told from zero: soft or hard is not decided.`
      warnings.add({ code: 'degenerate', message })
    }
    if (judged?.degenerateBy === 'other-eigenvalue') {
      const message = `At ${at} another eigenvalue lies on the imaginary axis: soft or hard is not decided.`
      warnings.add({ code: 'degenerate', message })
    }
    if (judged?.silent) {
      const message = `${system.observed.symbol} does not move to first order with the oscillation at ${at}: observe another quantity.`
      warnings.add({ code: 'observed-silent', message })
    }
    if (card.verdict === 'undetermined') {
      const message = `abs, sign, min or max has its kink at the steady state at ${at}: soft or hard is not determined.`
      for (const line of kinkLines(system)) warnings.add({ code: 'not-smooth', message, line })
    }
  })
}

type NoWindow =
  | 'outside-range'
  | 'no-steady-state'
  | 'unstable'
  | 'oscillates'
  | 'diverges'
  | 'undecided'
  | 'not-finite'
  | 'stopped'
  | 'no-branch'

const noWindow: Record<NoWindow, string> = {
  'outside-range': "The control's own value lies outside its range: there is no window around it.",
  'no-steady-state': 'There is no steady state at the own values: there is no window.',
  unstable: 'No steady state is stable at the own values: there is no window.',
  oscillates: 'From its start values the model settles on an oscillation, not on a steady state: there is no window.',
  diverges: 'From its start values the model runs far out of the ranges of its states: there is no window.',
  undecided:
    'From its start values the model did not settle on a steady state in the time looked at: there is no window.',
  'not-finite': 'From its start values the model reaches a point without a finite value: there is no window.',
  stopped: 'The analysis was stopped before the window was known.',
  'no-branch':
    'The steady state that the model settles on lies on no branch that could be followed: there is no window.',
}

/** Why the card's window is null. */
export function warnOfNoWindow(reason: NoWindow, warnings: WarningList): void {
  warnings.add({ code: reason === 'stopped' ? 'budget-spent' : 'no-window', message: noWindow[reason] })
}
