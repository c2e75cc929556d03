import { eq } from 'drizzle-orm'
import supertest from 'supertest'
import { afterAll, beforeAll, beforeEach, describe, expect, test } from 'vitest'
import { people, sessions, signIns } from '#drizzle/schema/index.ts'
import { limits } from '#server/limits.ts'
import { createTestApp, type TestApp, testOrigin } from '#tests/support/app.ts'
import { apiRoot, expectProblem, type Tab, tab } from '#tests/support/http.ts'
import { password, type TestPerson } from '#tests/support/users.ts'

const session = `${apiRoot}/session`
let t: TestApp
let ada: TestPerson
beforeAll(async () => {
  t = await createTestApp()
  ada = await t.people.person('Ada Wren')
})
afterAll(() => t.close())
beforeEach(() => {
  t.clock.ahead = 0
  t.told.length = 0
})

const who = async (agent: Tab) => (await agent.get(session)).body.me?.id ?? null
const cookieOf = (answer: { headers: Record<string, unknown> }) => String(answer.headers['set-cookie'] ?? '')
const idIn = (cookie: string) => /brinkbook=s%3A([^.;]+)\./.exec(cookie)?.[1]

describe('signing in', () => {
  test('tells who is signed in, and nobody before', async () => {
    const agent = tab(t.app)
    expect((await agent.get(session)).body).toEqual({ me: null, demonstration: null })
    const answer = await agent.post(session).send({ email: 'ADA.WREN@example.org', password })
    expect(answer.status).toBe(200)
    expect(answer.body.me).toEqual({
      id: ada.id,
      name: 'Ada Wren',
      email: 'ada.wren@example.org',
      administrator: false,
      groups: [],
      toReview: 0,
    })
    expect(await who(agent)).toBe(ada.id)
  })

  test('sets a cookie that no script and no other site can use, and no cookie to visitors', async () => {
    expect((await tab(t.app).get(session)).headers['set-cookie']).toBeUndefined()
    const cookie = cookieOf(await tab(t.app).post(session).send({ email: ada.email, password }))
    expect(cookie).toMatch(/^brinkbook=s%3A[^;]+; Path=\/; HttpOnly; SameSite=Lax$/)
  })

  test('is refused alike for a wrong password and an unknown address', async () => {
    const agent = tab(t.app)
    const wrong = expectProblem(await agent.post(session).send({ email: ada.email, password: 'x' }), 'wrong-password')
    const unknown = expectProblem(
      await agent.post(session).send({ email: 'no@example.org', password }),
      'wrong-password',
    )
    expect({ ...unknown, instance: '' }).toEqual({ ...wrong, instance: '' })
    expect(await who(agent)).toBeNull()
  })

  test('gives a session a new id: one that somebody planted is worth nothing', async () => {
    const first = cookieOf(await tab(t.app).post(session).send({ email: ada.email, password }))
    const planted = first.split(';')[0] ?? ''
    const second = await supertest(t.app)
      .post(session)
      .set({ Origin: testOrigin, Cookie: planted })
      .send({ email: ada.email, password })
    expect(second.status).toBe(200)
    const fresh = cookieOf(second)
    expect(idIn(fresh)).toBeDefined()
    expect(idIn(fresh)).not.toBe(idIn(first))
    // The first session ended with it.
    expect((await supertest(t.app).get(session).set('Cookie', planted)).body.me).toBeNull()
    const rows = await t.db
      .select()
      .from(sessions)
      .where(eq(sessions.sessionId, idIn(first) ?? ''))
    expect(rows).toEqual([])
  })

  test('ignores a session id that was not signed here', async () => {
    const forged = 'brinkbook=s%3AAAAAAAAAAAAAAAAAAAAAAAAAAAAAAAAA.invalidsignature'
    expect((await supertest(t.app).get(session).set('Cookie', forged)).body.me).toBeNull()
  })

  test('writes down when and with what, as a hash of the session only', async () => {
    const agent = tab(t.app).set('User-Agent', 'Test\tBrowser é')
    const answer = await agent.post(session).send({ email: ada.email, password })
    const rows = await t.db.select().from(signIns).where(eq(signIns.personId, ada.id))
    const last = rows.at(-1)
    expect(last).toMatchObject({ endedAt: null, userAgent: 'Test Browser' })
    expect(last?.sessionHash).toMatch(/^[0-9a-f]{64}$/)
    expect(last?.sessionHash).not.toBe(idIn(cookieOf(answer)))
  })

  test('a disabled person is refused like a wrong password', async () => {
    const gone = await t.people.person('Gone Person', { disabled: true })
    expectProblem(await tab(t.app).post(session).send({ email: gone.email, password }), 'wrong-password')
  })
})

