import { readFileSync } from 'node:fs'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { z } from 'zod'
import { demonstrationPassword, emailOf, type PersonKey, pages, people } from '#drizzle/seed/demonstration.ts'
import { type Compute, createCompute } from '#server/compute/compute.ts'
import { limits } from '#server/limits.ts'
import * as cardQueries from '#server/queries/cards.ts'
import { findPageByCode } from '#server/queries/pages.ts'
import { verify } from '#server/services/log.ts'
import { prepareLibrary } from '#server/services/prepare-library.ts'
import { listPages, page as pageContract } from '#shared/api/pages.ts'
import { listRevisions, readRevision } from '#shared/api/revisions.ts'
import { listSources } from '#shared/api/sources.ts'
import { type StabilityCard, stabilityCard } from '#shared/model/card-document.ts'
import { createTestApp, type TestApp } from '#tests/support/app.ts'
import { apiRoot, expectProblem, type Tab, tab } from '#tests/support/http.ts'

let t: TestApp
let compute: Compute
const said: string[] = []
beforeAll(async () => {
  t = await createTestApp()
  compute = createCompute(limits.loading)
  const prepared = await prepare()
  expect(prepared.library).toBe('loaded')
})
afterAll(async () => {
  await compute.close()
  await t.close()
})

const prepare = (empty = false) =>
  prepareLibrary(t.db, {
    empty,
    loopback: true,
    now: new Date(),
    say: (line) => void said.push(line),
    startCompute: () => ({ ...compute, close: async () => {} }),
  })

const tabs = new Map<PersonKey, Promise<Tab>>()
/** A tab in which one of the demonstration people is signed in with the password that is told to everybody. */
function as(key: PersonKey): Promise<Tab> {
  const signIn = async () => {
    const agent = tab(t.app)
    const answer = await agent.post(`${apiRoot}/session`).send({ email: emailOf(key), password: demonstrationPassword })
    expect(answer.status).toBe(200)
    return agent
  }
  const known = tabs.get(key) ?? signIn()
  tabs.set(key, known)
  return known
}
const nobody = () => tab(t.app)

const library = async (by: Tab) =>
  listPages.response
    .parse((await by.get(`${apiRoot}/pages?limit=100`)).body)
    .pages.sort((a, b) => a.code.localeCompare(b.code))
const head = async (by: Tab, code: string) => pageContract.parse((await by.get(`${apiRoot}/pages/${code}`)).body)
const revisions = async (by: Tab, code: string) =>
  listRevisions.response.parse((await by.get(`${apiRoot}/pages/${code}/revisions`)).body).revisions
const revision = async (by: Tab, code: string, mark: string) =>
  readRevision.response.parse((await by.get(`${apiRoot}/pages/${code}/revisions/${mark}`)).body).revision

/** A member of the page's group who may read all of it. */
const memberOf = (code: string): PersonKey => (/^(WNG|RUN|ROT|SRG|CUT|SHM)/.test(code) ? 'bram' : 'ines')

const onset = z.object({
  pc: z.number(),
  state: z.array(z.number()),
  omega: z.number(),
  crossing: z.number(),
  cubic: z.number(),
  l1: z.number(),
  verdict: z.string(),
  operating: z.boolean(),
})
// Computed twice independently of this code: exact eigenvalues with 40-digit symbolic derivatives, and the closed forms
// where there is one (the file says so itself).
const reference = z
  .object({ onsets: z.record(z.string(), z.array(onset)) })
  .parse(JSON.parse(readFileSync(new URL('../reference/demonstration-onsets.json', import.meta.url), 'utf8'))).onsets

function expectOnsets(card: StabilityCard, wanted: z.infer<typeof onset>[], name: string): void {
  const found = [...(card.hopf ?? [])].sort((a, b) => a.p - b.p)
  const expected = [...wanted].sort((a, b) => a.pc - b.pc)
  expect(found, name).toHaveLength(expected.length)
  const near = (value: number | null | undefined, goal: number, what: string) => {
    const off = Math.abs((value ?? Number.NaN) - goal)
    expect(off, `${name}: ${what} is ${value}, not ${goal}`).toBeLessThanOrEqual(Math.max(1e-6 * Math.abs(goal), 1e-12))
  }
  for (const [index, goal] of expected.entries()) {
    const point = found[index]
    if (!point) throw new Error(`${name} has no onset ${index}`)
    near(point.p, goal.pc, 'the critical value')
    near(point.omega, goal.omega, 'the frequency')
    near(point.crossing, goal.crossing, 'the crossing rate')
    near(point.cubic, goal.cubic, 'the cubic coefficient')
    near(point.firstLyapunov, goal.l1, 'the first Lyapunov coefficient')
    const state = Object.values(point.state)
    expect(state, name).toHaveLength(goal.state.length)
    for (const [place, value] of goal.state.entries()) near(state[place], value, `state ${place}`)
    expect({ verdict: point.verdict, operating: point.operating }, name).toEqual({
      verdict: goal.verdict,
      operating: goal.operating,
    })
  }
}

