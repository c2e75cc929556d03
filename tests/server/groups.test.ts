import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { log } from '#drizzle/schema/index.ts'
import { createTestApp, type TestApp } from '#tests/support/app.ts'
import { apiRoot, expectProblem, type Tab } from '#tests/support/http.ts'
import { password, type TestGroup, type TestPerson } from '#tests/support/users.ts'

let t: TestApp
let [admin, maintainer, reader]: Tab[] = []
let people: Record<'max' | 'rea' | 'con', TestPerson>
let kiln: TestGroup
const groups = `${apiRoot}/groups`

beforeAll(async () => {
  t = await createTestApp()
  people = {
    max: await t.people.person('Max Keeper'),
    rea: await t.people.person('Rea Reader'),
    con: await t.people.person('Con Writer'),
  }
  kiln = await t.people.group('Kiln Lab', 'KLN', [
    [people.max, 'maintainer'],
    [people.rea, 'reader'],
    [people.con, 'contributor'],
  ])
  admin = await t.people.signedIn(await t.people.person('Site Admin', { administrator: true }))
  maintainer = await t.people.signedIn(people.max)
  reader = await t.people.signedIn(people.rea)
})
afterAll(() => t.close())

const agents = () => {
  if (!admin || !maintainer || !reader) throw new Error('not set up')
  return { admin, maintainer, reader }
}
const memberPath = (person: TestPerson) => `${groups}/${kiln.slug}/members/${person.id}`
const roleOf = (answer: { body: { members: { person: { id: number }; role: string }[] } }, person: TestPerson) =>
  answer.body.members.find((member) => member.person.id === person.id)?.role

describe('groups', () => {
  test('a member sees their own, the administrator all', async () => {
    await t.people.group('Other Lab', 'OTH')
    const { body } = await agents().reader.get(groups)
    expect(body.groups).toEqual([
      { slug: 'kiln-lab', name: 'Kiln Lab', prefixes: ['KLN'], memberCount: 3, pageCount: 0, role: 'reader' },
    ])
    const all = (await agents().admin.get(groups)).body.groups
    expect(all.map((group: { name: string; role: string | null }) => [group.name, group.role])).toEqual([
      ['Kiln Lab', null],
      ['Other Lab', null],
    ])
  })

  test('a group shows its members; invitations only to those who may invite', async () => {
    const invite = { email: 'new@example.org', name: 'New Person', role: 'reader' }
    expect((await agents().maintainer.post(`${groups}/kiln-lab/invitations`).send(invite)).status).toBe(201)
    const seen = (await agents().maintainer.get(`${groups}/kiln-lab`)).body
    expect(seen.mayInvite).toBe(true)
    expect(seen.invitations).toEqual([
      { ...invite, id: expect.any(Number), invitedBy: 'Max Keeper', expiresAt: expect.stringMatching(/Z$/) },
    ])
    expect(seen.members.map((member: { person: { name: string } }) => member.person.name)).toEqual([
      'Con Writer',
      'Max Keeper',
      'Rea Reader',
    ])
    expect((await agents().reader.get(`${groups}/kiln-lab`)).body).toMatchObject({ mayInvite: false, invitations: [] })
    expect((await agents().admin.get(`${groups}/kiln-lab`)).body).toMatchObject({ mayInvite: true, role: null })
  })

  test('the administrator makes one with its prefixes and the link of its first maintainer', async () => {
    const body = { name: 'Größe & Wert (Nord)', prefixes: ['GWN', 'GWX', 'GWN'], maintainerEmail: 'Lead@Example.org' }
    const answer = await agents().admin.post(groups).send(body)
    expect(answer.status).toBe(201)
    expect(answer.body.group).toMatchObject({ slug: 'gro-e-wert-nord', prefixes: ['GWN', 'GWX'], memberCount: 0 })
    expect(answer.body.invitation.link).toMatch(/^http:\/\/127\.0\.0\.1:4180\/invitations\/[\w-]{43}$/)
    const token = answer.body.invitation.link.split('/').at(-1)
    expect((await t.people.signedOut().get(`${apiRoot}/invitations/${token}`)).body).toMatchObject({
      email: 'lead@example.org',
      role: 'maintainer',
      group: body.name,
    })
  })

  test('a second group of the same name gets an address of its own; a taken prefix is refused whole', async () => {
    const make = (prefixes: string[]) =>
      agents().admin.post(groups).send({ name: 'Kiln Lab', prefixes, maintainerEmail: 'x@example.org' })
    expect((await make(['KLO'])).body.group.slug).toBe('kiln-lab-2')
    const problem = expectProblem(await make(['KLP', 'KLN']), 'already-exists')
    expect(problem.errors?.[0]?.path).toBe('prefixes.1')
    // Nothing of the refused one stayed: its first prefix is still free.
    expect((await make(['KLP'])).body.group.slug).toBe('kiln-lab-3')
  })
})