describe('a session ends', () => {
  test('by signing out: the cookie is cleared, its row is gone, its sockets are told', async () => {
    const agent = await t.people.signedIn(ada)
    const answer = await agent.delete(session)
    expect(answer.status).toBe(204)
    expect(cookieOf(answer)).toMatch(/^brinkbook=; Path=\/; Expires=Thu, 01 Jan 1970/)
    expect(answer.headers['clear-site-data']).toBe('"storage"')
    expect(t.told).toEqual([{ kind: 'session-ended', sessionHash: expect.stringMatching(/^[0-9a-f]{64}$/) }])
    expectProblem(await agent.delete(session), 'not-signed-in')
  })

  test('not by a copied cookie after signing out', async () => {
    const signIn = await tab(t.app).post(session).send({ email: ada.email, password })
    const cookie = cookieOf(signIn).split(';')[0] ?? ''
    await supertest(t.app).delete(session).set({ Cookie: cookie, Origin: testOrigin })
    expect((await supertest(t.app).get(session).set('Cookie', cookie)).body.me).toBeNull()
  })

  test('everywhere at once', async () => {
    const [one, two] = [await t.people.signedIn(ada), await t.people.signedIn(ada)]
    expect((await one.delete(`${session}/everywhere`)).status).toBe(204)
    expect(t.told).toContainEqual({ kind: 'person-changed', personId: ada.id })
    expect(await who(one)).toBeNull()
    expect(await who(two)).toBeNull()
    const open = (await t.db.select().from(signIns).where(eq(signIns.personId, ada.id))).filter((row) => !row.endedAt)
    expect(open).toEqual([])
  })

  test('after an hour without a request, counted from the last one', async () => {
    const agent = await t.people.signedIn(ada)
    t.clock.ahead = limits.session.idle - 60_000
    expect(await who(agent)).toBe(ada.id)
    t.clock.ahead += limits.session.idle - 60_000
    expect(await who(agent)).toBe(ada.id)
    t.clock.ahead += limits.session.idle + limits.session.touch + 60_000
    expect(await who(agent)).toBeNull()
    t.clock.ahead = 0
    expect(await who(agent)).toBeNull()
  })

  test('after twelve hours whatever happens', async () => {
    const agent = await t.people.signedIn(ada)
    for (t.clock.ahead = 0; t.clock.ahead < limits.session.absolute; t.clock.ahead += limits.session.idle / 2) {
      expect(await who(agent)).toBe(ada.id)
    }
    t.clock.ahead = limits.session.absolute + 60_000
    expect(await who(agent)).toBeNull()
  })

  test('when the account is disabled, and in a way that signing in again needs no clean browser', async () => {
    const eve = await t.people.person('Eve Shortly')
    const agent = await t.people.signedIn(eve)
    await t.db.update(people).set({ disabled: true }).where(eq(people.id, eve.id))
    expect(await who(agent)).toBeNull()
    await t.db.update(people).set({ disabled: false }).where(eq(people.id, eve.id))
    expect((await agent.post(session).send({ email: eve.email, password })).status).toBe(200)
    expect(await who(agent)).toBe(eve.id)
  })
})

describe('being seen', () => {
  test('is written at most once a minute', async () => {
    const agent = await t.people.signedIn(ada)
    const seen = async () => (await t.db.select().from(signIns).where(eq(signIns.personId, ada.id))).at(-1)?.lastSeen
    const begun = await seen()
    t.clock.ahead = limits.session.touch - 5000
    await who(agent)
    expect(await seen()).toEqual(begun)
    t.clock.ahead = limits.session.touch + 5000
    await who(agent)
    expect((await seen())?.getTime()).toBeGreaterThanOrEqual((begun?.getTime() ?? 0) + limits.session.touch)
  })
})

describe('a new password', () => {
  const change = (agent: Tab, body: object) => agent.put(`${apiRoot}/people/me/password`).send(body)
  const next = 'seven kettles drum at dusk'

  test('ends every other session, goes on in a new one, and is the only one that signs in', async () => {
    const kit = await t.people.person('Kit Marlow-Test')
    const [here, elsewhere] = [await t.people.signedIn(kit), await t.people.signedIn(kit)]
    const answer = await change(here, { current: password, next })
    expect(answer.status).toBe(204)
    expect(idIn(cookieOf(answer))).toBeDefined()
    expect(await who(here)).toBe(kit.id)
    expect(await who(elsewhere)).toBeNull()
    expect(t.told).toContainEqual({ kind: 'person-changed', personId: kit.id })
    expectProblem(await tab(t.app).post(session).send({ email: kit.email, password }), 'wrong-password')
    expect((await tab(t.app).post(session).send({ email: kit.email, password: next })).status).toBe(200)
  })

  test('needs the present one', async () => {
    const agent = await t.people.signedIn(ada)
    expectProblem(await change(agent, { current: 'something else', next }), 'wrong-password')
    expect(await who(agent)).toBe(ada.id)
  })

  test.each([
    ['14 characters', 'abcdefghijklmn', 'next'],
    ['129 characters', `${'ab'.repeat(64)}c`, 'next'],
    ['a common one', 'passwordpassword1', 'next'],
    ['the own name', 'Ada-Wren-Ada-Wren', 'next'],
  ])('is refused where it has %s', async (_name, bad, field) => {
    const agent = await t.people.signedIn(ada)
    const problem = expectProblem(await change(agent, { current: password, next: bad }), 'bad-request')
    expect(problem.errors?.map((error) => error.path)).toEqual([field])
  })
})
