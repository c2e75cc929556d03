import { afterAll, beforeAll, beforeEach, describe, expect, test } from 'vitest'
import { createTestApp, type TestApp } from '#tests/support/app.ts'
import { apiRoot, expectProblem, type Tab } from '#tests/support/http.ts'
import type { TestPerson } from '#tests/support/users.ts'

const people = `${apiRoot}/people`
let t: TestApp
let boss: TestPerson
let admin: Tab
beforeAll(async () => {
  t = await createTestApp()
  boss = await t.people.person('Boss Admin', { administrator: true })
  admin = await t.people.signedIn(boss)
})
afterAll(() => t.close())
beforeEach(() => {
  t.told.length = 0
})
const change = (person: TestPerson, body: object) => admin.patch(`${people}/${person.id}`).send(body)

describe('the administrator', () => {
  test('sees everybody, with groups and last sign-in, never a password hash', async () => {
    const ada = await t.people.person('Ada Wren')
    await t.people.group('Kiln Lab', 'KLN', [[ada, 'maintainer']])
    const answer = await admin.get(people)
    const rows: { id: number }[] = answer.body.people
    expect(rows.find((row) => row.id === ada.id)).toEqual({
      ...ada,
      administrator: false,
      disabled: false,
      createdAt: '2026-01-05T08:00:00.000Z',
      lastSignIn: null,
      groups: [{ slug: 'kiln-lab', name: 'Kiln Lab', role: 'maintainer' }],
    })
    expect(rows.find((row) => row.id === boss.id)).toMatchObject({ lastSignIn: expect.stringMatching(/Z$/) })
    expect(answer.text).not.toMatch(/argon2|hash/i)
  })

  test('disables an account: its sessions end at once and its sockets are told', async () => {
    const eve = await t.people.person('Eve Shortly')
    const agent = await t.people.signedIn(eve)
    expect((await change(eve, { disabled: true })).body).toMatchObject({ id: eve.id, disabled: true })
    expect(t.told).toEqual([{ kind: 'person-changed', personId: eve.id }])
    expect((await agent.get(`${apiRoot}/session`)).body.me).toBeNull()
    // Enabling again does not bring the old session back.
    await change(eve, { disabled: false })
    expect((await agent.get(`${apiRoot}/session`)).body.me).toBeNull()
  })

  test('shares the role, and loses it from the next request on', async () => {
    const ned = await t.people.person('Ned Second')
    const agent = await t.people.signedIn(ned)
    expectProblem(await agent.get(people), 'may-not')
    await change(ned, { administrator: true })
    expect((await agent.get(people)).status).toBe(200)
    await change(ned, { administrator: false })
    expectProblem(await agent.get(people), 'may-not')
  })

  test('the last one can neither be disabled nor lose the role; a disabled one does not count', async () => {
    const off = await t.people.person('Off Admin', { administrator: true, disabled: true })
    expectProblem(await change(boss, { disabled: true }), 'last-maintainer')
    expectProblem(await change(boss, { administrator: false }), 'last-maintainer')
    await change(off, { disabled: false })
    expect((await change(boss, { administrator: false })).status).toBe(200)
    expectProblem(await admin.get(people), 'may-not')
    const second = await t.people.signedIn(off)
    await second.patch(`${people}/${boss.id}`).send({ administrator: true })
    await second.patch(`${people}/${off.id}`).send({ administrator: false })
    expect((await admin.get(people)).status).toBe(200)
  })

  test('of two who step down at once one stays', async () => {
    const two = await t.people.person('Two Admin', { administrator: true })
    const other = await t.people.signedIn(two)
    const answers = await Promise.all([
      change(boss, { administrator: false }),
      other.patch(`${people}/${two.id}`).send({ administrator: false }),
    ])
    expect(answers.map((answer) => answer.status).sort()).toEqual([200, 409])
    const [survivor, gone] = answers[0]?.status === 409 ? [admin, two] : [other, boss]
    await survivor.patch(`${people}/${gone.id}`).send({ administrator: true })
    expect((await admin.get(people)).status).toBe(200)
  })

  test('cannot disable the only maintainer of a group who can sign in', async () => {
    const [mia, ola] = [await t.people.person('Mia Keeper'), await t.people.person('Ola Keeper')]
    await t.people.group('Loom Lab', 'LOM', [
      [mia, 'maintainer'],
      [ola, 'maintainer'],
    ])
    await t.people.group('Reading Lab', 'RDL', [[mia, 'reader']])
    expect((await change(ola, { disabled: true })).status).toBe(200)
    const refused = expectProblem(await change(mia, { disabled: true }), 'last-maintainer')
    expect(refused.detail).toContain('Loom Lab')
    // Nothing of the refused act is done: her sessions stand.
    const agent = await t.people.signedIn(mia)
    expectProblem(await change(mia, { disabled: true, administrator: true }), 'last-maintainer')
    expect((await agent.get(`${apiRoot}/session`)).body.me).toMatchObject({ id: mia.id, administrator: false })
    await change(ola, { disabled: false })
    expect((await change(mia, { disabled: true })).status).toBe(200)
  })

  test('of two maintainers disabled at once one stays', async () => {
    const [una, ivo] = [await t.people.person('Una Pair'), await t.people.person('Ivo Pair')]
    await t.people.group('Pair Lab', 'PRL', [
      [una, 'maintainer'],
      [ivo, 'maintainer'],
    ])
    const answers = await Promise.all([change(una, { disabled: true }), change(ivo, { disabled: true })])
    expect(answers.map((answer) => answer.status).sort()).toEqual([200, 409])
  })

  test('gets 404 for who does not exist', async () => {
    expectProblem(await admin.patch(`${people}/999999`).send({ disabled: true }), 'not-found')
    expectProblem(await admin.post(`${people}/999999/password-link`), 'not-found')
  })
})
