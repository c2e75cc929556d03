import { describe, expect, test } from 'vitest'
import type { ModelDocument } from '#shared/model/document.ts'
import { checkModel } from '#shared/model/system.ts'
import { formatUnit, parseUnit, sameUnit } from '#shared/model/unit-text.ts'
import { sampleModel } from './sample-model.ts'

const unitOf = (text: string) => {
  const read = parseUnit(text)
  if (!read.ok) throw new Error(`${text}: ${read.reason}`)
  return read.unit
}

describe('units as typed', () => {
  // Both sides of each pair are the same by definition (SI Brochure, 9th ed., 2019, tables 2 to 8; knot and mmHg as in
  // unit-text.ts).
  test.each([
    ['N', 'kg*m/s^2'],
    ['J', 'N m'],
    ['W', 'J/s'],
    ['Pa', 'N/m^2'],
    ['V', 'W/A'],
    ['ohm', 'V/A'],
    ['Ω', 'V/A'], // U+2126
    ['F', 'C/V'],
    ['H', 'Wb/A'],
    ['T', 'Wb/m^2'],
    ['S', '1/ohm'],
    ['Hz', '1/s'],
    ['rad/s', '1/s'],
    ['mrad', '0.001 rad'],
    ['1/min', '1/(60 s)'],
    ['h', '60 min'],
    ['d', '24 h'],
    ['L', 'dm^3'],
    ['mL', 'cm^3'],
    ['bar', '100 kPa'],
    ['mbar', 'hPa'],
    ['mmHg', '133.322387415 Pa'],
    ['%', '0.01 rad'],
    ['km/h', '1000 m/(3600 s)'],
    ['kn', '1852 m/h'],
    ['rpm', '6 deg/s'], // a turn is 360 deg
    ['ug/L', 'mg/m^3'],
    ['µm', 'um'], // U+00B5
    ['μm', 'um'], // U+03BC
    ['dag', '10 g'],
    ['m s^-2', 'm/s/s'],
    ['m·s⁻²', 'm/s^2'],
    ['J/(mol*K)', 'J/mol/K'],
    ['J/mol K', '(J/mol)*K'],
    ['m^(1/2)', 'm^0.5'],
    ['(m/s)^2', 'm^2/s^2'],
    ['m^-1', '1/m'],
    ['cd', 'lm/sr'],
    ['min', '60 s'],
  ])('%s is %s', (a, b) => {
    expect(sameUnit(unitOf(a), unitOf(b))).toBe(true)
  })

  test('scales count: these are not the same', () => {
    for (const [a, b] of [
      ['1/min', '1/s'],
      ['mV', 'V'],
      ['deg', 'rad'],
      ['m', 'kg'],
      ['%', '1'],
    ] as const) {
      expect(sameUnit(unitOf(a), unitOf(b))).toBe(false)
    }
  })

  test('a bare number is a pure number', () => {
    expect(formatUnit(unitOf('1'))).toBe('a pure number')
    expect(formatUnit(unitOf('100'))).toBe('a pure number')
  })

  test.each([
    '',
    'furlong',
    'm2',
    'm/',
    '/s',
    'm^',
    'm^x',
    '(m',
    'm)',
    'm**2',
    'm//s',
    '°C',
    'm$',
    '<img src=x>',
    'm^1000',
    '0 m',
    `${'('.repeat(50)}m`,
    'm'.repeat(300),
    '__proto__',
    'constructor',
  ])('%j cannot be read', (text) => {
    expect(parseUnit(text).ok).toBe(false)
  })

  test('is written in base units, with its factor', () => {
    expect(formatUnit(unitOf('kg m^2/(s^2 mol K)'))).toBe('kg*m^2/(s^2*K*mol)')
    expect(formatUnit(unitOf('m/min'))).toBe('0.0166667 m/s')
    expect(formatUnit(unitOf('1/min'))).toBe('0.0166667/s')
    expect(formatUnit(unitOf('1/min'), ['s', '1/min'])).toBe('1/min')
    expect(formatUnit(unitOf('mV'))).toBe('mV')
  })
})

