import { expect, test } from 'vitest'
import { readModelDocument } from '#shared/model/document.ts'
import { checkModel } from '#shared/model/system.ts'
import { faultPlaces, faultsOf, sampleModel } from './sample-model.ts'

// The 30 malformed and hostile documents of the project's reference set (constructed there, no outside source), rebuilt
// from one sample, each with the code the set asks for.
const oscillator = 'q2 = x^2 + y^2\ndx/dt = mu*x - y - x*q2\ndy/dt = x + mu*y - y*q2'
const second = (right: string) => `q2 = x^2 + y^2\ndx/dt = ${right}\ndy/dt = x + mu*y - y*q2`
const withEquations = (equations: string) => JSON.stringify(sampleModel({ equations }))
const x = { symbol: 'x', low: -2, high: 2, unit: '1', start: 0.1 }
const y = { symbol: 'y', low: -2, high: 2, unit: '1', start: 0.1 }
const mu = { symbol: 'mu', value: -0.5, low: -1, high: 1, unit: '1', meaning: '' }
const many = Array.from({ length: 500 }, (_, i) => i)
const raw = (members: object) => JSON.stringify({ ...sampleModel(), ...members })

const refused: [name: string, text: string, expected: string[]][] = [
  ['unknown symbol', withEquations(second('nu*x - y - x*q2')), ['unknown-symbol@2:9']],
  ['helper defined twice', withEquations(`q2 = x\n${oscillator}`), ['duplicate-equation@2:1']],
  ['equation without a state', withEquations(`${oscillator}\ndz/dt = -z`), ['missing-state@4:1']],
  ['helpers in a loop', withEquations(`q = r + 1\nr = q*2\n${oscillator}`), ['helper-cycle@1:1']],
  [
    '20,000 brackets',
    withEquations(`${oscillator}\nh = ${'('.repeat(20_000)}x${')'.repeat(20_000)}`),
    ['too-deep@4:205'],
  ],
  ['20,000 powers', withEquations(`${oscillator}\nh = ${'x^'.repeat(20_000)}x`), ['too-deep@4:406']],
  ['assignment to a state', withEquations(`x = 3\n${oscillator}`), ['assigned-input@1:1']],
  [
    'import',
    withEquations(`${oscillator}\nh = import({a: 1}, {override: true})`),
    ['unknown-function@4:5', 'syntax@4:12', 'syntax@4:14', 'syntax@4:17'],
  ],
  ['createUnit', withEquations(`${oscillator}\nh = createUnit("foo")`), ['unknown-function@4:5', 'syntax@4:16']],
  ['function definition', withEquations(`${oscillator}\nh(t) = t^2`), ['syntax@4:1', 'time-dependent@4:8']],
  ['two statements on a line', withEquations(second('mu*x; y = 3 - y - x*q2')), ['syntax@2:13']],
  ['factorial and gamma', withEquations(`${oscillator}\nh = 170! + gamma(x)`), ['syntax@4:8', 'unknown-function@4:12']],
  ['null as an end of the box', raw({ states: [{ ...x, low: null }, y] }), ['wrong-type states[0].low']],
  ['low above high', raw({ states: [{ ...x, low: 3 }, y] }), ['bad-range states[0].low']],
  ['control without a range', raw({ parameters: [{ symbol: 'mu', value: -0.5 }] }), ['bad-range parameters[0].low']],
  [
    '500 states',
    raw({
      equations: many.map((i) => `dx${i}/dt = mu*x${i} - x${i}^3`).join('\n'),
      states: many.map((i) => ({ ...x, symbol: `x${i}` })),
      observed: 'x0',
    }),
    ['too-large states'],
  ],
  [
    'invisible characters',
    withEquations(`q2 = x^2 + y^2\ndx/dt = mu*\u200bx - y - x*q2\ndy/dt = x + mu*y - y*\u202eq2`),
    ['bad-character@2:12', 'bad-character@3:22'],
  ],
  [
    'a state called __proto__',
    raw({
      equations: 'q2 = y^2\nd__proto__/dt = mu*y\ndy/dt = mu*y - q2',
      states: [{ ...x, symbol: '__proto__' }, y],
      observed: '__proto__',
    }),
    ['syntax states[0].symbol', 'syntax@2:1'],
  ],
  [
    'names of the prototype',
    withEquations(second('mu*toString*x + hasOwnProperty + valueOf - y - x*q2')),
    ['unknown-symbol@2:12', 'unknown-symbol@2:25', 'unknown-symbol@2:42'],
  ],
  [
    'reserved names',
    raw({ parameters: [mu, { symbol: 'exp', value: 1 }, { symbol: 'pi', value: 1 }] }),
    ['reserved-symbol parameters[1].symbol', 'reserved-symbol parameters[2].symbol'],
  ],
  ['a literal beyond the doubles', withEquations(second('1e999*mu*x - y - x*q2')), ['not-finite@2:9']],
  ['comments only', withEquations('# nothing\n\n   # here\n'), ['empty-model equations']],
  [
    'one mebibyte of helpers',
    withEquations(`${oscillator}\n${Array.from({ length: 66_000 }, (_, i) => `h${i} = x + ${i}`).join('\n')}`),
    ['too-large'],
  ],
  ['control that is a state', raw({ control: 'x' }), ['bad-control control']],
  ['an array for a document', '[1,2,3]', ['wrong-format']],
  ['an implied product', withEquations(second('mu x - y - x*q2')), ['syntax@2:9']],
  ['a unit for a symbol', withEquations(second('mu*x + 5*m - y - x*q2')), ['unknown-symbol@2:18']],
]

