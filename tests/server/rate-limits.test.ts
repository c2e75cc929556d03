import { afterEach, describe, expect, test } from 'vitest'
import { limits } from '#server/limits.ts'
import { createTestApp, type TestApp, type TestAppOptions } from '#tests/support/app.ts'
import { apiRoot, expectProblem, tab } from '#tests/support/http.ts'
import { password } from '#tests/support/users.ts'
import { makePolicyPages } from './policy-pages.ts'

const session = `${apiRoot}/session`
let t: TestApp
const start = async (options: TestAppOptions = {}) => {
  t = await createTestApp(options)
  return t.people.person('Ada Wren')
}
afterEach(() => t.close())
const attempt = (email: string, secret: string) => tab(t.app).post(session).send({ email, password: secret })

describe('sign-in attempts', () => {
  test('five refused ones a minute for an account; then even the right password waits, and only there', async () => {
    const ada = await start()
    for (let i = 0; i < limits.rate.signInByAccount; i++) {
      expectProblem(await attempt(ada.email, 'wrong'), 'wrong-password')
    }
    const answer = await attempt(ada.email.toUpperCase(), password)
    expectProblem(answer, 'too-many')
    expect(Number(answer.headers['retry-after'])).toBeGreaterThan(0)
    expect(Number(answer.headers['retry-after'])).toBeLessThanOrEqual(60)
    const bo = await t.people.person('Bo Other')
    expect((await attempt(bo.email, password)).status).toBe(200)
    t.clock.ahead = limits.rate.window + 1000
    expect((await attempt(ada.email, password)).status).toBe(200)
  })

  test('the same for an address that has no account: nobody learns which have one', async () => {
    await start()
    for (let i = 0; i < limits.rate.signInByAccount; i++) await attempt('none@example.org', 'wrong')
    expectProblem(await attempt('none@example.org', 'wrong'), 'too-many')
  })

  test('twenty refused ones a minute from one network address, whatever the accounts', async () => {
    const ada = await start()
    for (let i = 0; i < limits.rate.signInByAddress; i++) {
      expectProblem(await attempt(`none${i}@example.org`, 'wrong'), 'wrong-password')
    }
    expectProblem(await attempt(ada.email, password), 'too-many')
  })

  test('good ones are not counted', async () => {
    const ada = await start()
    for (let i = 0; i < limits.rate.signInByAccount * 2; i++) {
      expect((await attempt(ada.email, password)).status).toBe(200)
    }
  })

  test('many at once are counted before they are checked', async () => {
    const ada = await start()
    const answers = await Promise.all(Array.from({ length: 12 }, () => attempt(ada.email, 'wrong')))
    const statuses = answers.map((answer) => answer.status).sort()
    expect(statuses.filter((status) => status === 401)).toHaveLength(limits.rate.signInByAccount)
    expect(statuses.filter((status) => status === 429)).toHaveLength(12 - limits.rate.signInByAccount)
  })

  test('guessing the present password while signed in is counted as well', async () => {
    const ada = await start()
    const agent = await t.people.signedIn(ada)
    const change = () =>
      agent.put(`${apiRoot}/people/me/password`).send({ current: 'wrong', next: 'seven kettles drum at dusk' })
    for (let i = 0; i < limits.rate.signInByAccount; i++) expectProblem(await change(), 'wrong-password')
    expectProblem(await change(), 'too-many')
  })
})

describe('pasted sources', () => {
  test('are read sixty times an hour for one person; typing one into the form is not counted', async () => {
    expect(limits.rate).toMatchObject({ imports: 60, importsWindow: 3_600_000 })
    const ada = await start({ limits: (given) => ({ ...given, rate: { ...given.rate, imports: 2 } }) })
    const group = await t.people.group('Kiln Lab', 'KLN', [[ada, 'contributor']])
    const agent = await t.people.signedIn(ada)
    await makePolicyPages(t.db, group, ada.id)
    const add = (body: object) => agent.post(`${apiRoot}/pages/KLN-010/sources`).send(body)
    // This app reads nothing (503), and each time it was asked to counts.
    for (let i = 0; i < 2; i++) expectProblem(await add({ from: 'pasted', pasted: '@book{a}' }), 'not-ready')
    const refused = await add({ from: 'pasted', pasted: '@book{a}' })
    expectProblem(refused, 'too-many')
    expect(Number(refused.headers['retry-after'])).toBeGreaterThan(3500)
    expect((await add({ from: 'form', type: 'book', title: 'By hand', authors: [] })).status).toBe(201)
    t.clock.ahead = limits.rate.importsWindow + 1000
    const later = await t.people.signedIn(ada)
    const again = await later.post(`${apiRoot}/pages/KLN-010/sources`).send({ from: 'pasted', pasted: '@book{a}' })
    expectProblem(again, 'not-ready')
  })
})

describe('requests', () => {
  test('300 a minute', () => {
    expect(limits.rate).toMatchObject({ window: 60_000, api: 300, cards: 30, cardsAtOnce: 2 })
    return start()
  })

  test('are limited for each person, and for each address where nobody is signed in', async () => {
    const ada = await start({ limits: (given) => ({ ...given, rate: { ...given.rate, api: 5 } }) })
    const agent = await t.people.signedIn(ada)
    const agents = [agent, await t.people.signedIn(ada)]
    for (let i = 0; i < 5; i++) expect((await (agents[i % 2] ?? agent).get(session)).status).toBe(200)
    const answer = await agent.get(session)
    expectProblem(answer, 'too-many')
    expect(Number(answer.headers['retry-after'])).toBeGreaterThan(0)
    // Two of the five of this address went on signing in.
    for (let i = 0; i < 3; i++) expect((await tab(t.app).get(session)).status).toBe(200)
    expectProblem(await tab(t.app).get(session), 'too-many')
    expect((await agent.get('/healthz')).status).toBe(200)
  })
})
