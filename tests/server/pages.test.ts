import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { log, pageCodes, pages } from '#drizzle/schema/index.ts'
import { listPages, type PageRow } from '#shared/api/pages.ts'
import { apiRoot, expectProblem, type Tab } from '#tests/support/http.ts'
import { createLibrary, type Library, oscillator, retype, setParameter, setSetting } from '#tests/support/pages.ts'

let lib: Library
beforeAll(async () => {
  lib = await createLibrary()
})
afterAll(() => lib.close())

const groupPages = () => `${apiRoot}/groups/${lib.kiln.slug}/pages`
const pageAt = (code: string) => `${apiRoot}/pages/${code}`
async function search(by: Tab, query = '') {
  const answer = await by.get(`${apiRoot}/pages${query}`)
  expect(answer.status).toBe(200)
  return listPages.response.parse(answer.body)
}
async function rowIn(by: Tab, code: string, query = '?limit=100'): Promise<PageRow | undefined> {
  return (await search(by, query)).pages.find((row) => row.code === code)
}

describe('a new page', () => {
  test('gets the next number of its prefix, two digits at least, and begins with a model that works', async () => {
    const answer = await lib.tabs.cora
      .post(groupPages())
      .send({ prefix: 'KLN', title: ' Kiln  draught ', summary: 'S', field: 'F' })
    expect(answer.status).toBe(201)
    expect(answer.body).toEqual({ code: 'KLN-01' })
    await lib.draftCards.catchUp()
    const head = await lib.head(lib.tabs.rhea, 'KLN-01')
    expect(head).toMatchObject({
      title: 'Kiln  draught',
      summary: 'S',
      field: 'F',
      access: 'group',
      state: 'draft',
      role: 'reader',
      inForce: null,
      lastPublic: null,
      inReview: null,
      counts: { sources: 0, revisions: 0 },
    })
    // The example's damping is 0.4 at rest: fed with more than that it starts to swing, gently.
    expect(head.draft).toMatchObject({ generation: 1, kind: 'soft', differs: true })
    expect(head.draft?.writers.map((one) => one.name)).toEqual(['Cora Vane'])
    const row = await rowIn(lib.tabs.rhea, 'KLN-01')
    expect(row?.card?.onsets).toHaveLength(1)
    expect(row?.card?.onsets[0]?.p).toBeCloseTo(0.4, 9)
    expect(row?.card?.onsets[0]?.omega).toBeCloseTo(2, 9)
  })

  test('begins with the given model document, under the given title', async () => {
    const code = await lib.makePage(lib.tabs.mara, { title: 'Another name', document: oscillator() })
    const draft = await lib.tabs.rhea.get(`${pageAt(code)}/draft`)
    expect(draft.body).toMatchObject({ generation: 1, errors: [] })
    expect(draft.body.document).toEqual(oscillator({ title: 'Another name' }))
  })

  test('is refused with every fault of its document, and takes no number', async () => {
    const before = await lib.db.select().from(pageCodes)
    const document = oscillator({ equations: 'q2 = x^2 + z^2\ndx/dt = mu*x -\ndy/dt = x' })
    const answer = await lib.tabs.cora.post(groupPages()).send({ prefix: 'KLN', title: 'Bad', document })
    const { errors = [] } = expectProblem(answer, 'model-refused')
    expect(errors.map((one) => [one.code, one.line])).toEqual(
      expect.arrayContaining([
        ['unknown-symbol', 1],
        ['syntax', 2],
      ]),
    )
    expect(await lib.db.select().from(pageCodes)).toEqual(before)
  })

  test('cannot take another group’s prefix', async () => {
    const answer = await lib.tabs.cora.post(groupPages()).send({ prefix: 'FRD', title: 'Not ours' })
    expect(expectProblem(answer, 'bad-request').errors?.[0]).toMatchObject({ path: 'prefix' })
  })

  test('is not for readers, outsiders, administrators or strangers', async () => {
    const body = { prefix: 'KLN', title: 'No' }
    expectProblem(await lib.tabs.rhea.post(groupPages()).send(body), 'may-not')
    expectProblem(await lib.tabs.olaf.post(groupPages()).send(body), 'not-found')
    expectProblem(await lib.tabs.ada.post(groupPages()).send(body), 'may-not')
    expectProblem(await lib.tabs.nobody.post(groupPages()).send(body), 'not-signed-in')
  })

  test('is made once for one Idempotency-Key', async () => {
    const ask = () =>
      lib.tabs.cora
        .post(groupPages())
        .set('Idempotency-Key', 'one-page-and-no-more')
        .send({ prefix: 'KLN', title: 'Once' })
    const first = await ask()
    expect((await ask()).body).toEqual(first.body)
  })

  test('never shares a number with one made at the same moment', async () => {
    const answers = await Promise.all(
      Array.from({ length: 8 }, (_, i) =>
        lib.tabs.cora.post(groupPages()).send({ prefix: 'KLN', title: `At once ${i}` }),
      ),
    )
    expect(answers.map((answer) => answer.status)).toEqual(Array(8).fill(201))
    expect(new Set(answers.map((answer) => answer.body.code)).size).toBe(8)
  })

  test('stands in the log with who made it', async () => {
    const code = await lib.makePage()
    const [entry] = await lib.db
      .select()
      .from(log)
      .where(eq(log.target, `page ${code}`))
    expect(entry).toMatchObject({ act: 'page:create', personId: lib.who.cora.id })
  })
})

