import { describe, expect, test } from 'vitest'
import { readModelDocument } from '#shared/model/document.ts'
import { errorCodes } from '#shared/model/errors.ts'
import { buildSystem, checkModel } from '#shared/model/system.ts'
import { faultPlaces, faultsOf, oneState, sampleModel } from './sample-model.ts'

const withMembers = (members: object) => ({ ...sampleModel(), ...members })
const without = (name: string) => Object.fromEntries(Object.entries(sampleModel()).filter(([key]) => key !== name))
const parameter = { symbol: 'mu', value: -0.5, low: -1, high: 1 }

describe('the shape of a document', () => {
  test.each(['format', 'version', 'title', 'equations', 'parameters', 'states', 'control', 'observed'])(
    '%s is required',
    (name) => {
      expect(faultPlaces(without(name))).toContain(`missing-field ${name}`)
    },
  )

  test.each<[string, unknown, string[]]>([
    ['no JSON', '{"format": ', ['not-json']],
    ['an empty file', '', ['not-json']],
    ['a number', '3', ['wrong-format']],
    ['null', null, ['wrong-format']],
    ['another format', { format: 'brinkbook-card', version: 1 }, ['wrong-format format']],
    ['another version', withMembers({ version: 2 }), ['wrong-format version']],
    ['an unknown field', withMembers({ colour: 'red' }), ['unknown-field colour']],
    [
      'an unknown field of a state',
      withMembers({
        states: [
          { symbol: 'x', low: 0, high: 1, colour: 1 },
          { symbol: 'y', low: 0, high: 1 },
        ],
      }),
      ['unknown-field states[0].colour'],
    ],
    ['a field with an odd name', withMembers({ 'a b': 1 }), ['unknown-field ["a b"]']],
    [
      'text for a number',
      withMembers({ parameters: [{ ...parameter, value: '1' }] }),
      ['wrong-type parameters[0].value'],
    ],
    ['a number for text', withMembers({ title: 3 }), ['wrong-type title']],
    ['an object for a list', withMembers({ states: {} }), ['wrong-type states']],
    ['a row that is no object', withMembers({ parameters: [parameter, 7] }), ['wrong-type parameters[1]']],
    [
      'an unknown kind of uncertainty',
      withMembers({ parameters: [{ ...parameter, uncertainty: { kind: 'cauchy' } }] }),
      ['wrong-type parameters[0].uncertainty.kind'],
    ],
    [
      'a negative standard deviation',
      withMembers({ parameters: [{ ...parameter, uncertainty: { kind: 'normal', sd: -1 } }] }),
      ['bad-range parameters[0].uncertainty.sd'],
    ],
    [
      'an uncertainty upside down',
      withMembers({ parameters: [{ ...parameter, uncertainty: { kind: 'uniform', low: 2, high: 1 } }] }),
      ['bad-range parameters[0].uncertainty.low'],
    ],
    [
      'a locator label that CSL does not have',
      withMembers({ citations: [{ id: 'a' }], lineCitations: [{ line: 1, id: 'a', label: 'shelf' }] }),
      ['wrong-type lineCitations[0].label'],
    ],
    [
      'a line citation of line 0',
      withMembers({ citations: [{ id: 'a' }], lineCitations: [{ line: 0, id: 'a' }] }),
      ['bad-range lineCitations[0].line'],
    ],
    ['no states', oneStateless(), ['empty-model states', 'unknown-symbol@1:7']],
  ])('%s', (_, input, expected) => {
    expect(faultPlaces(input)).toEqual(expected)
  })

  function oneStateless() {
    return withMembers({ states: [], equations: 'h = 2*x', observed: 'h' })
  }

  test('numbers that JSON turns into Infinity are told wherever they stand', () => {
    const text = JSON.stringify(withMembers({ citations: [{ id: 'a', issued: { 'date-parts': [[7]] } }] }))
      .replace('-0.5', '1e999')
      .replace('[[7]]', '[[-1e999]]')
    expect(faultPlaces(text)).toEqual([
      'not-finite parameters[0].value',
      'not-finite citations[0].issued["date-parts"][0][0]',
    ])
  })

  test('nesting without end, as text and as a value', () => {
    expect(faultPlaces('['.repeat(100_000))).toEqual(['too-deep'])
    expect(faultPlaces(`{"format":"brinkbook-model","citations":${'['.repeat(70)}${']'.repeat(70)}}`)).toEqual([
      'too-deep',
    ])
    const round: Record<string, unknown> = withMembers({})
    round.citations = [round]
    expect(faultPlaces(round)).toEqual(['too-deep citations[0].citations[0]'])
  })

  test('a string of brackets is not nesting', () => {
    expect(faultPlaces(JSON.stringify(withMembers({ notes: `\\"${'['.repeat(1000)}` })))).toEqual([])
  })

  test('half characters are refused in any text', () => {
    expect(faultPlaces(withMembers({ title: 'a\ud800' }))).toEqual(['bad-character title'])
  })

  test('a byte order mark before the text is passed over', () => {
    expect(faultPlaces(`\ufeff${JSON.stringify(sampleModel())}`)).toEqual([])
  })

  test('a thousand wrong members are told in bounded number', () => {
    const faults = faultsOf(withMembers({ leftOut: Array(100_000).fill(0) }))
    expect(faults).toHaveLength(500)
  })
})

