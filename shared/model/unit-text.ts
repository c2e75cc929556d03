/**
 * Units as typed into the tables: * / ^ and brackets, a space multiplies, SI with prefixes and a few trade units. A unit is
 * a factor times powers of the SI base units; the radian is 1. Factors count: 1/min is not 1/s.
 * Source of the values: the SI Brochure (BIPM, 9th ed., 2019), tables 2 to 8; mmHg by its conventional 133.322387415 Pa,
 * the knot as 1852 m an hour.
 */

/** Powers of kg, m, s, A, K, mol, cd. */
export interface Unit {
  factor: number
  powers: readonly number[]
}

const baseNames = ['kg', 'm', 's', 'A', 'K', 'mol', 'cd'] as const
const unit = (factor: number, powers: Partial<Record<(typeof baseNames)[number], number>> = {}): Unit => ({
  factor,
  powers: baseNames.map((name) => powers[name] ?? 0),
})

/** The unit of a pure number. */
export const pure: Unit = unit(1)

const withPrefix: ReadonlyMap<string, Unit> = new Map([
  ['m', unit(1, { m: 1 })],
  ['g', unit(1e-3, { kg: 1 })],
  ['s', unit(1, { s: 1 })],
  ['A', unit(1, { A: 1 })],
  ['K', unit(1, { K: 1 })],
  ['mol', unit(1, { mol: 1 })],
  ['cd', unit(1, { cd: 1 })],
  ['rad', unit(1)],
  ['sr', unit(1)],
  ['Hz', unit(1, { s: -1 })],
  ['N', unit(1, { kg: 1, m: 1, s: -2 })],
  ['Pa', unit(1, { kg: 1, m: -1, s: -2 })],
  ['J', unit(1, { kg: 1, m: 2, s: -2 })],
  ['W', unit(1, { kg: 1, m: 2, s: -3 })],
  ['C', unit(1, { A: 1, s: 1 })],
  ['V', unit(1, { kg: 1, m: 2, s: -3, A: -1 })],
  ['F', unit(1, { kg: -1, m: -2, s: 4, A: 2 })],
  ['ohm', unit(1, { kg: 1, m: 2, s: -3, A: -2 })],
  ['Ω', unit(1, { kg: 1, m: 2, s: -3, A: -2 })],
  ['S', unit(1, { kg: -1, m: -2, s: 3, A: 2 })],
  ['Wb', unit(1, { kg: 1, m: 2, s: -2, A: -1 })],
  ['T', unit(1, { kg: 1, s: -2, A: -1 })],
  ['H', unit(1, { kg: 1, m: 2, s: -2, A: -2 })],
  ['lm', unit(1, { cd: 1 })],
  ['lx', unit(1, { cd: 1, m: -2 })],
  ['Bq', unit(1, { s: -1 })],
  ['Gy', unit(1, { m: 2, s: -2 })],
  ['Sv', unit(1, { m: 2, s: -2 })],
  ['kat', unit(1, { mol: 1, s: -1 })],
  ['L', unit(1e-3, { m: 3 })],
  ['l', unit(1e-3, { m: 3 })],
  ['bar', unit(1e5, { kg: 1, m: -1, s: -2 })],
])

const withoutPrefix: ReadonlyMap<string, Unit> = new Map([
  ['min', unit(60, { s: 1 })],
  ['h', unit(3600, { s: 1 })],
  ['d', unit(86_400, { s: 1 })],
  ['mmHg', unit(133.322387415, { kg: 1, m: -1, s: -2 })],
  ['deg', unit(Math.PI / 180)],
  ['°', unit(Math.PI / 180)],
  // A turn is 2 pi rad and the radian is 1.
  ['rpm', unit((2 * Math.PI) / 60, { s: -1 })],
  ['%', unit(0.01)],
  ['kn', unit(1852 / 3600, { m: 1, s: -1 })],
])

const prefixes: ReadonlyMap<string, number> = new Map([
  ['da', 1e1],
  ['h', 1e2],
  ['k', 1e3],
  ['M', 1e6],
  ['G', 1e9],
  ['T', 1e12],
  ['P', 1e15],
  ['E', 1e18],
  ['Z', 1e21],
  ['Y', 1e24],
  ['R', 1e27],
  ['Q', 1e30],
  ['d', 1e-1],
  ['c', 1e-2],
  ['m', 1e-3],
  ['u', 1e-6],
  ['μ', 1e-6],
  ['n', 1e-9],
  ['p', 1e-12],
  ['f', 1e-15],
  ['a', 1e-18],
  ['z', 1e-21],
  ['y', 1e-24],
  ['r', 1e-27],
  ['q', 1e-30],
])