const warningsOf = (document: ModelDocument) => {
  const checked = checkModel(document)
  if (!checked.ok) throw new Error(JSON.stringify(checked.errors))
  return checked.warnings
}
type Row = [symbol: string, unit?: string]
const model = (equations: string, parameters: Row[], states: Row[], timeUnit: string | undefined = 's') => {
  const ranged = ([symbol, unit]: Row) => ({ symbol, low: 1, high: 3, ...(unit === undefined ? {} : { unit }) })
  return sampleModel({
    equations,
    parameters: parameters.map((row) => ({ ...ranged(row), value: 2 })),
    states: states.map(ranged),
    control: parameters[0]?.[0] ?? '',
    observed: states[0]?.[0] ?? '',
    timeUnit,
  })
}

// The six unit cases of the project's reference set (constructed there; a separate small checker finds the same lines).
describe('reference cases', () => {
  const pendulum: [Row[], Row[]] = [
    [
      ['c', '1/s'],
      ['g', 'm/s^2'],
      ['L', 'm'],
    ],
    [
      ['th', 'rad'],
      ['w', 'rad/s'],
    ],
  ]
  test('a pendulum whose units agree', () => {
    expect(warningsOf(model('dth/dt = w\ndw/dt = -(g/L)*sin(th) - c*w', ...pendulum))).toEqual([])
  })

  test('its damping on the angle: 1/s where the line needs 1/s^2', () => {
    const warnings = warningsOf(model('dth/dt = w\ndw/dt = -(g/L)*sin(th) - c*th', ...pendulum))
    expect(warnings).toEqual([
      { code: 'unit-mismatch', line: 2, message: 'c*th is in 1/s, but the other terms are in 1/s^2.' },
    ])
  })

  test('a reactor whose units agree', () => {
    const text =
      'r = k0*exp(-E/(R*T))*C\ndC/dt = q/V*(Cf - C) - r\ndT/dt = q/V*(Tf - T) + H/(rho*cp)*r - U*A/(V*rho*cp)*(T - Tc)'
    const parameters: Row[] = [
      ['q', 'm^3/s'],
      ['V', 'm^3'],
      ['Cf', 'mol/m^3'],
      ['Tf', 'K'],
      ['Tc', 'K'],
      ['k0', '1/s'],
      ['E', 'J/mol'],
      ['R', 'J/(mol*K)'],
      ['H', 'J/mol'],
      ['rho', 'kg/m^3'],
      ['cp', 'J/(kg*K)'],
      ['U', 'W/(m^2*K)'],
      ['A', 'm^2'],
    ]
    expect(
      warningsOf(
        model(text, parameters, [
          ['C', 'mol/m^3'],
          ['T', 'K'],
        ]),
      ),
    ).toEqual([])
  })

  test('an exponent in J/(mol*K)', () => {
    const parameters: Row[] = [
      ['q', '1/s'],
      ['Cf', 'mol/m^3'],
      ['Tf', 'K'],
      ['k0', '1/s'],
      ['E', 'J/mol'],
    ]
    const states: Row[] = [
      ['C', 'mol/m^3'],
      ['T', 'K'],
    ]
    const warnings = warningsOf(model('dC/dt = q*(Cf - C) - k0*exp(-E/T)*C\ndT/dt = q*(Tf - T)', parameters, states))
    expect(warnings).toEqual([
      {
        code: 'unit-mismatch',
        line: 1,
        message: expect.stringContaining('-E/T is in kg*m^2/(s^2*K*mol), but exp needs a pure number'),
      },
    ])
  })

  test('m^2 and m/s added in a helper, told there and not where the helper is used', () => {
    const parameters: Row[] = [
      ['b', '1/s'],
      ['k', '1/s^2'],
      ['a2', 'm^2'],
    ]
    const states: Row[] = [
      ['x', 'm'],
      ['v', 'm/s'],
    ]
    const warnings = warningsOf(model('e2 = x^2 + v\ndx/dt = v\ndv/dt = -k*x + b*(1 - e2/a2)*v', parameters, states))
    expect(warnings).toEqual([
      { code: 'unit-mismatch', line: 1, message: 'v is in m/s, but the other terms are in m^2.' },
    ])
  })

  test('a rate per minute where time is in seconds: told once, with the factor 60', () => {
    const parameters: Row[] = [
      ['k', '1/min'],
      ['tau', 's'],
    ]
    const states: Row[] = [
      ['x', 'm'],
      ['u', 'm/s'],
    ]
    const warnings = warningsOf(model('dx/dt = -k*x + u\ndu/dt = -u/tau', parameters, states))
    expect(warnings).toEqual([
      { code: 'unit-mismatch', line: 1, message: expect.stringContaining('by a factor of 60.') },
    ])
  })
})

