import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { createTestApp, type TestApp } from '#tests/support/app.ts'
import { apiRoot, expectProblem, tab } from '#tests/support/http.ts'
import { password, type TestPerson } from '#tests/support/users.ts'

const session = `${apiRoot}/session`
let t: TestApp
let ada: TestPerson
beforeAll(async () => {
  t = await createTestApp()
  ada = await t.people.person('Ada Wren')
})
afterAll(() => t.close())

describe('signing in', () => {
  test('tells who is signed in, and nobody before', async () => {
    const agent = tab(t.app)
    expect((await agent.get(session)).body).toEqual({ me: null, demonstration: null })
    const answer = await agent.post(session).send({ email: 'ADA.WREN@example.org', password })
    expect(answer.status).toBe(200)
    expect(answer.body.me).toMatchObject({
      id: ada.id,
      name: 'Ada Wren',
      administrator: false,
      groups: [],
      toReview: 0,
    })
    expect((await agent.get(session)).body.me.id).toBe(ada.id)
  })
  test('is refused alike for a wrong password and an unknown address', async () => {
    const agent = tab(t.app)
    const wrong = expectProblem(await agent.post(session).send({ email: ada.email, password: 'x' }), 'wrong-password')
    const unknown = expectProblem(
      await agent.post(session).send({ email: 'no@example.org', password }),
      'wrong-password',
    )
    expect(unknown.detail).toBe(wrong.detail)
  })
})