describe('the title block of a page that never was public', () => {
  test('follows the draft, and the card with it', async () => {
    const code = await lib.makePage()
    await lib.edit(code, lib.who.max.id, (doc) => {
      setSetting('title', '  Rig B  ')(doc)
      setSetting('summary', 'Twice as long')(doc)
      retype(oscillator({ hard: true }).equations)(doc)
    })
    await lib.draftCards.catchUp()
    const head = await lib.head(lib.tabs.rhea, code)
    expect(head).toMatchObject({ title: 'Rig B', summary: 'Twice as long', draft: { kind: 'hard' } })
    expect(head.draft?.writers.map((one) => one.name)).toEqual(['Cora Vane', 'Max Flint'])
  })

  test('keeps its title where the draft has none, and has no card where the draft makes no model', async () => {
    const code = await lib.makePage()
    await lib.draftCards.catchUp()
    expect((await lib.head(lib.tabs.rhea, code)).draft?.kind).toBe('soft')
    await lib.edit(code, lib.who.cora.id, (doc) => {
      setSetting('title', ' ')(doc)
      setParameter('mu', 'low', '1e')(doc)
    })
    await lib.draftCards.catchUp()
    expect(await lib.head(lib.tabs.rhea, code)).toMatchObject({ title: 'Rig A pitch mode', draft: { kind: null } })
    expect((await rowIn(lib.tabs.rhea, code))?.card).toBeNull()
    const draft = await lib.tabs.rhea.get(`${pageAt(code)}/draft`)
    expect(draft.body.document).toBeNull()
    expect(draft.body.errors).toEqual([expect.objectContaining({ path: 'parameters[0].low' })])
  })
})

describe('settings', () => {
  test('open a page only for a maintainer who saw its present state', async () => {
    const code = await lib.makePage()
    const { etag } = await lib.head(lib.tabs.mara, code)
    const patch = (by: Tab, tag: string | null, access = 'open') => {
      const request = by.patch(pageAt(code))
      return (tag === null ? request : request.set('If-Match', `"${tag}"`)).send({ access })
    }
    expectProblem(await patch(lib.tabs.cora, etag), 'may-not')
    expectProblem(await patch(lib.tabs.olaf, etag), 'not-found')
    expectProblem(await patch(lib.tabs.nobody, etag), 'not-signed-in')
    expectProblem(await patch(lib.tabs.mara, null), 'needs-if-match')
    const opened = await patch(lib.tabs.mara, etag)
    expect(opened.status).toBe(200)
    expect(opened.body).toMatchObject({ access: 'open', code })
    expect(opened.headers.etag).toBe(`"${opened.body.etag}"`)
    const stale = expectProblem(await patch(lib.tabs.max, etag, 'signed-in'), 'changed')
    // The tag that a stale request is told is good for the next one.
    expect((await patch(lib.tabs.max, stale.etag ?? '', 'signed-in')).status).toBe(200)
    expect((await lib.rowOf(code)).access).toBe('signed-in')
  })

  test('are not made stale by somebody typing', async () => {
    const code = await lib.makePage()
    const { etag } = await lib.head(lib.tabs.mara, code)
    await lib.edit(code, lib.who.cora.id, setParameter('mu', 'meaning', 'growth'))
    await lib.draftCards.catchUp()
    const now = await lib.head(lib.tabs.mara, code)
    expect(now.etag).not.toBe(etag)
    const answer = await lib.tabs.mara.patch(pageAt(code)).set('If-Match', `"${etag}"`).send({ access: 'open' })
    expect(answer.status).toBe(200)
  })

  test('answer 304 to who has the present head, and the whole to who has not', async () => {
    const code = await lib.makePage()
    const first = await lib.tabs.mara.get(pageAt(code))
    const again = await lib.tabs.mara.get(pageAt(code)).set('If-None-Match', first.headers.etag ?? '')
    expect(again.status).toBe(304)
    expect((await lib.tabs.cora.get(pageAt(code)).set('If-None-Match', first.headers.etag ?? '')).status).toBe(200)
  })
})