describe('what fits and what does not', () => {
  const lines = (equations: string, parameters: Row[], states: Row[], timeUnit?: string) =>
    warningsOf(model(equations, parameters, states, timeUnit)).map(({ code, line, path }) => `${code} ${line ?? path}`)

  test('a unit that is absent fits anything', () => {
    expect(lines('dx/dt = a*x + b + 3', [['a'], ['b', 'm/s']], [['x', 'm']])).toEqual(['unit-mismatch 1'])
    expect(lines('dx/dt = a*x + b', [['a'], ['b', 'm/s']], [['x', 'm']])).toEqual([])
    expect(lines('dx/dt = a*x', [['a', 'm']], [['x', 'm']], '')).toEqual([])
    expect(lines('dx/dt = a + x', [['a']], [['x']])).toEqual([])
  })

  test('zero fits anything; other numbers are pure', () => {
    expect(lines('dx/dt = max(a, 0)', [['a', 'm/s']], [['x', 'm']])).toEqual([])
    expect(lines('dx/dt = a + 1', [['a', 'm/s']], [['x', 'm']])).toEqual(['unit-mismatch 1'])
  })

  test('powers: an exponent has to be pure, and constant where its base is not', () => {
    const rows: [Row[], Row[]] = [
      [
        ['K', 'mmHg'],
        ['n', '1'],
        ['r', 'mmHg/s'],
      ],
      [['c', 'mmHg']],
    ]
    expect(lines('dc/dt = -r*c^n/(K^n + c^n)', ...rows)).toEqual([])
    expect(lines('dc/dt = -r*c^n/(K^2 + c^(n + 1))', ...rows)).toEqual(['unit-mismatch 1'])
    expect(lines('dc/dt = r*2^(c/K)', ...rows)).toEqual([])
    expect(lines('dc/dt = r*2^c', ...rows)).toEqual(['unit-mismatch 1'])
    expect(lines('dc/dt = r*(c^(c/K))/c^(c/K)', ...rows)).toEqual(['unit-mismatch 1'])
    expect(lines('dc/dt = r*sqrt(c*c)/K', ...rows)).toEqual([])
  })

  test('functions: an angle in degrees is not a pure number', () => {
    expect(lines('dx/dt = a*sin(x)', [['a', 'deg/s']], [['x', 'deg']])).toEqual(['unit-mismatch 1'])
    expect(lines('dx/dt = a*sign(x)*abs(x)', [['a', '1/s']], [['x', 'deg']])).toEqual([])
    expect(
      lines(
        'dx/dt = min(a*x, b)',
        [
          ['a', '1/s'],
          ['b', 'm'],
        ],
        [['x', 'm']],
      ),
    ).toEqual(['unit-mismatch 1'])
  })

  test('a slip on a continued line is told on the physical line of the term', () => {
    expect(lines('# first\ndx/dt = a*x +\n  a*x -\n  x', [['a', '1/s']], [['x', 'm']])).toEqual(['unit-mismatch 4'])
  })

  test('a whole right side in another unit is told once', () => {
    expect(warningsOf(model('dx/dt = a*x + a*x', [['a', 'm/s']], [['x', 'm']]))).toEqual([
      { code: 'unit-mismatch', line: 1, message: 'a*x + a*x is in m^2/s, but dx/dt is in m/s.' },
    ])
  })

  test('units that cannot be read are told by path, without a line, and then fit anything', () => {
    expect(lines('dx/dt = a*x', [['a', 'furlong']], [['x', 'm2']], 'fortnight')).toEqual([
      'bad-unit timeUnit',
      'bad-unit parameters[0].unit',
      'bad-unit states[0].unit',
    ])
  })

  test('a block full of slips gives a bounded number of warnings', () => {
    const text = Array.from(
      { length: 190 },
      (_, i) => `h${i} = x + ${Array.from({ length: 9 }, (_, k) => `a^${k + 2}`).join(' + ')}`,
    ).join('\n')
    expect(lines(`${text}\ndx/dt = x/a`, [['a', 's']], [['x', 'm']]).length).toBe(200)
  })
})