/** Which model each revision of a page froze, in order, and which one the draft says now: read off the story. */
function modelsOf(page: (typeof pages)[number]): { sent: string[]; now: string } {
  let now = page.model
  const sent: string[] = []
  for (const event of page.story) {
    if (event.act === 'edit') now = event.model
    if (event.act === 'send') sent.push(now)
  }
  return { sent, now }
}

describe('the demonstration library', () => {
  test('every model of the reference has a card whose onsets agree within a millionth', async () => {
    const seen = new Set<string>()
    for (const page of pages) {
      const { sent, now } = modelsOf(page)
      const by = await as(memberOf(page.code))
      for (const { mark } of await revisions(by, page.code)) {
        const { stabilityCard: card, document } = await revision(by, page.code, mark)
        const place = [...(await revisions(by, page.code))].reverse().findIndex((one) => one.mark === mark)
        const model = sent[place]
        if (!model || !card) throw new Error(`${page.code} ${mark} has no card`)
        expect(document).toMatchObject({ format: 'brinkbook-model', control: card.control })
        expectOnsets(card, reference[model] ?? [], `${page.code} ${mark} (${model})`)
        seen.add(model)
      }
      const row = await findPageByCode(t.db, page.code)
      const draft = stabilityCard.parse(await cardQueries.findCard(t.db, row?.draftCardId ?? 0))
      expectOnsets(draft, reference[now] ?? [], `draft of ${page.code} (${now})`)
      seen.add(now)
    }
    expect([...seen].sort()).toEqual(Object.keys(reference).sort())
  })

  test('a superseded revision was soft and the one in force is hard: its mark rose by a whole number', async () => {
    const list = await revisions(await as('bram'), 'WNG-01')
    expect(list.map(({ mark, state, card, base }) => ({ mark, state, kind: card?.kind, base }))).toEqual([
      { mark: '2.0.0', state: 'in-force', kind: 'hard', base: '1.0.0' },
      { mark: '1.0.0', state: 'superseded', kind: 'soft', base: null },
    ])
    expect(list[0]?.signatures.map(({ person, meaning }) => `${meaning} ${person.name}`)).toEqual([
      'written Juno Skarlett-Pym',
      'checked Bram Quillfeather',
      'approved Bram Quillfeather',
    ])
    expect((await head(await as('bram'), 'WNG-01')).inForce?.mark).toBe('2.0.0')
  })

  test('a review is in progress: the draft is locked and its verdict differs from the one in force', async () => {
    const page = await head(await as('ines'), 'RCT-02')
    expect(page).toMatchObject({
      state: 'in-force-in-review',
      inForce: { mark: '1.0.0', card: { kind: 'soft' } },
      inReview: { mark: '2.0.0', card: { kind: 'hard' }, sentBy: { name: 'Anselm Dreycott' } },
    })
    expect(page.may).toContain('revision:approve')
    expect((await head(await as('anselm'), 'RCT-02')).may).not.toContain('revision:approve')
  })

  test('a returned revision has its remark on the parameter, and the draft is open again', async () => {
    const by = await as('kezia')
    const [returned] = await revisions(by, 'NEU-03')
    expect(returned).toMatchObject({ mark: '1.0.0', state: 'returned' })
    expect((await revision(by, 'NEU-03', '1.0.0')).remarks).toMatchObject([
      { symbol: 'te', author: { name: 'Ines Hathersedge-Vold' } },
    ])
    expect((await head(by, 'NEU-03')).may).toContain('draft:write')
  })

  test('first revisions bear the mark 1.0.0 and were approved by somebody who did not write in them', async () => {
    for (const page of pages) {
      const list = await revisions(await as(memberOf(page.code)), page.code)
      expect(list).toHaveLength(modelsOf(page).sent.length)
      if (list.length > 0) expect(list.at(-1)?.mark).toBe('1.0.0')
      for (const { signatures } of list) {
        const by = (meaning: string) =>
          signatures.filter((one) => one.meaning === meaning).map(({ person }) => person.id)
        expect(by('written').length).toBeGreaterThan(0)
        expect(by('approved').some((id) => by('written').includes(id))).toBe(false)
      }
    }
  })

  test('sources stand where the story puts them, and only with revisions sent after they came', async () => {
    const by = await as('tove')
    const { sources } = listSources.response.parse((await by.get(`${apiRoot}/pages/WNG-01/sources`)).body)
    expect(sources.map((source) => source.title)).toEqual([
      'Ground vibration test of the Gullfoil section',
      'Static pull on the worn pitch bearing',
    ])
    expect(sources[0]?.links.map(({ target, label, locator, quoted }) => ({ target, label, locator, quoted }))).toEqual(
      [
        { target: { kind: 'page' }, label: null, locator: null, quoted: null },
        { target: { kind: 'parameter', symbol: 'ka' }, label: 'table', locator: '3', quoted: '14.0' },
      ],
    )
    expect((await revision(by, 'WNG-01', '1.0.0')).sources.map(({ title }) => title)).toEqual([sources[0]?.title])
    expect((await revision(by, 'WNG-01', '2.0.0')).sources).toHaveLength(2)
  })

  test('nobody signed in sees the open pages only, each with what is in force', async () => {
    const rows = await library(nobody())
    expect(rows.map(({ code, state, mark, card, draftKind }) => [code, state, mark, card?.kind, draftKind])).toEqual([
      ['ECO-02', 'in-force', '1.0.0', 'soft', null],
      ['GRD-07', 'in-force', '1.0.0', 'hard', null],
      ['ROT-01', 'in-force', '1.0.0', 'hard', null],
    ])
    expect((await head(nobody(), 'ECO-02')).draft).toBeNull()
    for (const code of ['WNG-01', 'RCT-02', 'CUT-06', 'XYZ-99']) {
      expectProblem(await nobody().get(`${apiRoot}/pages/${code}`), 'not-signed-in')
    }
  })

  test('somebody of other groups also sees pages for signed-in people, members see the drafts of their groups', async () => {
    const kezia = (await library(await as('kezia'))).map((row) => row.code)
    expect(kezia).toEqual(['BRE-01', 'CMB-05', 'ECO-02', 'GRD-07', 'NEU-03', 'RCT-02', 'ROT-01', 'SHM-02', 'WNG-01'])
    expect(await head(await as('kezia'), 'WNG-01')).toMatchObject({ role: 'visitor', draft: null, inForce: {} })
    expectProblem(await (await as('kezia')).get(`${apiRoot}/pages/RUN-03`), 'not-found')
    expect((await library(await as('juno'))).find((row) => row.code === 'SRG-04')).toMatchObject({
      state: 'draft',
      mark: null,
      card: { kind: 'soft' },
    })
    // An administrator carries no right to read a page.
    expect((await library(await as('orla'))).map((row) => row.code)).toEqual([
      'CMB-05',
      'ECO-02',
      'GRD-07',
      'ROT-01',
      'SHM-02',
      'WNG-01',
    ])
  })

  test('the sign-in page can name every account', async () => {
    const { demonstration } = (await nobody().get(`${apiRoot}/session`)).body
    expect(demonstration.password).toBe(demonstrationPassword)
    expect(demonstration.people).toHaveLength(people.length)
    for (const { key } of people) await as(key)
  })

  test('everything is in the log, in the order of time, and its chain is whole', async () => {
    const checked = await verify(t.db)
    expect(checked.ok).toBe(true)
    const [rows] = await t.db.$client
      .promise()
      .query('SELECT at FROM log WHERE request_id = ? ORDER BY id', ['demonstration'])
    const times = z
      .array(z.object({ at: z.date() }))
      .parse(rows)
      .map((row) => row.at.getTime())
    expect(times.length).toBeGreaterThan(100)
    expect(times).toEqual([...times].sort((a, b) => a - b))
  })

  test('numbers between codes stay free, and the next page takes the next one', async () => {
    const by = await as('tove')
    const answer = await by.post(`${apiRoot}/groups/fellside-rail/pages`).send({ prefix: 'RUN', title: 'Another unit' })
    expect(answer.body).toEqual({ code: 'RUN-04' })
  })

  test('told one line a page, and a second start changes nothing', async () => {
    for (const { code } of pages) expect(said.filter((line) => line.startsWith(`${code} `))).toHaveLength(1)
    const before = await verify(t.db)
    said.length = 0
    const again = await prepare()
    expect(again).toMatchObject({ library: 'used', setupPath: null })
    expect(again.demonstration?.people).toHaveLength(people.length)
    expect(said).toEqual([])
    expect(await verify(t.db)).toEqual(before)
    expect((await prepare(true)).library).toBe('used')
  })
})