describe('removing', () => {
  const remove = async (by: Tab, code: string) =>
    by.delete(pageAt(code)).set('If-Match', `"${(await lib.head(lib.tabs.mara, code)).etag}"`)

  test('hides a page that never had a revision sent; its code stays used', async () => {
    const code = await lib.makePage()
    expectProblem(await remove(lib.tabs.cora, code), 'may-not')
    expect((await remove(lib.tabs.mara, code)).status).toBe(204)
    expectProblem(await lib.tabs.mara.get(pageAt(code)), 'not-found')
    expect(await rowIn(lib.tabs.mara, code)).toBeUndefined()
    expect(await lib.makePage()).not.toBe(code)
    const [kept] = await lib.db.select().from(pages).where(eq(pages.code, code))
    expect(kept?.removedAt).toBeInstanceOf(Date)
  })

  test('is refused once a revision was sent, also where it came back', async () => {
    const code = await lib.makePage()
    const { mark, etag } = await lib.send(lib.tabs.cora, code)
    const back = await lib.tabs.cora
      .post(`${pageAt(code)}/revisions/${mark}/take-back`)
      .set('If-Match', `"${etag}"`)
      .send({})
    expect(back.status).toBe(200)
    expect((await lib.head(lib.tabs.mara, code)).may).not.toContain('page:remove')
    expectProblem(await remove(lib.tabs.mara, code), 'may-not')
  })

  test('is refused where something is public', async () => {
    const code = await lib.publicPage('group')
    expectProblem(await remove(lib.tabs.mara, code), 'may-not')
  })
})