test('a full document with every optional member is read and given back unchanged', () => {
  const document = sampleModel({
    summary: 'two sentences',
    field: 'aeroelasticity',
    timeUnit: 's',
    parameters: [
      { symbol: 'omega', value: 1, low: 0.5, high: 2, unit: '1/s' },
      {
        ...parameter,
        unit: '1/s',
        meaning: 'net growth rate',
        uncertainty: { kind: 'normal', sd: 0.02 },
        citations: ['key1', { id: 'key1', label: 'equation', locator: '5.31', quoted: '0.42' }],
      },
    ],
    secondControl: 'omega',
    observed: 'q2',
    citations: [{ id: 'key1', type: 'book', title: 'A book', issued: { 'date-parts': [[1983]] } }],
    lineCitations: [{ line: 2, id: 'key1', label: 'equation', locator: '5.31', quoted: '0.42' }],
    notes: 'free text',
    quietWord: 'Runs straight',
    leftOut: ['unsteady wake'],
  })
  const read = readModelDocument(JSON.stringify(document))
  expect(read).toEqual({ ok: true, document })
})

test('citations that are not in the list are told with their path', () => {
  const document = withMembers({
    parameters: [{ ...parameter, citations: ['nobody', { id: 'somebody' }] }],
    citations: [{ id: 7 }],
    lineCitations: [
      { line: 1, id: '7' },
      { line: 2, id: '8' },
    ],
  })
  expect(faultPlaces(document)).toEqual([
    'unknown-citation parameters[0].citations[0]',
    'unknown-citation parameters[0].citations[1].id',
    'unknown-citation lineCitations[1].id',
  ])
})

