import { randomUUID } from 'node:crypto'
import { afterAll, beforeAll, beforeEach, expect, test } from 'vitest'
import { groups, idempotencyKeys, invitations } from '#drizzle/schema/index.ts'
import { limits } from '#server/limits.ts'
import { createTestApp, type TestApp } from '#tests/support/app.ts'
import { apiRoot, expectProblem, type Tab } from '#tests/support/http.ts'

let t: TestApp
let admin: Tab
beforeAll(async () => {
  t = await createTestApp()
  admin = await t.people.signedIn(await t.people.person('Site Admin', { administrator: true }))
})
afterAll(() => t.close())
beforeEach(() => {
  t.clock.ahead = 0
})

const make = (key: string, name: string, prefix: string, agent = admin) =>
  agent
    .post(`${apiRoot}/groups`)
    .set('Idempotency-Key', key)
    .send({ name, prefixes: [prefix], maintainerEmail: 'lead@example.org' })
const count = async () => (await t.db.select().from(groups)).length

test('a repeated request makes nothing twice and gets the first answer, its one-time link too', async () => {
  const key = randomUUID()
  const first = await make(key, 'Kiln Lab', 'KLN')
  const before = await count()
  const second = await make(key, 'Kiln Lab', 'KLN')
  expect([first.status, second.status]).toEqual([201, 201])
  expect(second.body).toEqual(first.body)
  expect(await count()).toBe(before)
  expect(await t.db.select().from(invitations)).toHaveLength(1)
})

test('neither the key nor the link can be read in the database', async () => {
  const key = randomUUID()
  const answer = await make(key, 'Secret Lab', 'SEC')
  const rows = JSON.stringify(await t.db.select().from(idempotencyKeys))
  expect(rows).not.toContain(key)
  expect(rows).not.toContain(answer.body.invitation.link.split('/').at(-1))
  expect(rows).not.toContain('Secret Lab')
})

test('the same key for another request is refused', async () => {
  const key = randomUUID()
  await make(key, 'One Lab', 'ONE')
  expectProblem(await make(key, 'Two Lab', 'TWO'), 'same-key')
  const elsewhere = admin.post(`${apiRoot}/groups/one-lab/invitations`).set('Idempotency-Key', key)
  expectProblem(await elsewhere.send({ email: 'x@example.org', role: 'reader' }), 'same-key')
})

test('of many at once one makes it; the others get its answer or are asked to come back', async () => {
  const key = randomUUID()
  const before = await count()
  const answers = await Promise.all(Array.from({ length: 6 }, () => make(key, 'Race Lab', 'RCE')))
  expect(await count()).toBe(before + 1)
  const made = answers.filter((answer) => answer.status === 201)
  expect(made.length).toBeGreaterThan(0)
  expect(new Set(made.map((answer) => answer.body.invitation.link)).size).toBe(1)
  for (const answer of answers.filter((one) => one.status !== 201)) expectProblem(answer, 'same-key')
})

test('a refused request may be tried again with the same key', async () => {
  const key = randomUUID()
  expectProblem(await make(key, 'Taken Lab', 'KLN'), 'already-exists')
  expectProblem(await make(key, 'Taken Lab', 'KLN'), 'already-exists')
})

test('a key belongs to its person, holds a day, and has a form', async () => {
  const key = randomUUID()
  const other = await t.people.signedIn(await t.people.person('Other Admin', { administrator: true }))
  await make(key, 'Mine', 'MIN')
  expect((await make(key, 'Yours', 'YRS', other)).status).toBe(201)
  t.clock.ahead = limits.idempotencyKeys.keep + 60_000
  const later = await t.people.signedIn(await t.people.person('Third Admin', { administrator: true }))
  expect((await make(key, 'Theirs', 'THR', later)).status).toBe(201)
  expectProblem(await make('short', 'Short', 'SHR', later), 'bad-request')
})
