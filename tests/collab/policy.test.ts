import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import * as Y from 'yjs'
import { joinRefusal, maySend, messageKinds, stateByPolicy } from '#collab/policy.ts'
import { pages } from '#drizzle/schema/index.ts'
import { type PageRole, type PageState, pageRoles, pageStates } from '#shared/api/roles.ts'
import { closeCodes } from '#shared/ydoc/rooms.ts'
import { equationsOf } from '#shared/ydoc/shape.ts'
import { committed, makePage, makePeople, makeRevision, smallDraft } from '#tests/support/collab-pages.ts'
import { type CollabServerForTests, changedLimits, startCollab, until } from '#tests/support/collab-server.ts'
import { freshDatabase } from '#tests/support/database.ts'
import { RawSocket } from '#tests/support/raw-socket.ts'

// The whole truth, written down by hand from the issue: members read drafts and show their presence while the page
// stands; contributors and maintainers write while no review is under way; nobody else sees a draft at all.
const members: readonly PageRole[] = ['reader', 'contributor', 'maintainer']
const writers: readonly PageRole[] = ['contributor', 'maintainer']
const standing: readonly PageState[] = pageStates.filter((state) => state !== 'removed')
const unlocked: readonly PageState[] = ['draft', 'in-force', 'withdrawn']
const published: readonly PageState[] = ['in-force', 'in-force-in-review', 'withdrawn', 'withdrawn-in-review']
const may = {
  'sync-step-1': (role: PageRole, state: PageState) => members.includes(role) && standing.includes(state),
  'sync-step-2': (role: PageRole, state: PageState) => writers.includes(role) && unlocked.includes(state),
  update: (role: PageRole, state: PageState) => writers.includes(role) && unlocked.includes(state),
  awareness: (role: PageRole, state: PageState) => members.includes(role) && standing.includes(state),
}
const combinations = pageRoles.flatMap((role) => pageStates.map((state) => [role, state] as const))

describe('the list of messages', () => {
  test('is what is expected here, so that a new kind without a row fails', () => {
    expect(messageKinds.map(({ kind }) => kind)).toEqual(Object.keys(may))
  })

  test.each(messageKinds.flatMap(({ kind }) => combinations.map(([role, state]) => [kind, role, state] as const)))(
    '%s by %s while %s',
    (kind, role, state) => {
      expect(maySend(kind, { role, state, generation: 1 })).toBe(may[kind](role, state))
    },
  )

  test('a kind that is not in the list is refused', () => {
    const unknown = 'query-awareness' as (typeof messageKinds)[number]['kind']
    expect(maySend(unknown, { role: 'maintainer', state: 'draft', generation: 1 })).toBe(false)
  })

  test('a socket is told why it may not write', () => {
    const told = combinations.filter(([role, state]) => members.includes(role) && standing.includes(state))
    for (const [role, state] of told) {
      const expected = !writers.includes(role) ? 'read-only' : unlocked.includes(state) ? 'live' : 'locked'
      expect(stateByPolicy({ role, state, generation: 1 })).toBe(expected)
    }
    expect(joinRefusal(null)).toBe(closeCodes.noSuchRoom)
  })
})

