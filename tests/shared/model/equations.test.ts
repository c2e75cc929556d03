import { describe, expect, test } from 'vitest'
import { functionNames } from '#shared/model/expression.ts'
import { checkModel } from '#shared/model/system.ts'
import { evaluate, faultPlaces, faultsOf, oneState, sampleModel, treeOf } from './sample-model.ts'

const values = { a: 2, b: 3, mu: 0.5, x: 1.5 }

describe('precedence', () => {
  // Each right side is worked out by hand with a = 2, b = 3, mu = 0.5, x = 1.5.
  test.each([
    ['-a^2', -4],
    ['(-a)^2', 4],
    ['a^b^2', 512], // 2^(3^2)
    ['a^-b', 0.125],
    ['a^-b^2', 2 ** -9],
    ['-a^-b', -0.125],
    ['a-b-x', -2.5],
    ['a/b/x', 2 / 3 / 1.5],
    ['a/b*x', 1],
    ['a*b^2', 18],
    ['a - -b', 5],
    ['a*-b', -6],
    ['a/-b', -2 / 3],
    ['+a', 2],
    ['-+-a', 2],
    ['-a*b', -6],
    ['a+b*x^2', 8.75],
    ['2*(a+b)*x', 15],
    ['min(a, b, x)', 1.5],
    ['max(a, b, x)', 3],
    ['exp(0)*pi', Math.PI],
    ['e', Math.E],
    ['π', Math.PI],
    ['exprel(0) + expm1(0) + log1p(0)', 1],
    ['1e3 + 1.5e-1 + .5 + 2.', 1002.65],
    ['1E+2', 100],
    ['1e\u22122', 0.01],
    ['a \u2212 b \u00d7 x \u00b7 2', -7],
    ['a\u00a0+\u2009b', 5],
  ])('%s is %d', (right, expected) => {
    expect(evaluate(treeOf(right), values)).toBeCloseTo(expected, 13)
  })
})

test('every function of the format is read, with two arguments where two are meant', () => {
  for (const name of functionNames) {
    const args = name === 'min' || name === 'max' ? 'x, a' : 'x'
    expect(treeOf(`${name}(${args})`)).toMatchObject({ kind: 'call', name })
  }
})

test('a declared symbol wins over every meaning the parser has for its name', () => {
  const names = [
    'i',
    'e',
    'E',
    'm',
    'h',
    'tau',
    'phi',
    'kg',
    'true',
    'false',
    'null',
    'NaN',
    'Infinity',
    'not',
    'mod',
    'to',
    'in',
    'and',
    'or',
    'xor',
    'end',
    'toString',
    'constructor',
    'hasOwnProperty',
    'LN2',
    'undefined',
    'v0',
  ]
  const document = sampleModel({
    equations: `dx/dt = ${names.join(' + ')}`,
    parameters: [{ symbol: 'mu', value: 0, low: -1, high: 1 }, ...names.map((symbol, i) => ({ symbol, value: i }))],
    states: [{ symbol: 'x', low: -1, high: 1 }],
  })
  const checked = checkModel(document)
  expect(checked).toMatchObject({ ok: true })
  if (!checked.ok) return
  const [equation] = checked.system.equations
  const numbers = Object.fromEntries(names.map((name, i) => [name, i]))
  // 0 + 1 + ... + 26
  expect(equation && evaluate(equation.expression, numbers)).toBe((names.length * (names.length - 1)) / 2)
})

test('a helper called e wins over the constant', () => {
  const checked = checkModel(oneState('e*x', '\ne = a + b'))
  expect(checked.ok && checked.system.equations[0]?.expression).toMatchObject({ left: { kind: 'symbol', key: 'e' } })
})