function named(name: string): Unit | null {
  const own = withoutPrefix.get(name) ?? withPrefix.get(name)
  if (own) return own
  for (const length of [1, 2]) {
    const scale = prefixes.get(name.slice(0, length))
    const base = withPrefix.get(name.slice(length))
    if (scale !== undefined && base) return { factor: scale * base.factor, powers: base.powers }
  }
  return null
}

export const times = (a: Unit, b: Unit): Unit => ({
  factor: a.factor * b.factor,
  powers: a.powers.map((power, i) => power + (b.powers[i] ?? 0)),
})
export const toPower = (a: Unit, exponent: number): Unit => ({
  factor: a.factor ** exponent,
  powers: a.powers.map((power) => power * exponent),
})
export const over = (a: Unit, b: Unit): Unit => times(a, toPower(b, -1))

/** True where both measure the same kind of quantity, whatever the scale. */
export function sameKind(a: Unit, b: Unit): boolean {
  return a.powers.every((power, i) => Math.abs(power - (b.powers[i] ?? 0)) < 1e-9)
}
/** True where kind and scale agree. */
export function sameUnit(a: Unit, b: Unit): boolean {
  return sameKind(a, b) && Math.abs(a.factor / b.factor - 1) < 1e-9
}

// Names worth using in a message, besides those of the model's own tables.
const speaking = ['N', 'Pa', 'J', 'W', 'V', 'ohm', 'C', 'F', 'H', 'T'].flatMap((name) =>
  ['', 'm', 'k', 'u', 'M'].map((prefix) => `${prefix}${name}`),
)

/**
 * A unit in words for a message: as one of `typed` (the tables' own spellings) where one of them is it, else a named SI
 * unit, else in base units, as in kg*m/s^2, with its factor where that is not 1.
 */
export function formatUnit(unit: Unit, typed: readonly string[] = []): string {
  if (sameUnit(unit, pure)) return 'a pure number'
  for (const text of [...typed, ...speaking]) {
    const read = parseUnit(text)
    if (read.ok && sameUnit(read.unit, unit)) return text
  }
  const { factor, powers } = unit
  const part = (power: number, name: string) => (power === 1 ? name : `${name}^${Number(power.toPrecision(4))}`)
  const present = baseNames
    .map((name, i) => ({ name, power: powers[i] ?? 0 }))
    .filter(({ power }) => Math.abs(power) > 1e-9)
  const above = present.filter(({ power }) => power > 0).map(({ name, power }) => part(power, name))
  const below = present.filter(({ power }) => power < 0).map(({ name, power }) => part(-power, name))
  const bottom = below.length > 1 ? `(${below.join('*')})` : below.join('')
  const body = `${above.length > 0 ? above.join('*') : '1'}${bottom ? `/${bottom}` : ''}`
  if (Math.abs(factor - 1) < 1e-9) return body
  const scale = String(Number(factor.toPrecision(6)))
  if (above.length > 0) return `${scale} ${body}`
  return `${scale}${bottom ? `/${bottom}` : ''}`
}

/** Outcome of reading a unit; `reason` is a sentence for the user. */
export type ReadUnit = { ok: true; unit: Unit } | { ok: false; reason: string }

const longestUnit = 200
const known = new Map<string, ReadUnit>()

/** Reads a unit. Never throws. A bare number is a pure number. */
export function parseUnit(text: string): ReadUnit {
  const before = known.get(text)
  if (before) return before
  const read = new UnitReader(text).read()
  if (known.size > 1000) known.clear()
  known.set(text, read)
  return read
}

