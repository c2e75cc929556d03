import { eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { sourceLinks, sources } from '#drizzle/schema/index.ts'
import { readRevision } from '#shared/api/revisions.ts'
import { addSources, type FormattedSource, listSources } from '#shared/api/sources.ts'
import { modelDocument } from '#shared/model/document.ts'
import { equationsOf } from '#shared/ydoc/shape.ts'
import { apiRoot, expectProblem, type Tab } from '#tests/support/http.ts'
import { createLibrary, type Library, oscillator, replaceText } from '#tests/support/pages.ts'

let lib: Library
beforeAll(async () => {
  lib = await createLibrary()
})
afterAll(() => lib.close())

const at = (code: string, rest = '') => `${apiRoot}/pages/${code}/sources${rest}`
const paste = (code: string, pasted: string, by: Tab = lib.tabs.cora) =>
  by.post(at(code)).send({ from: 'pasted', pasted })
async function pasted(code: string, text: string): Promise<FormattedSource[]> {
  const answer = await paste(code, text)
  expect(answer.status).toBe(201)
  return addSources.response.parse(answer.body).sources
}
async function list(code: string, by: Tab = lib.tabs.rhea): Promise<FormattedSource[]> {
  return listSources.response.parse((await by.get(at(code))).body).sources
}
const link = (code: string, source: number, body: object) => lib.tabs.cora.post(at(code, `/${source}/links`)).send(body)

// Invented sources.
const article = `@article{quill2019,
  author = {Quill, Anna B. and Tarn, {\\"O}rjan}, title = {Sway of a loaded belt}, journal = {Rig Letters},
  year = 2019, volume = 7, pages = {130--141}, doi = {https://doi.org/10.1234/RIG.Belt-19}, url = {javascript:alert(1)}
}`
const book =
  '@book{moor, author = {Moor, Ellis}, title = {Belts and their edges}, publisher = {Fen Press}, year = 1988}'

describe('pasted sources', () => {
  test('in BibTeX are read, formatted as text and attached to the page', async () => {
    const code = await lib.makePage()
    const found = await pasted(code, `${article}\n\n${book}`)
    expect(found.map(({ key, title, year, doi, url }) => ({ key, title, year, doi, url }))).toEqual([
      { key: 'quill2019', title: 'Sway of a loaded belt', year: '2019', doi: '10.1234/rig.belt-19', url: null },
      { key: 'moor', title: 'Belts and their edges', year: '1988', doi: null, url: null },
    ])
    // American Psychological Association style, 7th edition (its rules from memory): names, year, title, journal, volume, pages, DOI.
    expect(found[0]?.formatted).toBe(
      'Quill, A. B., & Tarn, Ö. (2019). Sway of a loaded belt. Rig Letters, 7, 130–141. https://doi.org/10.1234/rig.belt-19',
    )
    expect(found[1]?.formatted).toBe('Moor, E. (1988). Belts and their edges. Fen Press.')
    expect(found.map((one) => one.links.map((each) => each.target))).toEqual([[{ kind: 'page' }], [{ kind: 'page' }]])
    expect(JSON.stringify(found)).not.toContain('javascript')
    expect(await list(code)).toEqual(found)
    expect((await lib.head(lib.tabs.rhea, code)).counts.sources).toBe(2)
  })

  test('in CSL-JSON are read; what CSL does not name is left out', async () => {
    const code = await lib.makePage()
    const items = [
      {
        id: 'Fen & Co 1990',
        type: 'report',
        title: 'Line\none  <i>two</i>',
        author: [{ family: 'Fen' }, { literal: 'The Rig Group' }],
        issued: { 'date-parts': [['1990']] },
        URL: 'https://rigs.example/a',
        abstract: 'Long',
        _graph: [{}],
        note: 'mine',
      },
    ]
    const [source] = await pasted(code, JSON.stringify(items))
    expect(source?.csl).toEqual({
      type: 'report',
      title: 'Line one <i>two</i>',
      author: [{ family: 'Fen' }, { literal: 'The Rig Group' }],
      issued: { 'date-parts': [[1990]] },
      URL: 'https://rigs.example/a',
    })
    expect(source?.key).toBe('fen1990')
    expect(source?.url).toBe('https://rigs.example/a')
    expect(source?.formatted).toBe('Fen & The Rig Group. (1990). Line one two. https://rigs.example/a')
  })

  test.each([
    ['half a BibTeX entry', '@article{a,\n  title = {Open', 'line 2'],
    ['text that is neither', 'Quill 2019, Sway of a loaded belt', 'No source was found'],
    ['an address', 'https://doi.org/10.1234/abc', 'No source was found'],
    ['broken JSON', '[{"title": "a",]', 'no JSON'],
    ['JSON of something else', '[1, 2]', 'one object for each source'],
    ['an entry without a title', '@book{a, author = {Moor}}', 'has no title'],
    ['a list with one bad item', '[{"title":"a"},{"type":"book"}]', 'Source 2 has no title'],
    ['a DOI that is none', '@book{a, title = {A}, doi = {eleven}}', 'DOI'],
    ['nothing at all', '[]', 'No source was found'],
  ])('refuse %s in words', async (_name, text, words) => {
    const code = await lib.makePage()
    expect(expectProblem(await paste(code, text), 'source-refused').detail).toContain(words)
    expect(await list(code)).toEqual([])
  })

  test('of more than 64 KiB are refused', async () => {
    expectProblem(await paste(await lib.makePage(), `@book{a, title = {${'x'.repeat(70_000)}}}`), 'bad-request')
  })

  test('with hostile text stay text', async () => {
    const code = await lib.makePage()
    const title = `<img src=x onerror=alert(1)> "'\\ \${7*7} \u202e __proto__`
    const [source] = await pasted(
      code,
      JSON.stringify({ title, type: '__proto__', __proto__: { x: 1 }, constructor: 1 }),
    )
    expect(source?.title).toBe(title)
    expect(source?.csl).toEqual({ title, type: 'document' })
  })
})

describe('a typed source', () => {
  test('is stored like a pasted one', async () => {
    const code = await lib.makePage()
    const answer = await lib.tabs.cora.post(at(code)).send({
      from: 'form',
      type: 'article-journal',
      title: 'Ramp tests',
      authors: [{ family: 'Quill', given: 'Anna' }],
      year: '2021',
      container: 'Rig Letters',
      doi: '10.1234/RAMP',
      url: 'https://rigs.example/ramp',
    })
    expect(answer.status).toBe(201)
    const [source] = addSources.response.parse(answer.body).sources
    expect(source).toMatchObject({
      key: 'quill2021',
      doi: '10.1234/ramp',
      url: 'https://rigs.example/ramp',
      year: '2021',
    })
  })

  test.each([
    [{ title: '' }, 'title'],
    [{ doi: 'eleven' }, 'doi'],
    [{ url: 'javascript:alert(1)' }, 'url'],
    [{ year: 'soon' }, 'year'],
    [{ colour: 'red' }, ''],
  ])('is refused with %o', async (wrong, path) => {
    const code = await lib.makePage()
    const body = { from: 'form', type: 'book', title: 'A', authors: [], ...wrong }
    const { errors } = expectProblem(await lib.tabs.cora.post(at(code)).send(body), 'bad-request')
    expect(errors?.some((one) => one.path === path)).toBe(true)
  })
})

describe('one source of a group', () => {
  test('is one by its DOI, whatever its case and name, on every page', async () => {
    const first = await lib.makePage()
    const second = await lib.makePage()
    const doi = (text: string, key: string) => `@article{${key}, title = {One}, doi = {${text}}}`
    const [a] = await pasted(first, doi('10.5555/ONE', 'one'))
    const [b] = await pasted(second, doi('10.5555/one', 'another'))
    expect(b?.id).toBe(a?.id)
    expect(b?.key).toBe('one')
    // Twice on one page is once.
    expect(await pasted(first, doi('10.5555/OnE', 'third'))).toHaveLength(1)
    const rows = await lib.db.select().from(sources).where(eq(sources.doi, '10.5555/one'))
    expect(rows).toHaveLength(1)
  })

  test('is made once where several add it at the same moment', async () => {
    const codes = await Promise.all([lib.makePage(), lib.makePage(), lib.makePage(), lib.makePage()])
    const text = '@article{race, title = {Race}, doi = {10.5555/race}}'
    const answers = await Promise.all(codes.map((code) => paste(code, text)))
    expect(answers.map((answer) => answer.status)).toEqual([201, 201, 201, 201])
    expect(await lib.db.select().from(sources).where(eq(sources.doi, '10.5555/race'))).toHaveLength(1)
  })

  test('keeps its key; another source of that name gets a number', async () => {
    const code = await lib.makePage()
    const named = (title: string) => `@book{same, title = {${title}}}`
    await pasted(code, named('First'))
    await pasted(code, named('Second'))
    const found = await pasted(code, named('First'))
    expect(found.map((one) => [one.key, one.title])).toEqual([
      ['same', 'First'],
      ['same-2', 'Second'],
    ])
  })

  test('is another one in another group', async () => {
    const made = await lib.tabs.olaf
      .post(`${apiRoot}/groups/${lib.ford.slug}/pages`)
      .send({ prefix: 'FRD', title: 'Castor' })
    const [ours] = await pasted(await lib.makePage(), '@article{x, title = {One}, doi = {10.5555/groups}}')
    const answer = await paste(made.body.code, '@article{x, title = {Two}, doi = {10.5555/groups}}', lib.tabs.olaf)
    expect(answer.body.sources[0].id).not.toBe(ours?.id)
    expect(answer.body.sources[0].title).toBe('Two')
  })
})

describe('links', () => {
  test('say which parameter or line takes what from where', async () => {
    const code = await lib.makePage()
    const [source] = await pasted(code, book)
    const id = source?.id ?? 0
    const parameter = { target: { kind: 'parameter', symbol: 'μ' }, label: 'table', locator: '3', quoted: '0.42' }
    expect((await link(code, id, parameter)).status).toBe(201)
    const answer = await link(code, id, { target: { kind: 'line', line: 2 }, label: 'equation', locator: '5.31' })
    const [linked] = addSources.response.parse(answer.body).sources
    expect(linked?.links).toEqual([
      expect.objectContaining({ target: { kind: 'page' }, label: null }),
      expect.objectContaining({
        target: { kind: 'parameter', symbol: 'μ' },
        label: 'table',
        locator: '3',
        quoted: '0.42',
      }),
      expect.objectContaining({
        target: { kind: 'line', line: 2, anchor: expect.any(String) },
        label: 'equation',
        locator: '5.31',
        quoted: null,
      }),
    ])
  })

  test('of lines follow their line while others type above it', async () => {
    const code = await lib.makePage()
    const [source] = await pasted(code, book)
    await link(code, source?.id ?? 0, { target: { kind: 'line', line: 2 } })
    const lineOf = async () => (await list(code))[0]?.links.find((one) => one.target.kind === 'line')?.target
    expect(await lineOf()).toMatchObject({ line: 2 })
    await lib.edit(code, lib.who.cora.id, (doc) => equationsOf(doc).insert(0, '# one\n# two\n'))
    expect(await lineOf()).toMatchObject({ line: 4 })
    await lib.edit(code, lib.who.cora.id, replaceText('# one\n', ''))
    expect(await lineOf()).toMatchObject({ line: 3 })
    // The editor may send the anchor it made itself.
    const anchor = (await list(code))[0]?.links.flatMap((one) =>
      one.target.kind === 'line' ? one.target.anchor : [],
    )[0]
    const answer = await link(code, source?.id ?? 0, { target: { kind: 'line', line: 1, anchor } })
    expect(answer.body.sources[0].links.at(-1).target.line).toBe(3)
  })

  test('are refused where there is no such thing', async () => {
    const code = await lib.makePage()
    const other = await lib.makePage()
    const [source] = await pasted(code, book)
    const id = source?.id ?? 0
    const refused = async (body: object, path: string) =>
      expect(expectProblem(await link(code, id, body), 'bad-request').errors?.[0]?.path).toBe(path)
    await refused({ target: { kind: 'parameter', symbol: 'nu' } }, 'target.symbol')
    await refused({ target: { kind: 'line', line: 99 } }, 'target.line')
    await refused({ target: { kind: 'line', line: 99, anchor: 'AAAA' } }, 'target.line')
    expectProblem(await link(other, id, { target: { kind: 'page' } }), 'not-found')
    expectProblem(await link(code, 999_999, { target: { kind: 'page' } }), 'not-found')
  })

  test('and sources are taken off without being forgotten', async () => {
    const code = await lib.makePage()
    const [source] = await pasted(code, book)
    const id = source?.id ?? 0
    const linked = await link(code, id, { target: { kind: 'line', line: 2 } })
    const linkId = linked.body.sources[0].links[1].id
    const unlink = (which: number) => lib.tabs.cora.delete(`${apiRoot}/pages/${code}/source-links/${which}`)
    expect((await unlink(linkId)).status).toBe(204)
    expectProblem(await unlink(linkId), 'not-found')
    expect((await list(code))[0]?.links).toHaveLength(1)
    expect((await lib.tabs.cora.delete(at(code, `/${id}`))).status).toBe(204)
    expectProblem(await lib.tabs.cora.delete(at(code, `/${id}`)), 'not-found')
    expect(await list(code)).toEqual([])
    const page = await lib.rowOf(code)
    const kept = await lib.db.select().from(sourceLinks).where(eq(sourceLinks.pageId, page.id))
    expect(kept.map((row) => row.removedAt !== null)).toEqual([true, true])
    // Attached again, it stands there as before.
    expect(await pasted(code, book)).toHaveLength(1)
  })
})

describe('a revision', () => {
  test('freezes its sources with where they are cited', async () => {
    const code = await lib.makePage()
    const [quill] = await pasted(code, article)
    const [, moor] = await pasted(code, book)
    await link(code, quill?.id ?? 0, {
      target: { kind: 'parameter', symbol: 'mu' },
      label: 'table',
      locator: '3',
      quoted: '-0.5',
    })
    await link(code, quill?.id ?? 0, { target: { kind: 'line', line: 2 }, label: 'equation', locator: '5.31' })
    await link(code, moor?.id ?? 0, { target: { kind: 'page' }, label: 'chapter', locator: '4' })
    await lib.edit(code, lib.who.cora.id, (doc) => equationsOf(doc).insert(0, '# belt\n'))
    const sent = await lib.send(lib.tabs.cora, code)
    await lib.approve(lib.tabs.mara, code, sent)
    const read = async () =>
      readRevision.response.parse((await lib.tabs.rhea.get(`${apiRoot}/pages/${code}/revisions/1.0.0`)).body)
    const { revision } = await read()
    const document = modelDocument.parse(revision.document)
    expect(document.citations?.map((item) => item.id)).toEqual(['quill2019', 'moor'])
    expect(document.parameters[0]?.citations).toEqual([
      { id: 'quill2019', label: 'table', locator: '3', quoted: '-0.5' },
    ])
    expect(document.lineCitations).toEqual([{ line: 3, id: 'quill2019', label: 'equation', locator: '5.31' }])
    expect(revision.sources.map((one) => [one.key, one.formatted])).toEqual([
      ['quill2019', expect.stringContaining('Sway of a loaded belt')],
      ['moor', 'Moor, E. (1988). Belts and their edges. Fen Press.'],
    ])
    expect(
      revision.sources.map((one) => one.links.map(({ target, label, locator }) => [target, label, locator])),
    ).toEqual([
      [
        [{ kind: 'parameter', symbol: 'mu' }, 'table', '3'],
        [{ kind: 'line', line: 3 }, 'equation', '5.31'],
      ],
      [[{ kind: 'page' }, 'chapter', '4']],
    ])
    // In the next generation the line is anchored anew; what is frozen does not move with it.
    await lib.edit(code, lib.who.cora.id, (doc) => equationsOf(doc).insert(0, '# later\n'))
    const lines = (await list(code)).flatMap((one) =>
      one.links.flatMap(({ target }) => (target.kind === 'line' ? target.line : [])),
    )
    expect(lines).toEqual([4])
    await lib.tabs.cora.delete(at(code, `/${quill?.id}`))
    expect((await read()).revision.sources).toEqual(revision.sources)
    expect((await lib.head(lib.tabs.rhea, code)).draft?.differs).toBe(true)
  })

  test('in review keeps the draft’s sources as they are', async () => {
    const code = await lib.makePage()
    const [source] = await pasted(code, book)
    await lib.send(lib.tabs.cora, code)
    expectProblem(await paste(code, article), 'may-not')
    expectProblem(await lib.tabs.cora.delete(at(code, `/${source?.id}`)), 'may-not')
    expectProblem(await link(code, source?.id ?? 0, { target: { kind: 'page' } }), 'may-not')
  })
})

describe('a model document that is brought in', () => {
  test('brings its sources and where it cites them', async () => {
    const document = oscillator({
      citations: [
        { id: 'a b', type: 'book', title: 'Brought in', DOI: '10.5555/BROUGHT' },
        { id: 'unused', type: 'book', title: 'Read only' },
      ],
      parameters: [
        { symbol: 'mu', value: -0.5, low: -1, high: 1, citations: ['a b', { id: 'a b', label: 'verse', quoted: '1' }] },
      ],
      lineCitations: [{ line: 3, id: 'a b', label: 'equation', locator: '2' }],
    })
    const code = await lib.makePage(lib.tabs.cora, { document })
    const found = await list(code)
    expect(found.map((one) => [one.key, one.links.map(({ target, label }) => [target.kind, label])])).toEqual([
      [
        'brought',
        [
          ['parameter', null],
          ['parameter', null],
          ['line', 'equation'],
        ],
      ],
      ['unused', [['page', null]]],
    ])
    await lib.edit(code, lib.who.cora.id, (doc) => equationsOf(doc).insert(0, '\n'))
    expect((await list(code))[0]?.links[2]?.target).toMatchObject({ kind: 'line', line: 4 })
  })

  test('is refused where a source of it has no title', async () => {
    const answer = await lib.tabs.cora
      .post(`${apiRoot}/groups/${lib.kiln.slug}/pages`)
      .send({ prefix: 'KLN', title: 'No', document: oscillator({ citations: [{ id: 'x' }] }) })
    expect(expectProblem(answer, 'source-refused').detail).toContain('no title')
  })
})

test('sources are for members to see and for writers to change', async () => {
  const code = await lib.publicPage('open')
  expectProblem(await lib.tabs.olaf.get(at(code)), 'may-not')
  expectProblem(await lib.tabs.nobody.get(at(code)), 'not-signed-in')
  expectProblem(await paste(code, book, lib.tabs.rhea), 'may-not')
  expectProblem(await paste(code, book, lib.tabs.olaf), 'may-not')
  expectProblem(await paste(code, book, lib.tabs.nobody), 'not-signed-in')
})

test('a page is found by the sources on it', async () => {
  const code = await lib.makePage()
  await pasted(code, '@book{z, title = {Zephyrs}, author = {Umber, Ida}}')
  await lib.draftCards.catchUp()
  const search = async (by: Tab, q: string) =>
    (await by.get(`${apiRoot}/pages?q=${q}`)).body.pages.map((one: { code: string }) => one.code)
  expect(await search(lib.tabs.rhea, 'zephyrs')).toEqual([code])
  expect(await search(lib.tabs.rhea, 'umber')).toEqual([code])
  expect(await search(lib.tabs.olaf, 'zephyrs')).toEqual([])
})
