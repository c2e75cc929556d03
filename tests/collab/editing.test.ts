import { afterAll, afterEach, beforeAll, describe, expect, test } from 'vitest'
import { equationsOf, parameterRows, parametersOf, settingsOf } from '#shared/ydoc/shape.ts'
import type { DraftConnection } from '#src/features/editor/draft-connection.ts'
import { committed, makePage, makePeople, smallDraft } from '#tests/support/collab-pages.ts'
import { type CollabServerForTests, openDraft, saved, startCollab, until } from '#tests/support/collab-server.ts'
import { freshDatabase } from '#tests/support/database.ts'

let database: Awaited<ReturnType<typeof freshDatabase>>
let server: CollabServerForTests
let groupId: number
let tokens: string[]
const opened: DraftConnection[] = []

beforeAll(async () => {
  database = await freshDatabase()
  const made = await makePeople(database.db, ['contributor', 'maintainer', 'reader'])
  groupId = made.groupId
  server = await startCollab(database.db)
  tokens = made.ids.map((id) => server.signIn(id))
})
afterEach(() => {
  for (const connection of opened.splice(0)) connection.close()
  expect(server.errors).toEqual([])
})
afterAll(async () => {
  await server.close()
  await database.close()
})

function open(pageId: number, person = 0): DraftConnection {
  const connection = openDraft(server.url, pageId, tokens[person] ?? '')
  opened.push(connection)
  return connection
}

describe('two people in one draft', () => {
  test('see the draft, and each other’s edits, and find them saved in the database', async () => {
    const pageId = await makePage(database.db, groupId)
    const [left, right] = [open(pageId), open(pageId, 1)]
    await Promise.all([saved(left), saved(right)])
    expect(equationsOf(left.doc).toString()).toBe(smallDraft.equations)
    expect(left.getState()).toMatchObject({ room: 'live', generation: 1, unsaved: 0, closed: null })

    equationsOf(left.doc).insert(0, '# left\n')
    expect(left.getState()).toMatchObject({ phase: 'saving', unsaved: 1 })
    settingsOf(right.doc).set('title', 'Renamed')
    parametersOf(right.doc).get('p1')?.set('value', '1e')
    await Promise.all([saved(left), saved(right)])
    await until(() => settingsOf(left.doc).get('title') === 'Renamed', 'the title arrives')
    await until(() => equationsOf(right.doc).toString().startsWith('# left'), 'the line arrives')
    expect(parameterRows(left.doc)[0]?.value).toBe('1e')
    const draft = await committed(database.db, pageId)
    expect(draft.equations).toBe(`# left\n${smallDraft.equations}`)
    expect(draft.settings.title).toBe('Renamed')
  })

  test('each see the other’s presence under the name of the session', async () => {
    const pageId = await makePage(database.db, groupId)
    const [left, right] = [open(pageId), open(pageId, 1)]
    left.awareness.setLocalStateField('cursor', { anchor: 1 })
    const others = () => [...right.awareness.getStates()].filter(([id]) => id !== right.doc.clientID)
    await until(() => others().length === 1, 'presence arrives')
    await until(() => others().some(([, state]) => state.cursor !== undefined), 'the caret arrives')
    expect(others()[0]?.[1]).toMatchObject({ user: { name: 'Person 0', role: 'contributor' }, cursor: { anchor: 1 } })
    left.close()
    await until(() => others().length === 0, 'presence leaves')
  })
})