describe('who sees what', () => {
  test('a draft page exists for members only', async () => {
    const code = await lib.makePage()
    const { etag } = await lib.head(lib.tabs.mara, code)
    // Also where it is open: nothing of it is public yet.
    await lib.tabs.mara.patch(pageAt(code)).set('If-Match', `"${etag}"`).send({ access: 'open' })
    for (const path of ['', '/draft', '/revisions', '/sources', '/revisions/1.0.0']) {
      expectProblem(await lib.tabs.olaf.get(pageAt(code) + path), 'not-found')
      expectProblem(await lib.tabs.ada.get(pageAt(code) + path), 'not-found')
      expectProblem(await lib.tabs.nobody.get(pageAt(code) + path), 'not-signed-in')
    }
    expect(await rowIn(lib.tabs.olaf, code)).toBeUndefined()
    expect(await rowIn(lib.tabs.nobody, code)).toBeUndefined()
    expect((await rowIn(lib.tabs.rhea, code))?.state).toBe('draft')
  })

  test.each([
    ['group', false, false],
    ['signed-in', true, false],
    ['open', true, true],
  ] as const)('a page with access %s: signed in %s, signed out %s', async (access, signedIn, signedOut) => {
    const code = await lib.publicPage(access)
    for (const [by, may, refusal] of [
      [lib.tabs.olaf, signedIn, 'not-found'],
      [lib.tabs.ada, signedIn, 'not-found'],
      [lib.tabs.nobody, signedOut, 'not-signed-in'],
    ] as const) {
      const answer = await by.get(pageAt(code))
      if (may) expect(answer.body).toMatchObject({ role: 'visitor', inForce: { mark: '1.0.0' }, draft: null })
      else expectProblem(answer, refusal)
      expect((await rowIn(by, code)) !== undefined).toBe(may)
    }
  })

  test('a code that does not exist reads like one that may not be read', async () => {
    const hidden = await lib.makePage()
    const answers = await Promise.all([hidden, 'KLN-987654'].map((code) => lib.tabs.olaf.get(pageAt(code))))
    const [a, b] = answers.map((answer) => ({ ...expectProblem(answer, 'not-found'), instance: '' }))
    expect(a).toEqual(b)
  })

  test('nothing of a draft or a review reaches a visitor of an open page', async () => {
    const code = await lib.publicPage('open')
    const visitors = [lib.tabs.olaf, lib.tabs.nobody]
    const before = await Promise.all(visitors.map(async (by) => [await lib.head(by, code), await rowIn(by, code)]))
    await lib.edit(code, lib.who.cora.id, (doc) => {
      retype(oscillator({ hard: true }).equations)(doc)
      setSetting('title', 'Secretly hard')(doc)
      setParameter('mu', 'meaning', 'zymurgy factor')(doc)
    })
    await lib.draftCards.catchUp()
    const { mark } = await lib.send(lib.tabs.cora, code, 'Turns hard')
    expect(mark).toBe('2.0.0')
    // Not even that something changed, or when.
    const after = await Promise.all(visitors.map(async (by) => [await lib.head(by, code), await rowIn(by, code)]))
    expect(after).toEqual(before)
    for (const by of visitors) {
      expect((await by.get(pageAt(code))).text).not.toMatch(/Secretly|hard|zymurgy|2\.0\.0|in-review/)
      const list = await by.get(`${pageAt(code)}/revisions`)
      expect(list.body.revisions.map((one: { mark: string }) => one.mark)).toEqual(['1.0.0'])
      expectProblem(await by.get(`${pageAt(code)}/revisions/2.0.0`), 'not-found')
      expectProblem(await by.get(`${pageAt(code)}/revisions/1.0.0?with=2.0.0`), 'not-found')
      expect((await search(by, '?q=zymurgy')).total).toBe(0)
      expect((await search(by, '?q=secretly')).total).toBe(0)
      const facets = await search(by, `?q=${code}`)
      expect(facets.facets.onset).toEqual([{ value: 'soft', label: 'Soft', count: 1 }])
      expect(facets.facets.state).toEqual([{ value: 'in-force', label: 'In force', count: 1 }])
    }
    expect((await lib.tabs.olaf.get(`${pageAt(code)}/draft`)).status).toBe(403)
    expect((await lib.tabs.nobody.get(`${pageAt(code)}/sources`)).status).toBe(401)
    // Members see all of it.
    expect(await lib.head(lib.tabs.rhea, code)).toMatchObject({
      state: 'in-force-in-review',
      title: 'Rig A pitch mode',
      inReview: { mark: '2.0.0', card: { kind: 'hard' } },
      draft: { kind: 'hard', differs: true },
    })
    expect(await rowIn(lib.tabs.rhea, code)).toMatchObject({
      state: 'in-force',
      card: { kind: 'soft' },
      draftKind: 'hard',
    })
    expect((await search(lib.tabs.rhea, '?q=zymurgy')).pages.map((row) => row.code)).toEqual([code])
  })
})

