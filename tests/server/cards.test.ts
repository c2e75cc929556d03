import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { cards } from '#drizzle/schema/index.ts'
import { type Compute, createCompute } from '#server/compute/compute.ts'
import { limits } from '#server/limits.ts'
import { stabilityCard } from '#shared/model/card-document.ts'
import { createTestApp, type TestApp } from '#tests/support/app.ts'
import { apiRoot, expectProblem, type Tab } from '#tests/support/http.ts'
import { oscillator } from '#tests/support/pages.ts'

let app: TestApp
let compute: Compute
let one: Tab
let two: Tab
beforeAll(async () => {
  compute = createCompute({ ...limits.compute, cardDeadline: 60_000 })
  app = await createTestApp({
    compute,
    limits: (given) => ({ ...given, rate: { ...given.rate, cards: 20 } }),
  })
  one = await app.people.signedIn(await app.people.person('Nan Ashby'))
  two = await app.people.signedIn(await app.people.person('Tam Briar'))
})
afterAll(async () => {
  await compute.close()
  await app.close()
})

const ask = (document: unknown, by: Tab = one) => by.post(`${apiRoot}/cards`).send({ document })

describe('a card on request', () => {
  test('is the stability card of the document, and stored nowhere', async () => {
    const answer = await ask(oscillator())
    expect(answer.status).toBe(200)
    const card = stabilityCard.parse(answer.body)
    // x' = (mu - r^2) x - y, y' = x + (mu - r^2) y: the origin's eigenvalues are mu +- i, the cubic coefficient is -1.
    expect(card.hopf).toHaveLength(1)
    expect(card.hopf?.[0]).toMatchObject({ verdict: 'soft', operating: true })
    expect(card.hopf?.[0]?.p).toBeCloseTo(0, 9)
    expect(card.hopf?.[0]?.omega).toBeCloseTo(1, 9)
    expect(card.hopf?.[0]?.cubic).toBeCloseTo(-1, 7)
    expect(card.window).toMatchObject({ low: { kind: 'range-end' }, high: { kind: 'onset', verdict: 'soft' } })
    expect(card.cycles).toBeUndefined()
    expect(await app.db.select().from(cards)).toEqual([])
  })

  test('tells every fault of the document', async () => {
    const document = { ...oscillator({ equations: 'dx/dt = z\ndy/dt = 2x' }), colour: 'red', control: 'nu' }
    const { errors = [] } = expectProblem(await ask(document), 'model-refused')
    expect(new Set(errors.map((fault) => fault.code))).toEqual(
      new Set(['unknown-field', 'unknown-symbol', 'syntax', 'bad-control']),
    )
  })

  test.each([[null], [1], ['text'], [[]], [{}]])('refuses %j', async (document) => {
    expectProblem(await ask(document), 'model-refused')
  })

  test('is for signed-in people', async () => {
    expectProblem(await ask(oscillator(), app.people.signedOut()), 'not-signed-in')
  })

  test('is given twice at once to one person, not three times', async () => {
    const answers = await Promise.all([1, 2, 3, 4].map(() => ask(oscillator(), two)))
    const statuses = answers.map((answer) => answer.status).sort()
    expect(statuses).toEqual([200, 200, 429, 429])
    expect((await ask(oscillator(), two)).status).toBe(200)
  })

  test('is refused after so many in a minute, to that person only', async () => {
    for (let i = 0; i < 20; i++) if ((await ask({}, two)).status === 429) break
    expectProblem(await ask({}, two), 'too-many')
    expectProblem(await ask({}, one), 'model-refused')
    app.clock.ahead += 61_000
    expectProblem(await ask({}, two), 'model-refused')
  })
})

/** Thirty coupled states with wide ranges: far more boxes than the search can settle in a minute. */
function hostile() {
  const names = Array.from({ length: 30 }, (_, i) => `x${i}`)
  const equations = names.map((name, i) => {
    const others = names.map((other, j) => `sin(${other}*${j + 1} + ${name}*mu)`).join(' + ')
    return `d${name}/dt = ${others} - ${names[(i + 1) % 30]}^3`
  })
  return oscillator({
    equations: equations.join('\n'),
    states: names.map((symbol) => ({ symbol, low: -1000, high: 1000 })),
    observed: 'x0',
  })
}

describe('a model that takes too long', () => {
  let slow: TestApp
  let slowCompute: Compute
  let by: Tab
  beforeAll(async () => {
    slowCompute = createCompute({ ...limits.compute, cardDeadline: 4000 })
    slow = await createTestApp({ compute: slowCompute })
    by = await slow.people.signedIn(await slow.people.person('Una Frith'))
  })
  afterAll(async () => {
    await slowCompute.close()
    await slow.close()
  })

  test('is ended at the deadline; meanwhile others are answered, and its sender afterwards', async () => {
    await expect.poll(async () => (await ask(oscillator(), by)).status, { timeout: 60_000 }).toBe(200)
    const order: string[] = []
    const note = async (
      name: string,
      answer: Promise<{ status: number; body: unknown; headers: Record<string, string> }>,
    ) => {
      const given = await answer
      order.push(name)
      return given
    }
    const other = await slow.people.signedIn(await slow.people.person('Wil Garth'))
    const refused = note('hostile', Promise.resolve(ask(hostile(), by)))
    const others = await Promise.all([
      note('session', Promise.resolve(other.get(`${apiRoot}/session`))),
      note('card', Promise.resolve(ask(oscillator(), other))),
    ])
    expect(others.map((answer) => answer.status)).toEqual([200, 200])
    expectProblem(await refused, 'analysis-budget')
    expect(order.at(-1)).toBe('hostile')
    expect((await ask(oscillator(), by)).status).toBe(200)
  })
})
