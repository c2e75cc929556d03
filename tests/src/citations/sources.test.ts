import { expect, test } from 'vitest'
import { readAuthors } from '#src/features/citations/add-source.tsx'
import { targetOptions } from '#src/features/citations/link-source.tsx'
import { linkText } from '#src/features/citations/source-list.tsx'

test('authors are read one a line, with or without a given name', () => {
  expect(readAuthors('Fernholt, Ada\n\n  Reedmere Waters \nVold,')).toEqual([
    { family: 'Fernholt', given: 'Ada' },
    { family: 'Reedmere Waters' },
    { family: 'Vold' },
  ])
})

test('a link says what it stands behind, where, and what the source says there', () => {
  const link = { id: 1, label: null, locator: null, quoted: null }
  expect(linkText({ ...link, target: { kind: 'page' } })).toBe('the page as a whole')
  expect(
    linkText({ ...link, target: { kind: 'parameter', symbol: 'ka' }, label: 'table', locator: '3', quoted: '14.0' }),
  ).toBe('ka, table 3: 14.0')
  expect(linkText({ ...link, target: { kind: 'line', line: 2 }, locator: '5.31' })).toBe('line 2, 5.31')
})

test('a source may stand behind symbols of both tables and lines, and a line is named by what follows it', () => {
  const options = targetOptions({
    symbols: [
      { symbol: 'ka', meaning: 'stiffness' },
      { symbol: 'x', meaning: '' },
    ],
    lines: [{ line: 3, text: 'dx/dt = ka*x', anchor: 'AAEC' }],
  })
  expect(options.map(({ label }) => label)).toEqual(['ka, stiffness', 'x', 'line 3: dx/dt = ka*x'])
  expect(options.map(({ target }) => target)).toEqual([
    { kind: 'parameter', symbol: 'ka' },
    { kind: 'parameter', symbol: 'x' },
    { kind: 'line', line: 3, anchor: 'AAEC' },
  ])
  // Read again after others typed above it, the line has another number and stays the one that was chosen.
  const later = targetOptions({ symbols: [], lines: [{ line: 5, text: 'dx/dt = ka*x', anchor: 'AAEC' }] })
  expect(later[0]?.value).toBe(options[2]?.value)
})