describe('the library', () => {
  let other: Library
  let codes: { soft: string; hard: string; draft: string; ford: string }
  beforeAll(async () => {
    other = await createLibrary()
    const { makePage, publicPage, tabs } = other
    const growth = oscillator().parameters
    codes = {
      soft: await publicPage('open', { title: 'Belt sway', document: oscillator() }),
      hard: await publicPage('open', { title: 'Arch 50% & more', document: oscillator({ hard: true }) }),
      draft: await makePage(tabs.cora, {
        title: 'Valve_chatter',
        document: oscillator({
          equations: oscillator().equations.replaceAll('mu', 'μ'),
          control: 'μ',
          parameters: growth.map((row) => ({ ...row, symbol: 'μ', meaning: 'spring preload' })),
        }),
      }),
      ford: '',
    }
    const made = await tabs.olaf
      .post(`${apiRoot}/groups/${other.ford.slug}/pages`)
      .send({ prefix: 'FRD', title: 'Castor', document: oscillator() })
    codes.ford = made.body.code
    await other.draftCards.catchUp()
  })
  afterAll(() => other.close())

  const found = async (query: string, by: Tab = other.tabs.rhea) =>
    listPages.response.parse((await by.get(`${apiRoot}/pages?${query}`)).body)
  const codesOf = async (query: string, by?: Tab) => (await found(query, by)).pages.map((row) => row.code)

  test('lists the newest change first, or by code or title', async () => {
    expect(await codesOf('')).toEqual([codes.draft, codes.hard, codes.soft])
    expect(await codesOf('sort=code')).toEqual([codes.soft, codes.hard, codes.draft])
    expect(await codesOf('sort=title')).toEqual([codes.hard, codes.soft, codes.draft])
  })

  test('finds by code, title, meaning, and by a symbol however it is spelled', async () => {
    expect(await codesOf('q=kln-01')).toEqual([codes.soft])
    expect(await codesOf('q=SWAY+belt')).toEqual([codes.soft])
    expect(await codesOf('q=preload')).toEqual([codes.draft])
    // Short words are symbols: all three pages have mu, only one spells it with the Greek letter.
    expect(await codesOf('q=mu')).toEqual([codes.draft, codes.hard, codes.soft])
    expect(await codesOf(`q=${encodeURIComponent('μ')}`)).toEqual([codes.draft, codes.hard, codes.soft])
    expect(await codesOf('q=belt+preload')).toEqual([])
    // "ch" stands in Arch and chatter, but is no word or symbol of its own.
    expect(await codesOf('q=ch')).toEqual([])
  })

  test('takes signs that mean something to the database as they are', async () => {
    expect(await codesOf(`q=${encodeURIComponent('50%')}`)).toEqual([codes.hard])
    expect(await codesOf('q=valve_')).toEqual([codes.draft])
    expect(await codesOf('q=v_lve')).toEqual([])
    expect(await codesOf(`q=${encodeURIComponent("' or 1=1 --")}`)).toEqual([])
    expect(await codesOf(`q=${encodeURIComponent('\\')}`)).toEqual([])
  })

  test('counts each facet by what the other facets leave', async () => {
    const all = await found('')
    expect(all.total).toBe(3)
    expect(all.facets).toEqual({
      onset: [
        { value: 'hard', label: 'Hard', count: 1 },
        { value: 'soft', label: 'Soft', count: 2 },
      ],
      state: [
        { value: 'draft', label: 'Draft', count: 1 },
        { value: 'in-force', label: 'In force', count: 2 },
      ],
      group: [{ value: other.kiln.slug, label: 'Kiln Lab', count: 3 }],
    })
    const soft = await found('onset=soft')
    expect(soft.pages.map((row) => row.code)).toEqual([codes.draft, codes.soft])
    expect(soft.total).toBe(2)
    expect(soft.facets.onset.map((one) => one.count)).toEqual([1, 2])
    expect(soft.facets.state.map((one) => one.count)).toEqual([1, 1])
    expect(await codesOf('onset=soft&onset=hard&state=in-force')).toEqual([codes.hard, codes.soft])
    expect(await codesOf('group=ford-shop')).toEqual([])
  })

  test('goes on from a cursor without gaps or repetitions, in every order', async () => {
    for (const sort of ['changed', 'code', 'title']) {
      const whole = await codesOf(`sort=${sort}`)
      const seen: string[] = []
      let cursor = ''
      do {
        const page = await found(`sort=${sort}&limit=1${cursor}`)
        seen.push(...page.pages.map((row) => row.code))
        expect(page.total).toBe(3)
        cursor = page.next === null ? '' : `&cursor=${page.next}`
      } while (cursor !== '')
      expect(seen).toEqual(whole)
    }
  })

  test('refuses a cursor of another list or of nobody’s making', async () => {
    const { next } = await found('sort=title&limit=1')
    for (const cursor of [next, 'abc', 'e30']) {
      expectProblem(await other.tabs.rhea.get(`${apiRoot}/pages?sort=code&cursor=${cursor}`), 'bad-request')
    }
    expectProblem(await other.tabs.rhea.get(`${apiRoot}/pages?sort=size`), 'bad-request')
    expectProblem(await other.tabs.rhea.get(`${apiRoot}/pages?limit=1000`), 'bad-request')
  })

  test('gives each viewer their own: members all of their group, visitors what is public', async () => {
    expect(await codesOf('', other.tabs.nobody)).toEqual([codes.hard, codes.soft])
    expect(await codesOf('', other.tabs.olaf)).toEqual([codes.ford, codes.hard, codes.soft])
    expect((await found('', other.tabs.olaf)).facets.group.map((one) => one.count)).toEqual([1, 2])
    expect(await codesOf('', other.tabs.ada)).toEqual([codes.hard, codes.soft])
  })
})
