import { afterAll, beforeAll, beforeEach, describe, expect, test } from 'vitest'
import { oneTimeLinks, people } from '#drizzle/schema/index.ts'
import { limits } from '#server/limits.ts'
import { makeSetupLink } from '#server/services/links.ts'
import { createTestApp, type TestApp } from '#tests/support/app.ts'
import { apiRoot, expectProblem, type Tab } from '#tests/support/http.ts'
import { password } from '#tests/support/users.ts'

const good = 'seven kettles drum at dusk'
const day = 24 * 60 * 60 * 1000
const tokenOf = (link: string) => link.split('/').at(-1) ?? ''

describe('setting up an empty library', () => {
  let t: TestApp
  beforeAll(async () => {
    t = await createTestApp()
  })
  afterAll(() => t.close())
  const first = { name: 'First Admin', email: 'First@Example.org', password: good }

  test('the newest link makes the first administrator, once', async () => {
    const older = await makeSetupLink(t.db, new Date())
    const link = await makeSetupLink(t.db, new Date())
    const address = `${apiRoot}/setup/${tokenOf(link?.path ?? '')}`
    expect(link?.path).toMatch(/^\/setup\/[\w-]{43}$/)
    expectProblem(await t.people.signedOut().get(`${apiRoot}/setup/${tokenOf(older?.path ?? '')}`), 'link-used')
    const agent = t.people.signedOut()
    expect((await agent.get(address)).body).toMatchObject({ kind: 'setup', email: null, hasAccount: false })

    const common = await agent.post(address).send({ ...first, password: 'first.admin.first' })
    expect(expectProblem(common, 'bad-request').errors?.[0]?.path).toBe('password')

    const answer = await agent.post(address).send(first)
    expect(answer.status).toBe(201)
    expect(answer.body.me).toMatchObject({ name: 'First Admin', email: 'first@example.org', administrator: true })
    expect((await agent.get(`${apiRoot}/people`)).status).toBe(200)
    expectProblem(await agent.get(address), 'link-used')
    expectProblem(await t.people.signedOut().post(address).send(first), 'link-used')
  })

  test('no further link is made where there is an administrator', async () => {
    expect(await makeSetupLink(t.db, new Date())).toBeNull()
  })
})

test('of two people who open the set-up link at once one becomes administrator', async () => {
  const t = await createTestApp()
  const link = await makeSetupLink(t.db, new Date())
  const address = `${apiRoot}/setup/${tokenOf(link?.path ?? '')}`
  const answers = await Promise.all(
    ['a', 'b', 'c'].map((letter) =>
      t.people
        .signedOut()
        .post(address)
        .send({ name: `Person ${letter}`, email: `${letter}@example.org`, password: good }),
    ),
  )
  expect(answers.map((answer) => answer.status).sort()).toEqual([201, 410, 410])
  expect(await t.db.select().from(people)).toHaveLength(1)
  await t.close()
})

