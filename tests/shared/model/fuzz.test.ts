import fc from 'fast-check'
import { expect, test } from 'vitest'
import { checkDraft, draftFromDocument } from '#shared/model/draft.ts'
import { errorCodes } from '#shared/model/errors.ts'
import { expressionText } from '#shared/model/expression-text.ts'
import { checkModel } from '#shared/model/system.ts'
import { blockToTex } from '#shared/model/tex.ts'
import { evaluate, sampleModel } from './sample-model.ts'

const codes = new Set<string>(errorCodes)
const document = sampleModel({
  parameters: [
    { symbol: 'mu', value: -0.5, low: -1, high: 1, unit: '1/s' },
    { symbol: 'ω₀', value: 1, unit: 'rad/s' },
    { symbol: 'e', value: 2 },
  ],
  timeUnit: 's',
})

/** What must hold for any text whatever. Returns the right-hand sides where the text is a model. */
function judged(equations: string) {
  const checked = checkModel({ ...document, equations })
  const lines = equations.split(/\r\n|\n|\r/)
  if (!checked.ok) {
    expect(checked.errors.length).toBeGreaterThan(0)
    for (const { code, message, line, column, length } of checked.errors) {
      expect(codes.has(code)).toBe(true)
      expect(message.length).toBeGreaterThan(5)
      expect(message.length).toBeLessThan(400)
      expect(message).not.toMatch(/undefined|\[object/)
      if (line === undefined) continue
      const text = lines[line - 1]
      expect(text).toBeDefined()
      expect(column).toBeGreaterThanOrEqual(1)
      expect((column ?? 0) + (length ?? 0) - 1).toBeLessThanOrEqual(text?.length ?? 0)
    }
  }
  const draft = checkDraft({ ...draftFromDocument(document), equations })
  expect(draft.ok).toBe(checked.ok)
  for (const { tex } of blockToTex({ ...document, equations }))
    if (tex !== null) expect(tex.length).toBeLessThanOrEqual(4096)
  return checked.ok ? [...checked.system.helpers, ...checked.system.equations] : []
}

/** A text of one tree, read again, is the same tree. */
function readsBack(equations: string): void {
  for (const { expression } of judged(equations)) {
    const text = expressionText(expression, (key) => key)
    const again = checkModel({ ...document, equations: `all = ${text}\ndx/dt = all\ndy/dt = x${helpersOf(equations)}` })
    if (!again.ok) throw new Error(`${text}: ${JSON.stringify(again.errors)}`)
    expect(again.system.helpers.find((helper) => helper.key === 'all')?.expression).toEqual(expression)
  }
}
const helpersOf = (equations: string) => (/^q2 = /m.test(equations) ? '\nq2 = 1' : '')

const word = fc.constantFrom(
  'x',
  'y',
  'mu',
  'μ',
  'ω₀',
  'omega0',
  'e',
  'pi',
  'q2',
  'exp',
  'sin',
  'min',
  'max',
  'exprel',
  'abs',
  't',
  'nope',
  'dx',
  'dt',
  'dx/dt',
  'dy/dt',
  'h',
  'd',
  'true',
  'null',
  'Infinity',
  'constructor',
  '__proto__',
  'toString',
  'gamma',
  'а',
  'x²',
  '1',
  '2.5',
  '.5',
  '1e3',
  '1e',
  '1e999',
  '0x1F',
  '1.2.3',
  '2x',
  '',
)
const mark = fc.constantFrom(
  '+',
  '-',
  '*',
  '/',
  '^',
  '(',
  ')',
  ',',
  '=',
  ' ',
  '\n',
  '\r\n',
  '\r',
  '#',
  '\u2212',
  '\u00d7',
  '\u00b7',
  ';',
  '!',
  '%',
  "'",
  '"',
  '[',
  ']',
  '{',
  '}',
  ':',
  '<',
  '>',
  '&',
  '|',
  '\\',
  '`',
  '$',
  '@',
  '?',
  '.',
  '\t',
  '\u00a0',
  '\u200b',
  '\u202e',
  '\ud800',
  '\u0000',
  '😀',
)
const soup = fc
  .array(fc.oneof({ weight: 3, arbitrary: word }, { weight: 4, arbitrary: mark }), { maxLength: 60 })
  .map((parts) => parts.join(''))

// Right-hand sides that are well formed by construction.
const { tree } = fc.letrec<{ tree: string; leaf: string }>((tie) => ({
  leaf: fc.constantFrom('x', 'y', 'mu', 'ω₀', 'e', 'pi', '2', '0.5', '1e-3', 'q2'),
  tree: fc.oneof(
    { maxDepth: 6, depthSize: 'large' },
    tie('leaf'),
    fc
      .tuple(tie('tree'), fc.constantFrom('+', '-', '*', '/', '^', ' - ', '*-', '^-'), tie('tree'))
      .map(([a, op, b]) => a + op + b),
    fc.tuple(tie('tree'), fc.constantFrom('(', '-(', '+(')).map(([a, open]) => `${open}${a})`),
    tie('tree').map((a) => `-${a}`),
    fc.tuple(fc.constantFrom('exp', 'sin', 'log1p', 'exprel', 'abs'), tie('tree')).map(([name, a]) => `${name}(${a})`),
    fc.tuple(fc.constantFrom('min', 'max'), tie('tree'), tie('tree')).map(([name, a, b]) => `${name}(${a}, ${b})`),
  ),
}))
const block = fc.tuple(tree, tree).map(([a, b]) => `q2 = x^2 + y^2\ndx/dt = ${a}\ndy/dt = ${b}`)

const before = Reflect.ownKeys(Object.prototype).length
const unchanged = () => expect(Reflect.ownKeys(Object.prototype).length).toBe(before)

test('4,000 texts of words and marks: a model or coded errors, each inside the text', () => {
  fc.assert(
    fc.property(soup, (text) => void judged(text)),
    { numRuns: 4000, seed: 20261201 },
  )
  unchanged()
})

test('2,000 well-formed blocks: each is accepted and reads back as the same trees', () => {
  fc.assert(
    fc.property(block, (text) => {
      expect(judged(text).length).toBe(3)
      readsBack(text)
    }),
    { numRuns: 2000, seed: 20261201 },
  )
})

// An independent reading of the same text: JavaScript's own parser, which has the same precedence but for the unary minus
// before a power, so trees are drawn without powers here.
test('500 well-formed sums and products mean what JavaScript reads in them', () => {
  const plain = tree.filter((text) => !text.includes('^') && !/exp|sin|log|abs|min|max/.test(text))
  fc.assert(
    fc.property(plain, (text) => {
      const [, right] = judged(`q2 = x + y\ndx/dt = ${text}\ndy/dt = x`)
      const values = { x: 1.25, y: -0.5, mu: 3, omega0: 7, e: 2, q2: 0.75 }
      const expected = evaluateWithPrecedence(text, { ...values, 'ω₀': 7, pi: Math.PI })
      expect(right && Object.is(evaluate(right.expression, values), expected)).toBe(true)
    }),
    { numRuns: 500, seed: 20261201 },
  )
})

/** A second, independent reader for the test: the shunting-yard method on + - * / and signs (Dijkstra 1961). */
function evaluateWithPrecedence(text: string, values: Readonly<Record<string, number>>): number {
  const tokens = text.replaceAll(' ', '').match(/[0-9.]+(?:e-?[0-9]+)?|[\p{L}_][\p{L}\p{N}_]*|[-+*/()]/gu) ?? []
  const numbers: number[] = []
  const waiting: string[] = []
  const rank: Record<string, number> = { '+': 1, '-': 1, '*': 2, '/': 2, sign: 3, plus: 3 }
  const apply = () => {
    const operator = waiting.pop()
    const b = numbers.pop() ?? Number.NaN
    if (operator === 'sign') numbers.push(-b)
    else if (operator === 'plus') numbers.push(b)
    else {
      const a = numbers.pop() ?? Number.NaN
      numbers.push(operator === '+' ? a + b : operator === '-' ? a - b : operator === '*' ? a * b : a / b)
    }
  }
  let wantsOperand = true
  for (const token of tokens) {
    if (token === '(') waiting.push(token)
    else if (token === ')') {
      while (waiting.at(-1) !== '(') apply()
      waiting.pop()
      wantsOperand = false
    } else if (token in rank && wantsOperand) waiting.push(token === '-' ? 'sign' : 'plus')
    else if (token in rank) {
      while (waiting.length > 0 && waiting.at(-1) !== '(' && (rank[waiting.at(-1) ?? ''] ?? 0) >= (rank[token] ?? 0))
        apply()
      waiting.push(token)
      wantsOperand = true
    } else {
      numbers.push(values[token] ?? Number(token))
      wantsOperand = false
    }
    if (token === '(') wantsOperand = true
  }
  while (waiting.length > 0) apply()
  return numbers[0] ?? Number.NaN
}

test('3,500 valid blocks with bytes changed, cut or doubled: a model or coded errors', () => {
  const change = fc.record({
    at: fc.nat(200),
    cut: fc.nat(3),
    put: fc.oneof(fc.string({ unit: 'binary', maxLength: 2 }), mark, word),
  })
  fc.assert(
    fc.property(block, fc.array(change, { minLength: 1, maxLength: 4 }), (text, changes) => {
      const mutated = changes.reduce(
        (all, { at, cut, put }) => all.slice(0, at % (all.length + 1)) + put + all.slice((at % (all.length + 1)) + cut),
        text,
      )
      judged(mutated)
    }),
    { numRuns: 3500, seed: 20261201 },
  )
  unchanged()
})

test('1,000 JSON texts with bytes changed: a model or coded errors', () => {
  const json = JSON.stringify(document)
  fc.assert(
    fc.property(
      fc.array(fc.tuple(fc.nat(json.length), fc.nat(4), fc.string({ maxLength: 3 })), { minLength: 1, maxLength: 3 }),
      (changes) => {
        const text = changes.reduce((all, [at, cut, put]) => all.slice(0, at) + put + all.slice(at + cut), json)
        const checked = checkModel(text)
        if (!checked.ok) for (const { code } of checked.errors) expect(codes.has(code)).toBe(true)
      },
    ),
    { numRuns: 1000, seed: 20261201 },
  )
  unchanged()
})

test('200 values of any kind in the place of a document: coded errors', () => {
  fc.assert(
    fc.property(fc.anything({ withNullPrototype: true, withMap: true, withDate: true }), (value) => {
      expect(checkModel(value).ok).toBe(false)
      expect(checkModel({ ...document, parameters: [value], states: value, citations: value }).ok).toBe(false)
    }),
    { numRuns: 200, seed: 20261201 },
  )
})