describe('members', () => {
  test('a new role holds from the next request on and is told and logged', async () => {
    const answer = await agents().maintainer.patch(memberPath(people.con)).send({ role: 'maintainer' })
    expect(roleOf(answer, people.con)).toBe('maintainer')
    expect(t.told).toContainEqual({ kind: 'person-changed', personId: people.con.id })
    const con = await t.people.signedIn(people.con)
    expect((await con.patch(memberPath(people.con)).send({ role: 'contributor' })).status).toBe(200)
    expectProblem(await con.patch(memberPath(people.con)).send({ role: 'maintainer' }), 'may-not')
    const rows = await t.db.select().from(log).where(eq(log.act, 'member:change'))
    expect(rows.at(-1)).toMatchObject({
      personId: people.con.id,
      target: 'group kiln-lab',
      before: { person: people.con.id, role: 'maintainer' },
      after: { person: people.con.id, role: 'contributor' },
      requestId: expect.any(String),
    })
  })

  test('the last maintainer can neither step down nor leave, and a disabled one does not count', async () => {
    const own = memberPath(people.max)
    expectProblem(await agents().maintainer.patch(own).send({ role: 'reader' }), 'last-maintainer')
    expectProblem(await agents().maintainer.delete(own), 'last-maintainer')
    expectProblem(await agents().admin.delete(own), 'last-maintainer')
    const away = await t.people.person('Away Keeper')
    const group = await t.people.group('Two Keepers', 'TWO', [
      [people.max, 'maintainer'],
      [away, 'maintainer'],
    ])
    await agents().admin.patch(`${apiRoot}/people/${away.id}`).send({ disabled: true })
    const leave = () => agents().maintainer.delete(`${groups}/${group.slug}/members/${people.max.id}`)
    expectProblem(await leave(), 'last-maintainer')
    await agents().admin.patch(`${apiRoot}/people/${away.id}`).send({ disabled: false })
    const left = await leave()
    expect(left.status).toBe(200)
    expect(left.body).toMatchObject({ role: null, memberCount: 1 })
  })

  test('of two maintainers who step down at once one stays', async () => {
    const pair = [await t.people.person('Pia Pair'), await t.people.person('Per Pair')]
    const group = await t.people.group(
      'Pair Lab',
      'PAR',
      pair.map((person) => [person, 'maintainer'] as const),
    )
    const tabs = await Promise.all(pair.map((person) => t.people.signedIn(person)))
    const answers = await Promise.all(
      tabs.map((agent, i) => agent.patch(`${groups}/${group.slug}/members/${pair[i]?.id}`).send({ role: 'reader' })),
    )
    expect(answers.map((answer) => answer.status).sort()).toEqual([200, 409])
  })

  test('whoever is not in the group is not found in it', async () => {
    const other = await t.people.person('Otto Elsewhere')
    expectProblem(await agents().maintainer.patch(memberPath(other)).send({ role: 'reader' }), 'not-found')
    expectProblem(await agents().maintainer.delete(memberPath(other)), 'not-found')
  })

  test('a removed member finds nothing there any more', async () => {
    const gone = await t.people.person('Gus Leaving')
    const group = await t.people.group('Leaving Lab', 'LVG', [
      [people.max, 'maintainer'],
      [gone, 'contributor'],
    ])
    const agent = await t.people.signedIn(gone)
    expect((await agent.get(`${groups}/${group.slug}`)).status).toBe(200)
    await agents().maintainer.delete(`${groups}/${group.slug}/members/${gone.id}`)
    expectProblem(await agent.get(`${groups}/${group.slug}`), 'not-found')
  })
})

describe('invitations', () => {
  const invite = (email: string, role = 'contributor') =>
    agents().maintainer.post(`${groups}/kiln-lab/invitations`).send({ email, role })
  const open = (link: string) => t.people.signedOut().get(`${apiRoot}/invitations/${link.split('/').at(-1)}`)
  const listed = async (): Promise<{ id: number; email: string }[]> =>
    (await agents().maintainer.get(`${groups}/kiln-lab`)).body.invitations

  test('a newer one of the same address voids the older', async () => {
    const first = (await invite('twice@example.org')).body.link
    const second = (await invite('Twice@example.org')).body.link
    expectProblem(await open(first), 'link-used')
    expect((await open(second)).status).toBe(200)
    expect((await listed()).filter((row) => row.email === 'twice@example.org')).toHaveLength(1)
  })

  test('one taken back cannot be opened, and not be taken back again', async () => {
    const { link } = (await invite('back@example.org')).body
    const found = (await listed()).find((row) => row.email === 'back@example.org')
    const address = `${groups}/kiln-lab/invitations/${found?.id}`
    expectProblem(await agents().admin.delete(`${groups}/pair-lab/invitations/${found?.id}`), 'not-found')
    expect((await agents().maintainer.delete(address)).status).toBe(204)
    expectProblem(await open(link), 'link-used')
    expectProblem(await agents().maintainer.delete(address), 'not-found')
  })

  test('a member is not invited again', async () => {
    expectProblem(await invite(people.rea.email), 'already-exists')
  })

  test('accepting one with an account keeps the account and adds the group', async () => {
    const otto = await t.people.person('Otto Joining')
    const { link } = (await invite(otto.email)).body
    expect((await open(link)).body).toMatchObject({ hasAccount: true, name: 'Otto Joining', group: 'Kiln Lab' })
    const agent = t.people.signedOut()
    const address = `${apiRoot}/invitations/${link.split('/').at(-1)}`
    expectProblem(await agent.post(address).send({ password: 'wrong' }), 'wrong-password')
    const answer = await agent.post(address).send({ password })
    expect(answer.body.me).toMatchObject({
      id: otto.id,
      groups: [{ slug: 'kiln-lab', name: 'Kiln Lab', role: 'contributor', prefixes: ['KLN'] }],
    })
    expectProblem(await agent.post(address).send({ password }), 'link-used')
  })
})