describe('links to hand over', () => {
  let t: TestApp
  let admin: Tab
  beforeAll(async () => {
    t = await createTestApp()
    admin = await t.people.signedIn(await t.people.person('Site Admin', { administrator: true }))
    await t.people.group('Kiln Lab', 'KLN')
  })
  afterAll(() => t.close())
  beforeEach(() => {
    t.clock.ahead = 0
  })

  const invite = async (email: string) => {
    const answer = await admin.post(`${apiRoot}/groups/kiln-lab/invitations`).send({ email, role: 'reader' })
    return `${apiRoot}/invitations/${tokenOf(answer.body.link)}`
  }
  const passwordLink = async (id: number) => {
    const answer = await admin.post(`${apiRoot}/people/${id}/password-link`)
    expect(answer.body.link).toMatch(/^http:\/\/127\.0\.0\.1:4180\/passwords\/[\w-]{43}$/)
    return `${apiRoot}/password-links/${tokenOf(answer.body.link)}`
  }

  test('the database keeps only the hash of their 256 random bits', async () => {
    const address = await invite('hash@example.org')
    const token = tokenOf(address)
    expect(Buffer.from(token, 'base64url')).toHaveLength(32)
    const rows = await t.db.select().from(oneTimeLinks)
    expect(rows.length).toBeGreaterThan(0)
    expect(JSON.stringify(rows)).not.toContain(token)
    for (const row of rows) expect(row.tokenHash).toMatch(/^[0-9a-f]{64}$/)
  })

  test('an invitation holds fourteen days', async () => {
    const address = await invite('late@example.org')
    t.clock.ahead = 14 * day - 60_000
    expect((await t.people.signedOut().get(address)).status).toBe(200)
    t.clock.ahead = 14 * day + 1000
    expectProblem(await t.people.signedOut().get(address), 'link-used')
    expectProblem(await t.people.signedOut().post(address).send({ name: 'X', password: good }), 'link-used')
  })

  test('a newcomer needs a name and a good password, and is signed in and in the group afterwards', async () => {
    const address = await invite('new@example.org')
    const agent = t.people.signedOut()
    const path = async (body: object) =>
      expectProblem(await agent.post(address).send(body), 'bad-request').errors?.[0]?.path
    expect(await path({ password: good })).toBe('name')
    expect(await path({ name: 'New', password: 'short' })).toBe('password')
    expect(await path({ name: 'New', password: 'sunshine-sunshine' })).toBe('password')
    const answer = await agent.post(address).send({ name: '  Nia New ', password: good })
    expect(answer.body.me).toMatchObject({
      name: 'Nia New',
      email: 'new@example.org',
      administrator: false,
      groups: [{ slug: 'kiln-lab', role: 'reader' }],
    })
    expect((await agent.get(`${apiRoot}/groups/kiln-lab`)).status).toBe(200)
  })

  test('accepted while somebody else is signed in, it ends that session', async () => {
    const ada = await t.people.person('Ada Wren')
    const agent = await t.people.signedIn(ada)
    t.told.length = 0
    const answer = await agent.post(await invite('shared@example.org')).send({ name: 'Sam Shared', password: good })
    expect(answer.body.me.name).toBe('Sam Shared')
    expect(t.told.map((event) => event.kind)).toContain('session-ended')
    expect((await agent.get(`${apiRoot}/session`)).body.me.name).toBe('Sam Shared')
  })

  test('a new-password link holds a day, works once, and ends every session', async () => {
    expect(limits.links.password).toBe(day)
    const bo = await t.people.person('Bo Forgetful')
    const elsewhere = await t.people.signedIn(bo)
    const older = await passwordLink(bo.id)
    const address = await passwordLink(bo.id)
    expectProblem(await t.people.signedOut().get(older), 'link-used')
    t.clock.ahead = day + 1000
    expectProblem(await t.people.signedOut().get(address), 'link-used')
    t.clock.ahead = 0
    const agent = t.people.signedOut()
    expect((await agent.get(address)).body).toMatchObject({ kind: 'password', email: bo.email, name: 'Bo Forgetful' })
    const answer = await agent.post(address).send({ password: good })
    expect(answer.body.me.id).toBe(bo.id)
    expect((await elsewhere.get(`${apiRoot}/session`)).body.me).toBeNull()
    expectProblem(await agent.post(address).send({ password: good }), 'link-used')
    const signIn = (secret: string) =>
      t.people.signedOut().post(`${apiRoot}/session`).send({ email: bo.email, password: secret })
    expectProblem(await signIn(password), 'wrong-password')
    expect((await signIn(good)).status).toBe(200)
  })

  test('disabling the account voids it, also after enabling again', async () => {
    const cy = await t.people.person('Cy Disabled')
    const address = await passwordLink(cy.id)
    await admin.patch(`${apiRoot}/people/${cy.id}`).send({ disabled: true })
    expectProblem(await t.people.signedOut().get(address), 'link-used')
    expectProblem(await admin.post(`${apiRoot}/people/${cy.id}/password-link`), 'may-not')
    await admin.patch(`${apiRoot}/people/${cy.id}`).send({ disabled: false })
    expectProblem(await t.people.signedOut().get(address), 'link-used')
  })

  test('a link of one kind opens nothing of another, and unknown ones read like used ones', async () => {
    const token = tokenOf(await invite('kind@example.org'))
    for (const screen of ['setup', 'password-links']) {
      expectProblem(await t.people.signedOut().get(`${apiRoot}/${screen}/${token}`), 'link-used')
    }
    expectProblem(await t.people.signedOut().get(`${apiRoot}/invitations/${'A'.repeat(43)}`), 'link-used')
    expectProblem(await t.people.signedOut().get(`${apiRoot}/invitations/short`), 'not-found')
  })

  test('guessing the password of an account through an invitation is limited', async () => {
    const di = await t.people.person('Di Invited')
    const address = await invite(di.email)
    for (let i = 0; i < limits.rate.signInByAccount; i++) {
      expectProblem(await t.people.signedOut().post(address).send({ password: 'wrong' }), 'wrong-password')
    }
    expectProblem(await t.people.signedOut().post(address).send({ password }), 'too-many')
    // Neither a newer link nor the sign-in form gives more guesses.
    const newer = await invite(di.email.toUpperCase())
    expectProblem(await t.people.signedOut().post(newer).send({ password }), 'too-many')
    const signIn = await t.people.signedOut().post(`${apiRoot}/session`).send({ email: di.email, password })
    expectProblem(signIn, 'too-many')
    t.clock.ahead = limits.rate.window + 1000
    expect((await t.people.signedOut().post(newer).send({ password })).status).toBe(201)
  })
})

test('guesses from one network address are limited whatever the invitations; accepting is not counted', async () => {
  const t = await createTestApp()
  const admin = await t.people.signedIn(await t.people.person('Site Admin', { administrator: true }))
  await t.people.group('Kiln Lab', 'KLN')
  const accept = async (email: string, body: object) => {
    const answer = await admin.post(`${apiRoot}/groups/kiln-lab/invitations`).send({ email, role: 'reader' })
    return t.people
      .signedOut()
      .post(`${apiRoot}/invitations/${tokenOf(answer.body.link)}`)
      .send(body)
  }
  for (let i = 0; i < limits.rate.signInByAddress; i++) {
    const person = await t.people.person(`Guest ${i}`)
    expectProblem(await accept(person.email, { password: 'wrong' }), 'wrong-password')
  }
  expectProblem(await accept('fresh@example.org', { name: 'Fresh', password: good }), 'too-many')
  t.clock.ahead = limits.rate.window + 1000
  for (let i = 0; i <= limits.rate.signInByAddress; i++) {
    expect((await accept(`welcome${i}@example.org`, { name: 'Welcome', password: good })).status).toBe(201)
  }
  await t.close()
})
