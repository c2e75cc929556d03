import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import * as Y from 'yjs'
import { loadDocument } from '#collab/persistence.ts'
import { maySend, messageKinds } from '#collab/policy.ts'
import { people } from '#drizzle/schema/index.ts'
import { pageRole } from '#shared/api/roles.ts'
import { equationsOf } from '#shared/ydoc/shape.ts'
import { createTestApp, type TestApp } from '#tests/support/app.ts'
import { until } from '#tests/support/collab-server.ts'
import { listen } from '#tests/support/editing.ts'
import type { RawSocket } from '#tests/support/raw-socket.ts'
import type { TestPerson } from '#tests/support/users.ts'
import {
  type Met,
  relationOf,
  type StateName,
  socketMessages,
  sockets,
  states,
  type ViewerName,
  viewers,
} from './policy-expectations.ts'
import { makePolicyPages, type PolicyPage } from './policy-pages.ts'

let t: TestApp
let live: Awaited<ReturnType<typeof listen>>
let pages: PolicyPage[]
let cookies: Record<ViewerName, string | null>

beforeAll(async () => {
  t = await createTestApp()
  live = await listen(t)
  const who: Record<Exclude<ViewerName, 'anonymous'>, TestPerson> = {
    disabled: await t.people.person('Dis Abled'),
    stranger: await t.people.person('Str Anger'),
    away: await t.people.person('A Way'),
    administrator: await t.people.person('Ad Min', { administrator: true }),
    reader: await t.people.person('Rea Der'),
    contributor: await t.people.person('Con Trib'),
    maintainer: await t.people.person('Main Tainer'),
  }
  const group = await t.people.group('Kiln Lab', 'KLN', [
    [who.reader, 'reader'],
    [who.contributor, 'contributor'],
    [who.maintainer, 'maintainer'],
  ])
  await t.people.group('Other Lab', 'OTH', [[who.away, 'contributor']])
  pages = await makePolicyPages(t.db, group, who.contributor.id)
  const cookieOf = async (name: Exclude<ViewerName, 'anonymous'>) => (await live.signIn(who[name])).cookie
  cookies = {
    anonymous: null,
    disabled: await cookieOf('disabled'),
    stranger: await cookieOf('stranger'),
    away: await cookieOf('away'),
    administrator: await cookieOf('administrator'),
    reader: await cookieOf('reader'),
    contributor: await cookieOf('contributor'),
    maintainer: await cookieOf('maintainer'),
  }
  await t.db.update(people).set({ disabled: true }).where(eq(people.id, who.disabled.id))
})
afterAll(async () => {
  await live.close()
  await t.close()
})

/** How the server meets a socket: the room's first word, or the code it is closed with. */
async function metBy(socket: RawSocket): Promise<unknown> {
  await until(() => socket.of('room').length > 0 || socket.closed !== null, 'the server to say something')
  return socket.closed?.code ?? socket.of('room')[0]?.news.state
}

/** An update that adds a line, as if typed against an empty copy. */
function lineUpdate(text: string): Uint8Array {
  const doc = new Y.Doc()
  equationsOf(doc).insert(0, text)
  return Y.encodeStateAsUpdate(doc)
}

const stored = async (page: PolicyPage) => equationsOf(await loadDocument(t.db, page.id, 1)).toString()

describe.each(viewers)('%s', (viewer) => {
  test('is met on every page as expected, and writes only where live', async () => {
    for (const page of pages) {
      const what = `${page.state}, open to ${page.access}`
      const expected = sockets[relationOf(viewer, page.access)][states.indexOf(page.state)]
      const socket = live.open(page.id, cookies[viewer])
      expect(await metBy(socket), what).toBe(expected)
      if (socket.closed === null) {
        const line = `# ${viewer} was here\n`
        // Updates count after the first exchange, in which the server learns what the browser has.
        await socket.synced()
        socket.sendSync(2, lineUpdate(line))
        socket.sendSync(0, Y.encodeStateVector(new Y.Doc()))
        await until(() => socket.of('step-2').length > 1, 'an answer after the edit')
        if (expected === 'live') {
          await until(() => socket.saved >= 2, 'the edit to be saved')
          expect(await stored(page), what).toContain(line)
        } else {
          expect(socket.saved, what).toBeLessThan(1)
          expect(await stored(page), what).not.toContain(line)
        }
      }
      socket.end()
    }
  })
})

describe('messages', () => {
  test('every kind that a browser may send has a row, and each row a kind', () => {
    expect(messageKinds.map(({ kind }) => kind).sort()).toEqual(Object.keys(socketMessages).sort())
  })

  test('each is taken from those, and in those states, that are expected', () => {
    for (const { kind } of messageKinds) {
      for (const viewer of viewers) {
        for (const { state, access } of pages) {
          const met: Met | undefined = sockets[relationOf(viewer, access)][states.indexOf(state)]
          const member = viewer === 'reader' || viewer === 'contributor' || viewer === 'maintainer' ? viewer : null
          const signedIn = viewer !== 'anonymous' && viewer !== 'disabled'
          const role = pageRole({ signedIn, member }, access)
          const expected = met !== undefined && socketMessages[kind]?.includes(met) === true
          expect(maySend(kind, { role, state, generation: 1 }), `${kind} of ${viewer} on ${state}`).toBe(expected)
        }
      }
    }
  })

  test('a kind without an act is refused', () => {
    const invented = 'erase' as 'update'
    expect(maySend(invented, { role: 'maintainer', state: 'draft', generation: 1 })).toBe(false)
    const unheard = 'elsewhere' as StateName
    expect(maySend('update', { role: 'maintainer', state: unheard, generation: 1 })).toBe(false)
  })
})

describe('an address', () => {
  test('of another site is refused before the session is looked at', async () => {
    const [page] = pages
    for (const origin of ['https://evil.example', 'null', `${t.config.publicOrigin}.evil.example`, null]) {
      const socket = live.open(page?.id ?? 0, cookies.maintainer, origin)
      await until(() => socket.refused !== null || socket.closed !== null, 'an answer')
      expect(socket.refused).toBe(403)
    }
  })

  test('of no page', async () => {
    expect(await metBy(live.open(999_999, cookies.maintainer))).toBe(4404)
    expect(await metBy(live.open(999_999, null))).toBe(4401)
  })
})