test.each(refused)('refuses %s', (_, text, expected) => {
  expect(faultPlaces(text)).toEqual(expected)
  for (const error of faultsOf(text)) expect(error.message.length).toBeLessThan(220)
})

test('leaves Object.prototype as it was after every hostile document', () => {
  const before = Reflect.ownKeys(Object.prototype).length
  for (const [, text] of refused) checkModel(text)
  for (const key of ['__proto__', 'constructor', 'prototype']) {
    readModelDocument(
      `{"format":"brinkbook-model","version":1,"${key}":{"polluted":true},"citations":[{"id":"a","${key}":{"polluted":true}}]}`,
    )
  }
  expect(Reflect.ownKeys(Object.prototype).length).toBe(before)
  expect('polluted' in {}).toBe(false)
})

test('names the loop of helpers in the order of use', () => {
  const [error] = faultsOf(withEquations(`q = r + 1\nr = q*2\n${oscillator}`))
  expect(error?.message).toContain('q → r → q')
})

test('offers the nearest declared name and the written product as cures', () => {
  expect(faultsOf(withEquations(second('nu*x')))[0]?.cures).toEqual([{ label: 'Write mu', replacement: 'mu' }])
  const [product] = faultsOf(withEquations(second('2x')))
  expect(product).toMatchObject({ code: 'syntax', line: 2, column: 9, length: 2 })
  expect(product?.cures).toEqual([{ label: 'Write 2*x', replacement: '2*x' }])
})

// Stages analysis and check: the document is fine, the analysis or the unit check has something to say.
test('accepts a logarithm of a range that goes below zero, and a continuum of steady states', () => {
  expect(faultPlaces(withEquations(second('mu*log(x) - y - x*q2')))).toEqual([])
  expect(faultPlaces(withEquations('dx/dt = 0*x\ndy/dt = mu*y'))).toEqual([])
})

test('accepts a unit that cannot be read, with a warning that has a path and no line', () => {
  const checked = checkModel(raw({ states: [{ ...x, unit: '<img src=x onerror=alert(1)>' }, y] }))
  expect(checked.ok).toBe(true)
  if (checked.ok)
    expect(checked.warnings).toEqual([
      { code: 'bad-unit', path: 'states[0].unit', message: expect.stringContaining('<img') },
    ])
})
