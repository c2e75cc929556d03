import { describe, expect, test } from 'vitest'
import { checkDraft, type DraftContent, documentFromDraft, draftFromDocument } from '#shared/model/draft.ts'
import { readNumberCell } from '#shared/model/number-cell.ts'
import { checkModel } from '#shared/model/system.ts'
import { sampleModel } from './sample-model.ts'

const full = sampleModel({
  timeUnit: 's',
  parameters: [
    { symbol: 'mu', value: -0.5, low: -1, high: 1, unit: '1/s', uncertainty: { kind: 'normal', sd: 0.02 } },
    { symbol: 'k', value: 1e-7, low: 0, high: 1, uncertainty: { kind: 'uniform', low: 0, high: 0.25 } },
  ],
  secondControl: 'k',
  leftOut: ['play in the bearing', 'wake'],
  notes: 'two\nlines',
})
const draft = (change: (content: DraftContent) => void): DraftContent => {
  const content = draftFromDocument(full)
  change(content)
  return content
}
const places = (content: DraftContent) => {
  const checked = checkDraft(content)
  return checked.ok
    ? []
    : checked.errors.map((error) => `${error.code} ${error.path ?? `${error.line}:${error.column}`}`)
}
const row = (content: DraftContent, name: 'parameters' | 'states', i: number) => {
  const found = content[name][i]
  if (!found) throw new Error('no such row')
  return found
}

test('a document goes into a draft and comes back the same', () => {
  // Blank cells are absent members, so an empty meaning is not kept.
  const { meaning: _, ...first } = { meaning: '', ...full.parameters[0] }
  expect(documentFromDraft(draftFromDocument(full))).toEqual({
    ok: true,
    document: { ...full, parameters: [first, full.parameters[1]] },
  })
})

test('a draft is judged as its document is', () => {
  const checked = checkDraft(draftFromDocument(full))
  const direct = checkModel(full)
  expect(checked.ok && direct.ok && checked.system).toEqual(direct.ok && direct.system)
})

test('a half-typed cell is told with its path, and the equations are judged all the same', () => {
  const content = draft((one) => {
    row(one, 'states', 1).low = '1e'
    one.equations = 'dx/dt = nope\ndy/dt = x'
  })
  expect(places(content)).toEqual(['wrong-type states[1].low', 'unknown-symbol 1:9'])
})

test('rows that are blank are not there yet, and paths count the rows of the draft', () => {
  const blank = { id: 'new', symbol: '', value: ' ', low: '', high: '', unit: '', meaning: '', uncertainty: '' }
  const content = draft((one) => {
    one.parameters.unshift(blank)
    row(one, 'parameters', 2).high = 'x'
  })
  expect(places(content)).toEqual(['wrong-type parameters[2].high'])
  expect(places(draft((one) => one.parameters.push(blank)))).toEqual([])
})

test('a row that has begun needs its symbol and its numbers', () => {
  const content = draft((one) => {
    one.states.push({ id: 'z', symbol: 'z', low: '', high: '1', start: '', unit: '', meaning: '' })
    one.parameters.push({ id: 'p', symbol: '', value: '3', low: '', high: '', unit: '', meaning: '' })
  })
  expect(places(content)).toEqual([
    'missing-field states[2].low',
    'missing-field parameters[2].symbol',
    'missing-equation states[2].symbol',
  ])
})

test('the control and the observed quantity have to be chosen', () => {
  const content = draft((one) => {
    one.settings = {}
  })
  expect(places(content)).toEqual(['missing-field control', 'missing-field observed'])
})

test('settings that are missing or borrowed from the prototype are blank', () => {
  const content = draft((one) => {
    one.settings = Object.create({ control: 'mu', observed: 'x' })
  })
  expect(places(content)).toEqual(['missing-field control', 'missing-field observed'])
})

describe('uncertainty cells', () => {
  const cell = (text: string) =>
    draft((one) => {
      one.parameters = one.parameters.map((parameter, i) => (i === 1 ? { ...parameter, uncertainty: text } : parameter))
    })
  test.each([
    ['normal 0,02', { kind: 'normal', sd: 0.02 }],
    ['Normal  sd 2e-2', { kind: 'normal', sd: 0.02 }],
    ['uniform \u22121 to 2', { kind: 'uniform', low: -1, high: 2 }],
  ])('%s is read', (text, expected) => {
    const made = documentFromDraft(cell(text))
    expect(made.ok && made.document.parameters[1]?.uncertainty).toEqual(expected)
  })
  test.each([
    ['0.02', 'wrong-type'],
    ['normal', 'wrong-type'],
    ['normal x', 'wrong-type'],
    ['normal -1', 'bad-range'],
    ['uniform 2 to 1', 'bad-range'],
    ['uniform 1 to 1e999', 'not-finite'],
  ])('%s is refused', (text, code) => {
    expect(places(cell(text))).toEqual([`${code} parameters[1].uncertainty`])
  })
})

describe('number cells', () => {
  test.each([
    ['1', 1],
    [' -0.5 ', -0.5],
    ['\u22120,5', -0.5],
    ['+3.', 3],
    ['.5', 0.5],
    ['1e-3', 0.001],
    ['1,5E\u22123', 0.0015],
    ['0,125', 0.125],
    ['1,25', 1.25],
  ])('%s', (typed, value) => {
    expect(readNumberCell(typed)).toEqual({ ok: true, value })
  })
  test.each([
    ['1e', 'wrong-type'],
    ['-', 'wrong-type'],
    ['1,000', 'wrong-type'], // 1 or 1000
    ['1.000,5', 'wrong-type'],
    ['1 000', 'wrong-type'],
    ['1/3', 'wrong-type'],
    ['0x10', 'wrong-type'],
    ['Infinity', 'wrong-type'],
    ['NaN', 'wrong-type'],
    ['1e999', 'not-finite'],
    ['-1e999', 'not-finite'],
  ])('%s is refused', (typed, code) => {
    expect(readNumberCell(typed)).toMatchObject({ ok: false, code })
  })
})