const superscriptOf = '⁰¹²³⁴⁵⁶⁷⁸⁹'
const numberPattern = /(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?/y
const namePattern = /[A-Za-zµμΩΩ°%]+/y
const raisedPattern = /[⁺⁻]?[⁰¹²³⁴⁵⁶⁷⁸⁹]+/y

class UnitReader {
  private readonly text: string
  private at = 0
  private depth = 0
  private reason = ''

  constructor(text: string) {
    this.text = text
      .slice(0, longestUnit + 1)
      .replaceAll('\u2212', '-')
      .replace(/[·×⋅]/g, '*')
      .replace(/[\u00a0\u2009\u202f\t]/g, ' ')
  }

  read(): ReadUnit {
    if (this.text.length > longestUnit) return { ok: false, reason: 'it is too long' }
    const bare = /^ *(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)? *$/.test(this.text)
    if (bare) return { ok: true, unit: pure }
    const found = this.product()
    if (found && this.at < this.text.length) this.fail(`${this.text.charAt(this.at)} does not belong there`)
    if (!found || this.reason) return { ok: false, reason: this.reason || 'it is empty' }
    if (!Number.isFinite(found.factor) || found.factor <= 0 || !found.powers.every(Number.isFinite)) {
      return { ok: false, reason: 'its factor is out of range' }
    }
    return { ok: true, unit: found }
  }

  private fail(reason: string): null {
    this.reason ||= reason
    return null
  }

  private skip(): void {
    while (this.text.charAt(this.at) === ' ') this.at += 1
  }

  private match(pattern: RegExp): string | null {
    pattern.lastIndex = this.at
    const found = pattern.exec(this.text)?.[0] ?? null
    if (found !== null) this.at = pattern.lastIndex
    return found
  }

  private product(): Unit | null {
    this.skip()
    let result = this.factor()
    while (result) {
      this.skip()
      const sign = this.text.charAt(this.at)
      if (sign === '' || sign === ')') return result
      const divided = sign === '/'
      if (divided || sign === '*') this.at += 1
      this.skip()
      const next = this.factor()
      if (!next) return null
      result = divided ? over(result, next) : times(result, next)
    }
    return null
  }

  private factor(): Unit | null {
    const base = this.atom()
    if (!base) return null
    const raised = this.match(raisedPattern)
    if (raised !== null) {
      const digits = [...raised].map((c) => (c === '⁻' ? '-' : c === '⁺' ? '' : superscriptOf.indexOf(c))).join('')
      return this.raise(base, Number(digits))
    }
    this.skip()
    if (this.text.charAt(this.at) !== '^') return base
    this.at += 1
    this.skip()
    const exponent = this.exponent()
    return exponent === null ? null : this.raise(base, exponent)
  }

  private raise(base: Unit, exponent: number): Unit | null {
    return Math.abs(exponent) <= 100 ? toPower(base, exponent) : this.fail('its exponent is too large')
  }

  private exponent(): number | null {
    const bracket = this.text.charAt(this.at) === '('
    if (bracket) this.at += 1
    this.skip()
    const negative = this.text.charAt(this.at) === '-'
    if (negative) this.at += 1
    const above = this.match(numberPattern)
    if (above === null) return this.fail('after ^ a number is missing')
    let value = (negative ? -1 : 1) * Number(above)
    if (!bracket) return value
    this.skip()
    if (this.text.charAt(this.at) === '/') {
      this.at += 1
      this.skip()
      const below = this.match(numberPattern)
      if (below === null || Number(below) === 0) return this.fail('after / in the exponent a number is missing')
      value /= Number(below)
      this.skip()
    }
    if (this.text.charAt(this.at) !== ')') return this.fail('a bracket is not closed')
    this.at += 1
    return value
  }

  private atom(): Unit | null {
    if (this.text.charAt(this.at) === '(') {
      this.depth += 1
      if (this.depth > 20) return this.fail('it nests too deep')
      this.at += 1
      const inner = this.product()
      if (!inner) return null
      if (this.text.charAt(this.at) !== ')') return this.fail('a bracket is not closed')
      this.at += 1
      this.depth -= 1
      return inner
    }
    const digits = this.match(numberPattern)
    if (digits !== null) return { factor: Number(digits), powers: pure.powers }
    const name = this.match(namePattern)
    if (name === null)
      return this.fail(
        this.at < this.text.length
          ? `${this.text.charAt(this.at)} does not belong there`
          : 'something is missing at its end',
      )
    const found = named(name.normalize('NFKC'))
    if (!found) return this.fail(`${name} is not a unit known here`)
    if (/[0-9]/.test(this.text.charAt(this.at)))
      return this.fail(`a power needs ^, as in ${name}^${this.text.charAt(this.at)}`)
    return found
  }
}