describe('what the words mean to each other', () => {
  const second = { symbol: 'k', value: 1, low: 0, high: 2 }
  test.each<[string, object, string[]]>([
    ['a second control that is the first', { secondControl: 'mu' }, ['bad-control secondControl']],
    ['a second control that is no parameter', { secondControl: 'q2' }, ['bad-control secondControl']],
    [
      'a second control without its high end',
      { parameters: [parameter, { symbol: 'k', value: 1, low: 0 }], secondControl: 'k' },
      ['bad-range parameters[1].high'],
    ],
    [
      'a second control whose range is empty',
      { parameters: [parameter, { ...second, low: 2 }], secondControl: 'k' },
      ['bad-range parameters[1].low'],
    ],
    ['a control whose range is empty', { parameters: [{ ...parameter, low: 1 }] }, ['bad-range parameters[0].low']],
    [
      'a range too wide to compute with',
      { parameters: [{ ...parameter, low: -1e308, high: 1e308 }] },
      ['bad-range parameters[0].low'],
    ],
    ['an observed parameter', { observed: 'mu' }, ['bad-observed observed']],
    ['an observed nothing', { observed: '' }, ['bad-observed observed']],
    ['a state without an equation', { equations: 'dx/dt = mu*x' }, ['missing-equation states[1].symbol']],
    [
      'a parameter in both tables',
      { parameters: [parameter, { symbol: 'y', value: 1 }] },
      ['duplicate-symbol states[1].symbol'],
    ],
    [
      '201 parameters',
      { parameters: Array.from({ length: 201 }, (_, i) => ({ symbol: `p${i}`, value: 1 })) },
      ['too-large parameters'],
    ],
    [
      '31 states',
      { states: Array.from({ length: 31 }, (_, i) => ({ symbol: `s${i}`, low: 0, high: 1 })) },
      ['too-large states'],
    ],
  ])('%s', (_, members, expected) => {
    expect(faultPlaces(withMembers(members))).toEqual(expected)
  })

  test('low equal to high is a fixed parameter', () => {
    expect(faultPlaces(withMembers({ parameters: [parameter, { ...second, low: 1, high: 1 }] }))).toEqual([])
  })

  test('start is the middle of the range where it is absent', () => {
    const checked = checkModel(oneState('mu*x'))
    // The range of x is -1 to 1.
    expect(checked.ok && checked.system.states[0]?.start).toBe(0)
  })

  test('a value outside its range is a warning, not a refusal', () => {
    const checked = checkModel(withMembers({ parameters: [{ ...parameter, value: 2 }] }))
    expect(checked).toMatchObject({
      ok: true,
      warnings: [{ code: 'value-outside-range', path: 'parameters[0].value' }],
    })
  })

  test('an observed helper is found in the order of use', () => {
    const built = buildSystem(
      sampleModel({ equations: 'big = 2*small\nsmall = x\ndx/dt = mu*x - y - big\ndy/dt = x', observed: 'big' }),
    )
    expect(built.ok && built.system.observed).toEqual({ kind: 'helper', index: 1, symbol: 'big' })
  })
})

// Every code of the list but budget-exceeded, which only an analysis can give.
test('every code is given by some document', () => {
  const inputs: unknown[] = [
    '{',
    '[]',
    withMembers({ colour: 1 }),
    without('control'),
    withMembers({ title: 1 }),
    withMembers({ equations: '#'.repeat(70_000) }),
    withMembers({ equations: '' }),
    withMembers({ equations: 'dx/dt = x x' }),
    withMembers({ equations: 'dx/dt = \u200bx' }),
    withMembers({ equations: 'dx/dt = z' }),
    withMembers({ equations: 'dx/dt = f(x)' }),
    withMembers({ lineCitations: [{ line: 1, id: 'a' }] }),
    withMembers({ equations: 'dx/dt = x\ndx/dt = y' }),
    withMembers({ parameters: [parameter, parameter] }),
    withMembers({ parameters: [parameter, { symbol: 't', value: 1 }] }),
    withMembers({ equations: 'mu = 2' }),
    withMembers({ equations: 'dx/dt = 1' }),
    withMembers({ equations: 'dw/dt = 1' }),
    withMembers({ equations: 'h = h' }),
    withMembers({ equations: 'dx/dt = t' }),
    withMembers({ states: [{ symbol: 'x', low: 1, high: 0 }] }),
    withMembers({ equations: 'dx/dt = 1e999' }),
    withMembers({ control: 'x' }),
    withMembers({ observed: 'mu' }),
    '['.repeat(100),
  ]
  const given = new Set(inputs.flatMap((input) => faultsOf(input).map((fault) => fault.code)))
  expect([...errorCodes].filter((code) => !given.has(code))).toEqual(['budget-exceeded'])
})
