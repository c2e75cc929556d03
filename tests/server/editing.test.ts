import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { pages, signIns } from '#drizzle/schema/index.ts'
import { limits } from '#server/limits.ts'
import { createTestApp, type TestApp } from '#tests/support/app.ts'
import { makePage } from '#tests/support/collab-pages.ts'
import { until } from '#tests/support/collab-server.ts'
import { listen } from '#tests/support/editing.ts'
import { apiRoot, type Tab } from '#tests/support/http.ts'
import type { RawSocket } from '#tests/support/raw-socket.ts'
import { password, type TestGroup, type TestPerson } from '#tests/support/users.ts'

let t: TestApp
let live: Awaited<ReturnType<typeof listen>>
let admin: Tab
let group: TestGroup
let keeper: TestPerson
let pageId: number
beforeAll(async () => {
  t = await createTestApp()
  live = await listen(t)
  admin = await t.people.signedIn(await t.people.person('Site Admin', { administrator: true }))
  keeper = await t.people.person('Max Keeper')
  group = await t.people.group('Kiln Lab', 'KLN', [[keeper, 'maintainer']])
  pageId = await makePage(t.db, group.id)
})
afterAll(async () => {
  await live.close()
  await t.close()
})

async function writer(name: string) {
  const person = await t.people.person(name)
  const invited = await admin
    .post(`${apiRoot}/groups/${group.slug}/invitations`)
    .send({ email: person.email, role: 'contributor' })
  const token = String(invited.body.link).split('/').at(-1)
  await t.people.signedOut().post(`${apiRoot}/invitations/${token}`).send({ password })
  const { agent, cookie } = await live.signIn(person)
  return { person, agent, cookie }
}
async function joined(cookie: string): Promise<RawSocket> {
  const socket = live.open(pageId, cookie)
  await until(() => socket.of('room').length > 0 || socket.closed !== null, 'the room to speak')
  expect(socket.closed).toBeNull()
  return socket
}
const lastState = (socket: RawSocket) => socket.of('room').at(-1)?.news.state

describe('an open socket', () => {
  test('closes when its session signs out, and only that one', async () => {
    const { person, agent, cookie } = await writer('Sig Out')
    const other = await live.signIn(person)
    const [mine, elsewhere] = [await joined(cookie), await joined(other.cookie)]
    await agent.delete(`${apiRoot}/session`)
    expect(await mine.closes()).toBe(4401)
    expect(elsewhere.closed).toBeNull()
    elsewhere.end()
  })

  test('closes when its person signs out everywhere, from any browser', async () => {
    const { person, cookie } = await writer('Sig Everywhere')
    const { agent } = await live.signIn(person)
    const socket = await joined(cookie)
    await agent.delete(`${apiRoot}/session/everywhere`)
    expect(await socket.closes()).toBe(4401)
  })

  test('closes when its person’s password changes, or the account is disabled', async () => {
    const changed = await writer('Pass Word')
    const one = await joined(changed.cookie)
    const next = 'seven kettles drum at dusk'
    await changed.agent.put(`${apiRoot}/people/me/password`).send({ current: password, next })
    expect(await one.closes()).toBe(4401)
    const disabled = await writer('Off Line')
    const two = await joined(disabled.cookie)
    await admin.patch(`${apiRoot}/people/${disabled.person.id}`).send({ disabled: true })
    expect(await two.closes()).toBe(4401)
  })

  test('becomes a reader’s with the role, and closes with the membership', async () => {
    const { person, cookie } = await writer('Rolf Lower')
    const socket = await joined(cookie)
    expect(lastState(socket)).toBe('live')
    const member = `${apiRoot}/groups/${group.slug}/members/${person.id}`
    await admin.patch(member).send({ role: 'reader' })
    await until(() => lastState(socket) === 'read-only', 'the room to be read-only')
    await admin.delete(member)
    expect(await socket.closes()).toBe(4404)
  })

  test('closes when the page is removed', async () => {
    const { agent, cookie } = await live.signIn(keeper)
    const other = await makePage(t.db, group.id)
    const [row] = await t.db.select().from(pages).where(eq(pages.id, other))
    const socket = live.open(other, cookie)
    await until(() => socket.of('room').length > 0, 'the room to speak')
    const head = await agent.get(`${apiRoot}/pages/${row?.code}`)
    const answer = await agent.delete(`${apiRoot}/pages/${row?.code}`).set('If-Match', String(head.headers.etag))
    expect(answer.status).toBe(204)
    expect(await socket.closes()).toBe(4404)
  })

  test('is no session of its own: an old cookie opens nothing', async () => {
    const { agent, cookie } = await writer('Old Cookie')
    await agent.delete(`${apiRoot}/session`)
    expect(await live.open(pageId, cookie).closes()).toBe(4401)
  })
})

describe('activity', () => {
  test('typing keeps a session from idling out; an open socket alone does not', async () => {
    const { person, agent, cookie } = await writer('Typ Ing')
    const socket = await joined(cookie)
    const seen = async () => {
      const rows = await t.db.select().from(signIns).where(eq(signIns.personId, person.id))
      return rows.at(-1)?.lastSeen.getTime() ?? 0
    }
    const begun = await seen()
    t.clock.ahead = limits.session.idle / 2
    expect(await seen()).toBe(begun)
    const doc = await socket.synced()
    expect(await seen()).toBe(begun)
    doc.on('update', (update: Uint8Array) => socket.sendSync(2, update))
    doc.getText('equations').insert(0, '# typed\n')
    await until(async () => (await seen()) > begun + limits.session.idle / 4, 'the activity to be noted')
    t.clock.ahead = limits.session.idle + 5 * 60_000
    expect((await agent.get(`${apiRoot}/session`)).body.me?.id).toBe(person.id)
    socket.end()
    t.clock.ahead = 0
  })
})

describe('readiness', () => {
  test('is there while everything typed is saved', async () => {
    expect((await admin.get('/readyz')).status).toBe(200)
    t.readiness.checks.push(() => false)
    expect((await admin.get('/readyz')).status).toBe(503)
    t.readiness.checks.pop()
  })
})
