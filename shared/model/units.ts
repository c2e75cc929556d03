import type { CardWarning } from './card-document.ts'
import type { ParsedStatement } from './equations.ts'
import type { Expression } from './expression.ts'
import { expressionText } from './expression-text.ts'
import { firstToken } from './parse-tree.ts'
import { quoted } from './symbols.ts'
import type { ModelTables, TableSymbols } from './tables.ts'
import { formatUnit, over, parseUnit, pure, sameKind, sameUnit, times, toPower, type Unit } from './unit-text.ts'

/** Most mismatches told at once. */
const mostWarnings = 200

/**
 * The unit check of a model: every sum, every argument, every exponent and both sides of each equation. A unit that is
 * absent is unknown (null) and fits anything. One slip is told once, on the line where it is made: after a mismatch a sum
 * keeps its first term's unit and a function gives a pure number.
 */
export function checkUnits(
  tables: ModelTables,
  symbols: TableSymbols,
  statements: readonly ParsedStatement[],
  orderedHelpers: readonly ParsedStatement[],
): CardWarning[] {
  const warnings: CardWarning[] = []
  const units = new Map<string, Unit | null>()
  const values = new Map<string, number | null>()
  const spellings = new Map<string, string>()
  const read = (text: string | null, path: string) => {
    if (text === null || text.trim() === '') return null
    const found = parseUnit(text)
    if (found.ok) return found.unit
    warnings.push({ code: 'bad-unit', message: `The unit ${quoted(text)} cannot be read: ${found.reason}.`, path })
    return null
  }
  const time = read(tables.timeUnit, 'timeUnit')
  for (const [key, row] of [...symbols.parameters, ...symbols.states]) {
    units.set(key, read(row.unit, `${row.path}.unit`))
    spellings.set(key, row.symbol ?? key)
  }
  for (const [key, row] of symbols.parameters) values.set(key, typeof row.value === 'number' ? row.value : null)
  for (const helper of orderedHelpers) spellings.set(helper.key, helper.symbol)

  const typed = new Set<string>()
  const timeText = tables.timeUnit?.trim() ?? ''
  for (const row of [...symbols.states.values(), ...symbols.parameters.values()]) {
    const text = row.unit?.trim() ?? ''
    if (text === '' || text.length > 40) continue
    typed.add(text)
    if (time && /^[A-Za-z]+$/.test(timeText) && /^[A-Za-z]+$/.test(text)) typed.add(`${text}/${timeText}`)
  }
  const scope = {
    units,
    values,
    typed: [...typed].sort((a, b) => a.length - b.length),
    spell: (key: string) => spellings.get(key) ?? key,
  }
  for (const helper of orderedHelpers) {
    units.set(helper.key, new UnitCheck(helper, scope, warnings).of(helper.expression))
    values.set(helper.key, constantValue(helper.expression, values))
  }
  for (const equation of statements) {
    if (equation.kind !== 'equation') continue
    const state = units.get(equation.key) ?? null
    new UnitCheck(equation, scope, warnings).equation(state && time ? over(state, time) : null)
  }
  return warnings.sort((a, b) => (a.line ?? 0) - (b.line ?? 0))
}

interface Scope {
  units: ReadonlyMap<string, Unit | null>
  values: ReadonlyMap<string, number | null>
  /** Spellings of units in the tables, shortest first, which messages use. */
  typed: readonly string[]
  spell: (key: string) => string
}

/** Value of an expression of numbers and parameters alone, at their present values; null where a state enters. */
function constantValue(expression: Expression, values: Scope['values']): number | null {
  const value = (at: Expression): number | null => {
    if (at.kind === 'number') return at.value
    if (at.kind === 'constant') return at.name === 'pi' ? Math.PI : Math.E
    if (at.kind === 'symbol') return values.get(at.key) ?? null
    if (at.kind === 'negate') {
      const of = value(at.of)
      return of === null ? null : -of
    }
    if (at.kind === 'call') return null
    const left = value(at.left)
    const right = left === null ? null : value(at.right)
    if (left === null || right === null) return null
    if (at.operator === '+') return left + right
    if (at.operator === '-') return left - right
    if (at.operator === '*') return left * right
    return at.operator === '/' ? left / right : left ** right
  }
  return value(expression)
}

interface Term {
  expression: Expression
  unit: Unit | null
}

class UnitCheck {
  private readonly statement: ParsedStatement
  private readonly scope: Scope
  private readonly warnings: CardWarning[]

  constructor(statement: ParsedStatement, scope: Scope, warnings: CardWarning[]) {
    this.statement = statement
    this.scope = scope
    this.warnings = warnings
  }

