import { describe, expect, test } from 'vitest'
import { changedSymbols, faultsByPath, messagesOf, progressWords } from '#src/pages/draft-notes.ts'
import type { CardState } from '#src/workers/card-runner.ts'

const idle: CardState = {
  checked: null,
  card: null,
  computing: false,
  older: false,
  progress: null,
  failure: null,
  exact: null,
}

describe('where the faults of a draft are shown', () => {
  const checked = {
    kind: 'checked' as const,
    id: 3,
    document: null,
    errors: [
      {
        code: 'unknown-symbol' as const,
        message: 'nu is not declared.',
        line: 2,
        column: 9,
        length: 2,
        cures: [{ label: 'Write mu', replacement: 'mu' }],
      },
      { code: 'wrong-type' as const, message: '"1e" is not a number.', path: 'parameters[0].value' },
    ],
    warnings: [],
    lines: [],
    helpers: [],
  }

  test('under the line they speak of, with their cures', () => {
    expect(messagesOf({ ...idle, checked })).toEqual([
      {
        line: 2,
        column: 9,
        length: 2,
        message: 'nu is not declared.',
        severity: 'fault',
        cures: [{ label: 'Write mu', replacement: 'mu' }],
      },
    ])
  })

  test('at the cell they speak of', () => {
    expect([...faultsByPath(checked.errors)]).toEqual([['parameters[0].value', '"1e" is not a number.']])
  })

  test('two at one place one after the other', () => {
    const at = (message: string) => ({ code: 'bad-range' as const, message, path: 'states[0].low' })
    expect(faultsByPath([at('First.'), at('Second.')]).get('states[0].low')).toBe('First. Second.')
  })
})

test('parameters that differ from the revision in force are marked, however their numbers are typed', () => {
  const document = {
    format: 'brinkbook-model' as const,
    version: 1 as const,
    title: 'Rig',
    equations: 'dx/dt = a*x',
    parameters: [
      { symbol: 'a', value: -0.5, low: -1, high: 1 },
      { symbol: 'b', value: 2 },
    ],
    states: [{ symbol: 'x', low: -1, high: 1 }],
    control: 'a',
    observed: 'x',
  }
  const card = {
    format: 'brinkbook-card' as const,
    version: 1 as const,
    engine: '0',
    fingerprint: '',
    control: 'a',
    observed: 'x',
    warnings: [],
  }
  const row = (symbol: string, value: string, low = '', high = '', unit = '') => ({ symbol, value, low, high, unit })
  const meant = changedSymbols(
    [
      { ...row('a', '-0.5', '-1', '1'), meaning: 'damping' },
      { ...row('b', '2'), uncertainty: 'normal 0.1' },
    ],
    { document, card, label: 'revision 1.0.0', mark: '1.0.0' },
  )
  expect([...(meant?.symbols ?? [])]).toEqual(['a', 'b'])
  const changed = changedSymbols([row('a', '−0,5', '-1', '1.0'), row('b', '2.5'), row('c', '1')], {
    document,
    card,
    label: 'revision 1.0.0',
    mark: '1.0.0',
  })
  expect([...(changed?.symbols ?? [])]).toEqual(['b', 'c'])
  expect(changed?.mark).toBe('1.0.0')
  expect(changedSymbols([row('a', '1')], null)).toBeNull()
})

test('a run says what it does and how far it is', () => {
  expect(progressWords({ stage: 'branches', share: 0.404 })).toBe('Following the branches, 40 %')
  expect(progressWords({ stage: 'steady-states', share: 1.2 })).toBe('Finding the steady states, 100 %')
})
