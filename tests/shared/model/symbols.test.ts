import { expect, test } from 'vitest'
import { characterFault, isInvisible } from '#shared/model/characters.ts'
import { nearestNames } from '#shared/model/nearest-names.ts'
import { foldSymbol, isReserved, printedLook, symbolFault } from '#shared/model/symbols.ts'
import { checkModel } from '#shared/model/system.ts'
import { faultPlaces, faultsOf, sampleModel } from './sample-model.ts'

test.each([
  ['mu', 'mu'],
  ['μ', 'mu'], // U+03BC
  ['\u00b5', 'mu'],
  ['φ', 'phi'],
  ['ϕ', 'phi'], // U+03D5
  ['ϑ', 'theta'],
  ['ϵ', 'epsilon'],
  ['ω₀', 'omega0'],
  ['x₁', 'x1'],
  ['x₁₂', 'x12'],
  ['Δx', 'Deltax'],
  ['σς', 'sigmasigma'],
  ['Ω', 'Omega'], // U+2126, the ohm sign
  ['𝑥', 'x'], // mathematical italic
  ['ｘ１', 'x1'], // full width
  ['é', 'é'],
  ['e\u0301', 'é'],
  ['vᵢ', 'vi'],
  ['x_ref', 'x_ref'],
  ['X', 'X'],
])('%s folds to %s', (typed, key) => {
  expect(foldSymbol(typed)).toBe(key)
})

test.each([
  ['', 'missing-field'],
  ['  ', 'missing-field'],
  ['1x', 'syntax'],
  ['_x', 'syntax'],
  ['x y', 'syntax'],
  ['x-y', 'syntax'],
  ['__proto__', 'syntax'],
  ['x²', 'bad-character'],
  ['xⁿ', 'bad-character'],
  ['а', 'bad-character'], // Cyrillic
  ['x\u200b', 'bad-character'],
  ['ẋ', 'bad-character'],
  ['ɑ', 'bad-character'], // Latin alpha, U+0251
  ['ı', 'bad-character'], // dotless i
  ['日', 'bad-character'],
  ['\ud835', 'bad-character'],
  ['pi', 'reserved-symbol'],
  ['π', 'reserved-symbol'],
  ['t', 'reserved-symbol'],
  ['exprel', 'reserved-symbol'],
  ['a'.repeat(65), 'too-large'],
])('%j is refused as %s', (typed, code) => {
  expect(symbolFault(typed)?.code).toBe(code)
})

test('e, T and τ may be declared; the functions may not', () => {
  expect(['e', 'T', 'τ', 'E', 'i', 'constructor'].map(symbolFault)).toEqual([null, null, null, null, null, null])
  expect(isReserved('sin')).toBe(true)
})

test('every invisible or bidirectional character is a fault that names its code point', () => {
  for (const code of [0x00ad, 0x061c, 0x200b, 0x200e, 0x202e, 0x2060, 0x2066, 0xfeff, 0xe0041]) {
    const character = String.fromCodePoint(code)
    expect(isInvisible(character)).toBe(true)
    expect(characterFault(character).message).toContain(`U+${code.toString(16).toUpperCase().padStart(4, '0')}`)
  }
})

test('two spellings of one symbol in the tables are one symbol', () => {
  const parameters = [
    { symbol: 'mu', value: -0.5, low: -1, high: 1 },
    { symbol: 'μ', value: 1 },
  ]
  expect(faultPlaces(sampleModel({ parameters }))).toEqual(['duplicate-symbol parameters[1].symbol'])
})

test('two symbols that print alike are refused though their keys differ', () => {
  const parameters = [
    { symbol: 'mu', value: -0.5, low: -1, high: 1 },
    { symbol: 'A', value: 1 },
    { symbol: 'Α', value: 1 }, // Greek capital alpha
  ]
  expect(printedLook('Α')).toBe('A')
  expect(faultPlaces(sampleModel({ parameters }))).toEqual(['duplicate-symbol parameters[2].symbol'])
})

test('the block may spell a symbol otherwise than the table; names are printed as the table spells them', () => {
  const checked = checkModel(
    sampleModel({
      equations: 'dx₁/dt = \u00b5*x₁ - φ\ndφ/dt = phi*mu',
      parameters: [{ symbol: 'μ', value: -0.5, low: -1, high: 1 }],
      states: [
        { symbol: 'x1', low: -2, high: 2 },
        { symbol: 'ϕ', low: -2, high: 2 },
      ],
      control: 'mu',
      observed: 'x₁',
    }),
  )
  expect(checked.ok && checked.system).toMatchObject({
    parameters: [{ key: 'mu', symbol: 'μ' }],
    states: [
      { key: 'x1', symbol: 'x1' },
      { key: 'phi', symbol: 'ϕ' },
    ],
    control: 0,
    observed: { kind: 'state', index: 0, symbol: 'x1' },
  })
})

test('nearest names: at most two, near ones only', () => {
  expect(nearestNames('nu', ['mu', 'omega', 'tau'])).toEqual(['mu'])
  expect(nearestNames('omgea', ['omega', 'gamma'])).toEqual(['omega'])
  expect(nearestNames('OMEGA', ['omega'])).toEqual(['omega'])
  expect(nearestNames('x', ['y', 'z'])).toEqual([])
  expect(nearestNames('alpha1', ['alpha2', 'alpha3', 'alpha4'])).toEqual(['alpha2', 'alpha3'])
})

test('a Greek letter typed for the Latin one it looks like is told with its code point', () => {
  const parameters = [
    { symbol: 'mu', value: -0.5, low: -1, high: 1 },
    { symbol: 'A', value: 1 },
  ]
  const [fault] = faultsOf(sampleModel({ parameters, equations: 'dx/dt = Α\ndy/dt = mu' }))
  expect(fault).toMatchObject({
    code: 'unknown-symbol',
    line: 1,
    column: 9,
    cures: [{ label: 'Write A', replacement: 'A' }],
  })
  expect(fault?.message).toContain('U+0391')
})