  /** Checks the right-hand side against the unit that the state's rate needs. */
  equation(needed: Unit | null): void {
    const { expression } = this.statement
    const terms = this.terms(expression)
    const found = terms.filter((term) => term.unit !== null)
    const [first] = found
    if (!first?.unit) return
    const agreed = first.unit
    if (found.every((term) => term.unit && sameUnit(term.unit, agreed))) {
      const whole = terms.length === 1 ? first.expression : expression
      const left = `d${this.statement.symbol}/dt`
      if (needed && !sameUnit(agreed, needed))
        this.tell(
          whole,
          agreed,
          needed,
          sameUnit(needed, pure) ? `${left} is a pure number` : `${left} is in ${this.format(needed)}`,
        )
    } else if (needed && found.some((term) => term.unit && sameUnit(term.unit, needed))) {
      this.blame(found, needed)
    } else this.blame(found, agreed)
  }

  /** The unit of an expression, null where it is unknown. */
  of(expression: Expression): Unit | null {
    switch (expression.kind) {
      case 'number':
        // Nothing is nothing in any unit.
        return expression.value === 0 ? null : pure
      case 'constant':
        return pure
      case 'symbol':
        return this.scope.units.get(expression.key) ?? null
      case 'negate':
        return this.of(expression.of)
      case 'call':
        return this.call(expression)
      case 'binary':
        return this.binary(expression)
    }
  }

  private binary(expression: Expression & { kind: 'binary' }): Unit | null {
    const { operator, left, right } = expression
    if (operator === '+' || operator === '-') return this.together(this.terms(expression))
    if (operator === '^') return this.power(left, right)
    return this.product(expression)
  }

  // A product may be a thousand factors long: it is walked, not descended into.
  private product(expression: Expression): Unit | null {
    const steps: { divided: boolean; unit: Unit | null }[] = []
    let at = expression
    while (at.kind === 'binary' && (at.operator === '*' || at.operator === '/')) {
      steps.push({ divided: at.operator === '/', unit: this.of(at.right) })
      at = at.left
    }
    let result = this.of(at)
    for (const { divided, unit } of steps.reverse()) {
      if (result && unit) result = divided ? over(result, unit) : times(result, unit)
      else result = null
    }
    return result
  }

  private power(base: Expression, exponent: Expression): Unit | null {
    const below = this.of(base)
    const above = this.of(exponent)
    if (above && !sameUnit(above, pure)) this.tell(exponent, above, pure, 'an exponent has to be a pure number')
    if (!below) return null
    if (sameUnit(below, pure)) return pure
    const value = constantValue(exponent, this.scope.values)
    if (value !== null) return Number.isFinite(value) && Math.abs(value) <= 100 ? toPower(below, value) : null
    this.tell(base, below, pure, 'under an exponent that varies only a pure number can stand')
    return null
  }

  private call(expression: Expression & { kind: 'call' }): Unit | null {
    const { name, args } = expression
    if (name === 'min' || name === 'max')
      return this.together(args.map((arg) => ({ expression: arg, unit: this.of(arg) })))
    const [argument] = args
    if (!argument) return null
    const unit = this.of(argument)
    if (name === 'abs') return unit
    if (name === 'sqrt') return unit && toPower(unit, 0.5)
    if (name !== 'sign' && unit && !sameUnit(unit, pure)) this.tell(argument, unit, pure, `${name} needs a pure number`)
    return pure
  }

  private terms(expression: Expression): Term[] {
    const terms: Term[] = []
    let at = expression
    while (at.kind === 'binary' && (at.operator === '+' || at.operator === '-')) {
      terms.push({ expression: at.right, unit: this.of(at.right) })
      at = at.left
    }
    terms.push({ expression: at, unit: this.of(at) })
    return terms.reverse()
  }

  private together(terms: Term[]): Unit | null {
    const known = terms.filter((term) => term.unit !== null)
    const first = known[0]?.unit ?? null
    if (first) this.blame(known, first)
    return first
  }

  private blame(terms: readonly Term[], needed: Unit): void {
    const told: Unit[] = []
    for (const { expression, unit } of terms) {
      if (!unit || sameUnit(unit, needed) || told.some((before) => sameUnit(before, unit))) continue
      told.push(unit)
      this.tell(
        expression,
        unit,
        needed,
        sameUnit(needed, pure) ? 'the other terms are pure numbers' : `the other terms are in ${this.format(needed)}`,
      )
    }
  }

  private format(unit: Unit): string {
    return formatUnit(unit, this.scope.typed)
  }

  private tell(expression: Expression, found: Unit, needed: Unit, why: string): void {
    if (this.warnings.length >= mostWarnings) return
    const text = quoted(expressionText(expression, this.scope.spell))
    const scale = found.factor / needed.factor
    const times = String(Number((scale >= 1 ? scale : 1 / scale).toPrecision(4)))
    const kind = sameKind(found, needed) ? ` The scale differs by a factor of ${times}.` : ''
    const line = firstToken(expression, this.statement.places)?.line ?? this.statement.line
    const unit = sameUnit(found, pure) ? 'a pure number' : `in ${this.format(found)}`
    const message = `${text} is ${unit}, but ${why}.${kind}`
    const told = this.warnings.some((warning) => warning.line === line && warning.message === message)
    if (!told) this.warnings.push({ code: 'unit-mismatch', message, line })
  }
}