describe('statements', () => {
  test('a line that ends in an operator or an open bracket goes on, over comments and blank lines', () => {
    const text = 'dx/dt = mu*( # opens\n  x +\n\n # in between\n  y) -\r\n  max(x,\n  y)\ndy/dt = -y'
    expect(faultPlaces(sampleModel({ equations: text }))).toEqual([])
  })

  test('lines are physical lines, with LF, CRLF and a lone CR alike', () => {
    const text = ['# one', 'dx/dt = y', '', 'dy/dt = mu*', '  (x - zz)']
    for (const end of ['\n', '\r\n', '\r']) {
      expect(faultPlaces(sampleModel({ equations: text.join(end) }))).toEqual(['unknown-symbol@5:8'])
    }
  })

  test('columns count UTF-16 units from 1', () => {
    // 𝑦 is two units and folds to y; the unknown symbol begins at unit 13.
    expect(faultPlaces(sampleModel({ equations: 'dx/dt = 𝑦 + zz\ndy/dt = mu' }))).toEqual(['unknown-symbol@1:14'])
  })

  test('helpers are ordered by use whatever their order in the text, and keep their lines', () => {
    const checked = checkModel(oneState('h3', '\nh3 = h2 + h1\nh1 = x\nh2 = h1*2'))
    expect(checked.ok && checked.system.helpers.map(({ key, line }) => `${key}@${line}`)).toEqual([
      'h1@3',
      'h2@4',
      'h3@2',
    ])
  })

  test('a chain that doubles 60 times stays as small as its text', () => {
    const chain = Array.from({ length: 60 }, (_, i) => `a${i + 1} = a${i} + a${i}`).join('\n')
    const checked = checkModel(oneState('a60', `\na0 = x\n${chain}`))
    expect(checked.ok && checked.system.helpers.length).toBe(61)
  })

  test('one error for each loop, a helper of itself included', () => {
    const faults = faultsOf(oneState('p + s', '\np = q\nq = r\nr = p\ns = s + 1'))
    expect(faults.map((fault) => fault.message)).toEqual([
      'These helper quantities are defined by each other: p → q → r → p.',
      's is defined by itself.',
    ])
  })
})

describe('what is refused, with its code and place', () => {
  const cases: [right: string, expected: string[]][] = [
    ['2x', ['syntax@1:9']],
    ['x a', ['syntax@1:9']],
    ['(a)(x)', ['syntax@1:11']],
    ['2(x)', ['syntax@1:9']],
    ['x(2)', ['syntax@1:9']],
    ['pi(2)', ['syntax@1:9']],
    ['2 3', ['syntax@1:9']],
    ['2e', ['syntax@1:9']],
    ['2e + x', ['syntax@1:9']],
    ['0x10', ['syntax@1:9']],
    ['0b1', ['syntax@1:9']],
    ['1.2.3', ['syntax@1:9']],
    ['1..2', ['syntax@1:9']],
    ['1,5', ['syntax@1:9']],
    ['1e999', ['not-finite@1:9']],
    ['5%', ['syntax@1:10']],
    ['x!', ['syntax@1:10']],
    ["x'", ['syntax@1:10']],
    ['x; a', ['syntax@1:10']],
    ['1:3', ['syntax@1:10']],
    ['"a"', ['syntax@1:9']],
    ['[1, 2]', ['syntax@1:9', 'syntax@1:14']],
    ['x > a', ['syntax@1:11']],
    ['x == a', ['syntax@1:11']],
    ['a = b', ['syntax@1:11']],
    ['a**b', ['syntax@1:11']],
    ['x.y', ['syntax@1:10']],
    ['x ? a : b', ['syntax@1:11', 'syntax@1:15']],
    ['a & b', ['syntax@1:11']],
    ['', ['syntax@1:7']],
    ['a +', ['syntax@1:11']],
    ['a + * b', ['syntax@1:13']],
    ['(a', ['syntax@1:9']],
    ['a)', ['syntax@1:10']],
    ['()', ['syntax@1:10']],
    ['a + ()', ['syntax@1:14']],
    ['sin', ['syntax@1:9']],
    ['sin x', ['syntax@1:9']],
    ['sin()', ['syntax@1:13']],
    ['sin(x, a)', ['syntax@1:9']],
    ['min(x)', ['syntax@1:9']],
    ['max()', ['syntax@1:13']],
    ['min(x,)', ['syntax@1:15']],
    ['(x, a)', ['syntax@1:11']],
    ['ln(x)', ['unknown-function@1:9']],
    ['gamma(x) + derivative(x, a)', ['unknown-function@1:9', 'unknown-function@1:20']],
    ['t*x', ['time-dependent@1:9']],
    ['nope + nada', ['unknown-symbol@1:9', 'unknown-symbol@1:16']],
    ['dx', ['unknown-symbol@1:9']],
    ['x + а', ['bad-character@1:13']], // Cyrillic a, U+0430
    ['xа', ['bad-character@1:10']],
    ['x\u200b', ['bad-character@1:10']],
    ['x\u00ad2', ['bad-character@1:10']],
    ['x²', ['bad-character@1:10']],
    ['x \u2013 a', ['bad-character@1:11']],
    ['x \u22c5 a', ['bad-character@1:11']],
    ['x \ud800', ['bad-character@1:11']],
    ['x \u0000', ['bad-character@1:11']],
    ['x # \u202e hidden', ['bad-character@1:13']],
    ['_x', ['syntax@1:9']],
    ['x\n+ a', ['syntax@2:1']],
    ['(a +\n- b)', ['syntax@2:1']],
    ['a*\ny = 3', ['syntax@1:10']],
    ['a\nx = 3', ['assigned-input@2:1']],
    ['a\na = 3', ['assigned-input@2:1']],
    ['a\nsin = 3', ['reserved-symbol@2:1']],
    ['a\nt = 3', ['reserved-symbol@2:1']],
    ['a\ndx/dt = b', ['duplicate-equation@2:1']],
    ['a\nh = 1\nh = 2', ['duplicate-equation@3:1']],
    ['a\nda/dt = 1', ['missing-state@2:1']],
    ['a\ndz/dt = 1', ['missing-state@2:1']],
    ['a\nhello', ['syntax@2:1']],
    ['a\n= 3', ['syntax@2:1']],
    ['a\nf(x) = 3', ['syntax@2:1']],
    ['a\nh + 1 = 3', ['syntax@2:1']],
    ['a\nd2/dt = 3', ['syntax@2:1']],
    ['a\nΑ = 3\nA = 4', ['duplicate-symbol@3:1']], // Greek capital alpha, then Latin A
    [`${'('.repeat(201)}x${')'.repeat(201)}`, ['too-deep@1:209']],
    [`${'-'.repeat(201)}x`, ['too-deep@1:209']],
    [`${'x + '.repeat(1000)}x`, ['too-large@1:4009']],
  ]
  test.each(cases.map(([right, expected]) => [JSON.stringify(right).slice(0, 40), right, expected] as const))(
    '%s',
    (_, right, expected) => {
      expect(faultPlaces(oneState(right))).toEqual(expected)
    },
  )
})

