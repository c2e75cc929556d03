import { describe, expect, test } from 'vitest'
import type { ModelDocument } from '#shared/model/document.ts'
import {
  type Change,
  compareLeftOut,
  compareParameters,
  compareSettings,
  compareStates,
} from '#src/features/revisions/compare-documents.ts'
import { changedLines, compareLines } from '#src/features/revisions/compare-lines.ts'
import { compareLineCitations, compareSources } from '#src/features/revisions/compare-sources.ts'
import { parseDocument } from '#src/features/revisions/document-parts.ts'

const base: ModelDocument = {
  format: 'brinkbook-model',
  version: 1,
  title: 'Swing',
  equations: '# a swing\nc = -1\ndx/dt = c*x',
  parameters: [
    { symbol: 'mu', value: 0.4, low: 0, high: 1, unit: '1/s', meaning: 'growth', citations: ['rig'] },
    { symbol: 'g', value: 2 },
  ],
  states: [{ symbol: 'x', low: -2, high: 2, start: 0.1, unit: 'mm' }],
  control: 'mu',
  observed: 'x',
  citations: [{ id: 'rig', title: 'Roller rig report', author: [{ family: 'Marrowby', given: 'Tove' }] }],
  lineCitations: [{ line: 2, id: 'rig', label: 'page', locator: '4' }],
  leftOut: ['Friction in the joint'],
}
const changed = (part: Partial<ModelDocument>): ModelDocument => ({ ...base, ...part })
const parameter = (part: Partial<ModelDocument['parameters'][number]>) =>
  changed({ parameters: base.parameters.map((row) => (row.symbol === 'mu' ? { ...row, ...part } : row)) })
const only = (changes: Change[]) => {
  expect(changes).toHaveLength(1)
  return changes[0]
}

describe('equation blocks side by side', () => {
  test('an unchanged block is one piece', () => {
    expect(compareLines('a = 1\nb = 2', 'a = 1\r\nb = 2')).toEqual([
      { kind: 'same', lines: ['a = 1', 'b = 2'], at: 1, wasAt: 1 },
    ])
  })

  test('a changed line stands as was and now, with its number in both blocks', () => {
    expect(compareLines('a = 1\nc = -1\nb = 2', 'z = 0\na = 1\nc = g\nb = 2')).toEqual([
      { kind: 'changed', was: [], now: ['z = 0'], at: 1, wasAt: 1 },
      { kind: 'same', lines: ['a = 1'], at: 2, wasAt: 1 },
      { kind: 'changed', was: ['c = -1'], now: ['c = g'], at: 3, wasAt: 2 },
      { kind: 'same', lines: ['b = 2'], at: 4, wasAt: 3 },
    ])
  })

  test('removed lines move nothing in the newer block; of a changed place the longer side is counted', () => {
    const removed = compareLines('a\nb\nc', 'a\nc')
    expect(removed[1]).toEqual({ kind: 'changed', was: ['b'], now: [], at: 2, wasAt: 2 })
    expect(removed[2]).toMatchObject({ kind: 'same', at: 2, wasAt: 3 })
    expect(changedLines(compareLines('a\nb\nc', 'a\nx\ny\nc'))).toBe(2)
  })
})