describe('with real sockets', () => {
  let database: Awaited<ReturnType<typeof freshDatabase>>
  let server: CollabServerForTests
  const tokens = new Map<PageRole, string>()
  let groupId: number
  let watcher: string

  beforeAll(async () => {
    database = await freshDatabase()
    const made = await makePeople(database.db, ['reader', 'contributor', 'maintainer', null, 'maintainer'])
    groupId = made.groupId
    server = await startCollab(database.db, {
      limits: changedLimits((limits) => {
        limits.handshake.perSecond = 10_000
        limits.sockets.perPerson = 1000
      }),
    })
    const [reader, contributor, maintainer, outsider, other] = made.ids.map((id) => server.signIn(id))
    tokens
      .set('reader', reader ?? '')
      .set('contributor', contributor ?? '')
      .set('maintainer', maintainer ?? '')
    tokens.set('visitor', outsider ?? '').set('stranger', outsider ?? '')
    watcher = other ?? ''
  })
  afterAll(async () => {
    await server.close()
    await database.close()
  })

  async function pageIn(role: PageRole, state: PageState): Promise<number> {
    const pageId = await makePage(database.db, groupId)
    const inForceId = state.startsWith('in-force')
      ? await makeRevision(database.db, pageId, { number: 1, state: 'in-force' })
      : null
    const inReviewId = state.endsWith('in-review') ? await makeRevision(database.db, pageId, { number: 2 }) : null
    await database.db
      .update(pages)
      .set({
        access: role === 'visitor' ? 'open' : 'group',
        inForceId,
        everPublic: published.includes(state) ? 1 : 0,
        inReviewId,
        removedAt: state === 'removed' ? new Date() : null,
      })
      .where(eq(pages.id, pageId))
    return pageId
  }

  test.each(combinations)('%s while %s: every message gets exactly what the table says', async (role, state) => {
    const pageId = await pageIn(role, state)
    const url = `${server.url}/${pageId}`
    const raw = await RawSocket.join(url, tokens.get(role) ?? '')
    if (!may['sync-step-1'](role, state)) {
      const readsPage = role === 'visitor' && published.includes(state)
      expect(await raw.closes()).toBe(readsPage ? closeCodes.mayNot : closeCodes.noSuchRoom)
      expect(raw.heard).toEqual([])
      return
    }
    const watching = await RawSocket.join(url, watcher)
    const doc = new Y.Doc()
    raw.sendSync(0, Y.encodeStateVector(doc))
    await until(() => raw.of('step-2').length === 1, 'step 1 is answered')
    for (const { bytes } of raw.of('step-2')) Y.applyUpdate(doc, bytes)
    expect(equationsOf(doc).toString()).toBe(smallDraft.equations)
    // Only who may write is asked for what they have.
    expect(raw.of('step-1').length).toBe(may['sync-step-2'](role, state) ? 1 : 0)

    raw.sendPresence([{ clientId: 77, clock: 1, state: {} }])
    await until(() => watching.of('presence').length > 0, 'presence is passed on')

    equationsOf(doc).insert(0, 'two ')
    raw.sendSync(1, Y.encodeStateAsUpdate(doc))
    const before = Y.encodeStateVector(doc)
    equationsOf(doc).insert(0, 'one ')
    raw.sendSync(2, Y.encodeStateAsUpdate(doc, before))
    // Messages are handled in order: when this is answered, those before it are decided.
    raw.sendSync(0, Y.encodeStateVector(doc))
    await until(() => raw.of('step-2').length === 2, 'the second step 1 is answered')
    if (may.update(role, state)) {
      await until(() => raw.saved === 2, 'both are saved')
      expect((await committed(database.db, pageId)).equations).toBe(`one two ${smallDraft.equations}`)
    } else {
      expect(raw.saved).toBe(0)
      expect((await committed(database.db, pageId)).equations).toBe(smallDraft.equations)
    }
    expect(raw.closed).toBeNull()
    raw.end()
    watching.end()
  })

  test('who is not signed in, or was disabled, is told so and hears nothing', async () => {
    const pageId = await pageIn('visitor', 'in-force')
    for (const token of [null, 'made-up']) {
      const raw = new RawSocket(`${server.url}/${pageId}`, { token })
      expect(await raw.closes()).toBe(closeCodes.notSignedIn)
      expect(raw.heard).toEqual([])
    }
  })

  test('a page that does not exist reads like one that may not be seen', async () => {
    const raw = await RawSocket.join(`${server.url}/99999999`, tokens.get('maintainer') ?? '')
    expect(await raw.closes()).toBe(closeCodes.noSuchRoom)
    expect(raw.closed?.reason).toBe('There is no such page, or you may not see it.')
  })

  test('a reader who writes by hand changes nothing and is closed at the third message', async () => {
    const pageId = await makePage(database.db, groupId)
    const raw = await RawSocket.join(`${server.url}/${pageId}`, tokens.get('reader') ?? '')
    const doc = await raw.synced()
    for (let i = 0; i < 2; i++) {
      equationsOf(doc).insert(0, 'by hand ')
      raw.sendSync(2, Y.encodeStateAsUpdate(doc))
    }
    expect(await raw.closes()).toBe(closeCodes.mayNot)
    expect((await committed(database.db, pageId)).equations).toBe(smallDraft.equations)
  })
})