test('the limits themselves are still accepted', () => {
  for (const right of [
    `${'('.repeat(200)}x${')'.repeat(200)}`,
    `${'x^'.repeat(200)}x`,
    `${'-'.repeat(200)}x`,
    `${'exp('.repeat(200)}x${')'.repeat(200)}`,
    `${'x + '.repeat(999)}x`,
    `${'x*'.repeat(999)}x`,
    `x${' '.repeat(65_527)}`,
  ]) {
    expect(faultPlaces(oneState(right))).toEqual([])
  }
  const helpers = Array.from({ length: 200 }, (_, i) => `\nh${i} = x`).join('')
  expect(faultPlaces(oneState('x', helpers))).toEqual([])
  expect(faultPlaces(oneState('x', `${helpers}\nh200 = x`))).toEqual(['too-large@202:1'])
  expect(faultPlaces(oneState(`x${' '.repeat(65_528)}`))).toEqual(['too-large equations'])
})

test('every fault of the block and the tables is told at once', () => {
  const document = sampleModel({
    equations: 'q = nope\ndx/dt = 2y + foo(x)\nx = 3',
    states: [
      { symbol: 'x', low: 1, high: 0 },
      { symbol: 'y', low: 0, high: 1 },
    ],
    control: 'kappa',
    observed: 'none',
  })
  expect(faultPlaces(document).sort()).toEqual(
    [
      'bad-control control',
      'bad-observed observed',
      'bad-range states[0].low',
      'missing-equation states[1].symbol',
      'unknown-symbol@1:5',
      'syntax@2:9',
      'unknown-function@2:14',
      'assigned-input@3:1',
    ].sort(),
  )
})

test('messages name the code point of what cannot be seen or is a look-alike', () => {
  expect(faultsOf(oneState('x + а'))[0]?.message).toContain('U+0430')
  expect(faultsOf(oneState('x + а'))[0]?.cures).toEqual([{ label: 'Write a', replacement: 'a' }])
  expect(faultsOf(oneState('x\u2066'))[0]?.message).toContain('U+2066 (left-to-right isolate)')
})

test('a derivative on the right is told as such', () => {
  expect(faultsOf(oneState('dx'))[0]?.message).toContain('Derivatives may not stand on the right')
})