describe('what an approver signs for besides the equations', () => {
  test('the same document tells nothing', () => {
    for (const compare of [compareParameters, compareStates, compareSettings, compareLeftOut, compareSources])
      expect(compare(base, { ...base })).toEqual([])
    expect(compareLineCitations(base, { ...base })).toEqual([])
  })

  test('a changed value keeps every digit', () => {
    expect(only(compareParameters(base, parameter({ value: 0.40000001 })))).toEqual({
      subject: 'mu',
      meaning: 'growth',
      what: 'value',
      was: '0.4 1/s',
      now: '0.40000001 1/s',
    })
  })

  test('a changed range, unit and meaning are told each', () => {
    expect(only(compareParameters(base, parameter({ high: 3 })))).toMatchObject({ what: 'range', now: '0 to 3' })
    expect(only(compareParameters(base, parameter({ unit: '1/min' })))).toMatchObject({ now: '0.4 1/min' })
    expect(only(compareParameters(base, parameter({ meaning: 'decay' })))).toMatchObject({
      what: 'meaning',
      was: 'growth',
      now: 'decay',
    })
  })

  test('an uncertainty that came, changed its kind or went', () => {
    const normal = parameter({ uncertainty: { kind: 'normal', sd: 0.02 } })
    const uniform = parameter({ uncertainty: { kind: 'uniform', low: 0.3, high: 0.5 } })
    expect(only(compareParameters(base, normal))).toMatchObject({
      what: 'uncertainty',
      was: null,
      now: '± 0.02, one standard deviation',
    })
    expect(only(compareParameters(normal, uniform))).toMatchObject({ now: 'anywhere from 0.3 to 0.5' })
    expect(only(compareParameters(uniform, base))).toMatchObject({ was: 'anywhere from 0.3 to 0.5', now: null })
  })

  test('another source behind a number, or another place in it', () => {
    expect(only(compareParameters(base, parameter({ citations: [] })))).toMatchObject({
      what: 'sources',
      was: 'Roller rig report',
      now: null,
    })
    const located = [{ id: 'rig', label: 'table' as const, locator: '3', quoted: '0.42' }]
    expect(only(compareParameters(base, parameter({ citations: located })))).toMatchObject({
      now: 'Roller rig report, table 3: “0.42”',
    })
  })

  test('new and gone rows stand in full; two spellings of one symbol are one row', () => {
    const [row] = base.parameters
    if (!row) throw new Error('There is a first parameter')
    const after = changed({
      parameters: [
        { ...row, symbol: 'μ' },
        { symbol: 'k', value: 3, unit: 'mm' },
      ],
    })
    expect(compareParameters(base, after)).toEqual([
      { subject: 'μ', meaning: 'growth', what: 'symbol', was: 'mu', now: 'μ' },
      { subject: 'k', meaning: '', what: 'all of it', was: null, now: '3 mm' },
      { subject: 'g', meaning: '', what: 'all of it', was: '2', now: null },
    ])
  })

  test('a state: its search range and start', () => {
    const after = changed({ states: [{ symbol: 'x', low: -3, high: 2, unit: 'mm' }] })
    expect(compareStates(base, after).map(({ what, was, now }) => [what, was, now])).toEqual([
      ['searched from', '−2 to 2 mm', '−3 to 2 mm'],
      ['starts at', '0.1', null],
    ])
  })

  test('neglected physics that came or went', () => {
    expect(compareLeftOut(base, changed({ leftOut: ['Wind'] })).map(({ was, now }) => [was, now])).toEqual([
      [null, 'Wind'],
      ['Friction in the joint', null],
    ])
  })

  test('settings, but none of a first revision', () => {
    expect(only(compareSettings(base, changed({ quietWord: 'Runs straight' })))).toMatchObject({
      subject: 'Words for steady running',
      was: null,
      now: 'Runs straight',
    })
    expect(compareSettings(null, base)).toEqual([])
  })
})

describe('sources of two documents', () => {
  test('a new one, a gone one, and one with another field', () => {
    const renamed = { id: 'rig', title: 'Roller rig report', author: [{ family: 'Dreycott', given: 'Anselm' }] }
    expect(only(compareSources(base, changed({ citations: [renamed] })))).toMatchObject({
      subject: 'Roller rig report',
      what: 'author',
      was: 'Marrowby, Tove',
      now: 'Dreycott, Anselm',
    })
    const another = { id: 'note', title: 'Tread wear', issued: { 'date-parts': [[2025, 3]] } }
    expect(compareSources(base, changed({ citations: [another] })).map(({ was, now }) => [was, now])).toEqual([
      [null, 'Tread wear. 2025-03'],
      ['Marrowby, Tove. Roller rig report', null],
    ])
  })

  test('a line that only moved keeps its citation; a changed line or place does not', () => {
    const moved = changed({
      equations: `# one more\n${base.equations}`,
      lineCitations: [{ line: 3, id: 'rig', label: 'page', locator: '4' }],
    })
    expect(compareLineCitations(base, moved)).toEqual([])
    const elsewhere = changed({ lineCitations: [{ line: 2, id: 'rig', label: 'page', locator: '5' }] })
    expect(compareLineCitations(base, elsewhere)).toEqual([
      { subject: 'Line 2', meaning: 'c = -1', what: '', was: null, now: 'Roller rig report, page 5' },
      { subject: 'Line 2', meaning: 'c = -1', what: '', was: 'Roller rig report, page 4', now: null },
    ])
  })
})

test('a document of another shape is not taken for one', () => {
  expect(parseDocument({ format: 'something-else' })).toBeNull()
  expect(parseDocument(null)).toBeNull()
  expect(parseDocument(base)).toEqual(base)
})
