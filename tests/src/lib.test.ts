import { describe, expect, test } from 'vitest'
import { cloudPath } from '#src/components/cloud-path.ts'
import { filtersOf, searchOf, toggled } from '#src/features/library/library-address.ts'
import { classes } from '#src/lib/class-names.ts'
import { shortFigure } from '#src/lib/figures.ts'
import { newIdempotencyKey } from '#src/lib/idempotency-key.ts'
import { initials, shortName } from '#src/lib/initials.ts'
import { largestFile, readModelText } from '#src/lib/model-file.ts'
import { ownPath } from '#src/lib/own-path.ts'
import { prefixesOf } from '#src/lib/prefixes.ts'
import { symbolParts } from '#src/lib/symbol-parts.ts'
import { utcDay } from '#src/lib/times.ts'

describe('where to go after signing in', () => {
  test('a path of this library is kept with its query', () => {
    expect(ownPath('/m/RUN-09/record?with=1.0.0#top')).toBe('/m/RUN-09/record?with=1.0.0#top')
  })

  test.each([
    null,
    '',
    'https://elsewhere.example/',
    '//elsewhere.example',
    '/\\elsewhere.example',
    '/\t/elsewhere.example',
    'javascript:alert(1)',
    'm/RUN-09',
    '/.//elsewhere.example',
    '/sign-in?next=/',
  ])('%j leads to the beginning', (next) => {
    expect(ownPath(next)).toBe('/')
  })
})

describe('address of the library', () => {
  test('choices survive the way through the address', () => {
    const filters = {
      q: 'tread',
      onset: ['hard', 'soft'],
      state: ['draft'],
      group: ['fellside-rail'],
      sort: 'code',
    } as const
    const there = searchOf({
      ...filters,
      onset: [...filters.onset],
      state: [...filters.state],
      group: [...filters.group],
    })
    expect(there.toString()).toBe('q=tread&onset=hard&onset=soft&state=draft&group=fellside-rail&sort=code')
    expect(filtersOf(there)).toEqual(filters)
  })

  test('what the library does not know is left out, so that an old address still opens', () => {
    expect(filtersOf(new URLSearchParams('onset=purple&state=gone&group=No Such&sort=size&q=%20'))).toEqual({
      q: undefined,
      onset: undefined,
      state: undefined,
      group: undefined,
      sort: undefined,
    })
  })

  test('the last tick taken out means no narrowing', () => {
    expect(toggled(undefined, 'hard')).toEqual(['hard'])
    expect(toggled(['hard', 'soft'], 'hard')).toEqual(['soft'])
    expect(toggled(['soft'], 'soft')).toBeUndefined()
  })
})

describe('symbols', () => {
  test.each([
    ['V', 'V', null],
    ['mu', 'μ', null],
    ['omega0', 'ω', '0'],
    ['tau_d', 'τ', 'd'],
    ['x_ref_2', 'x', 'ref,2'],
    ['k_mu', 'k', 'μ'],
    ['gNa', 'gNa', null],
    ['x₁', 'x', '1'],
  ])('%s is set as %s with %s below', (symbol, base, sub) => {
    expect(symbolParts(symbol)).toEqual({ base, sub })
  })
})

describe('small words and figures', () => {
  test('axis figures: four digits, true minus, powers of ten for the very large and small', () => {
    expect([0, -2.5, 0.05, 1000, 12345.6].map(shortFigure)).toEqual(['0', '\u22122.5', '0.05', '1000', '12350'])
    expect([2.5e-7, 1e6, -3.2e8].map(shortFigure)).toEqual(['2.5×10⁻⁷', '10⁶', '\u22123.2×10⁸'])
    expect(shortFigure(Number.NaN)).toBe('')
  })

  test('initials and the short form of a name', () => {
    expect(['Tove Marrowby', 'Ines Hathersedge-Vold', 'Cher'].map(initials)).toEqual(['TM', 'IH', 'C'])
    expect(['Tove Marrowby', 'Cher'].map(shortName)).toEqual(['T. Marrowby', 'Cher'])
  })

  test('letters for page codes: capitals, each once', () => {
    expect(prefixesOf(' run, SHM; run ')).toEqual(['RUN', 'SHM'])
    expect(prefixesOf('  ')).toEqual([])
  })

  test('signatures carry the day in UTC', () => {
    expect(utcDay('2026-11-09T23:59:59.000Z')).toBe('9 Nov 2026 UTC')
  })

  test('class names that do not hold are left out', () => {
    expect(classes('a', false, null, undefined, 'b')).toBe('a b')
  })

  test('keys of acts are printable, long enough and never the same twice', () => {
    const [one, two] = [newIdempotencyKey(), newIdempotencyKey()]
    expect(one).toMatch(/^[0-9a-f]{32}$/)
    expect(one).not.toBe(two)
  })

  test('a revision cloud closes: its arcs add up to nothing', () => {
    const path = cloudPath(200, 80)
    const steps = [...path.matchAll(/0 0 1 (-?[\d.]+) (-?[\d.]+)/g)].map((match) => [
      Number(match[1]),
      Number(match[2]),
    ])
    // 192 px and 72 px inside the inset at about 18 px an arc: 11 and 4 arcs, each side twice.
    expect(steps).toHaveLength(30)
    expect(steps.reduce((sum, [dx = 0]) => sum + dx, 0)).toBeCloseTo(0, 6)
    expect(steps.reduce((sum, [, dy = 0]) => sum + dy, 0)).toBeCloseTo(0, 6)
  })
})

describe('a model document from a file or the clipboard', () => {
  test('its title is offered as the page’s name', () => {
    const read = readModelText('{"format":"brinkbook-model","version":1,"title":" Lathe "}')
    expect(read).toMatchObject({ ok: true, title: 'Lathe' })
  })

  test('without a usable title the name is left to the user', () => {
    expect(readModelText('{"title":7}')).toMatchObject({ ok: true, title: null })
  })

  test('what is no JSON, empty or too large is refused in words', () => {
    expect(readModelText('{"a":')).toMatchObject({ ok: false, message: expect.stringMatching(/^This is not JSON\./) })
    expect(readModelText(' ')).toMatchObject({ ok: false })
    expect(readModelText(`"${'x'.repeat(largestFile)}"`)).toMatchObject({
      ok: false,
      message: expect.stringContaining('250 KiB'),
    })
  })
})
