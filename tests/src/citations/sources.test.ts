import { expect, test } from 'vitest'
import { readAuthors } from '#src/features/citations/add-source.tsx'
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
