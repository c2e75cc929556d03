import { and, eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { loadDocument } from '#collab/persistence.ts'
import { log } from '#drizzle/schema/index.ts'
import { readDraft as draftContract } from '#shared/api/drafts.ts'
import { equationsOf, readDraft } from '#shared/ydoc/shape.ts'
import { apiRoot, expectProblem } from '#tests/support/http.ts'
import { createLibrary, type Library, replaceText, setParameter } from '#tests/support/pages.ts'

let lib: Library
beforeAll(async () => {
  lib = await createLibrary()
})
afterAll(() => lib.close())

const renew = (by: 'mara' | 'cora', code: string, generation: number) =>
  lib.tabs[by].post(`${apiRoot}/pages/${code}/draft/generations`).send({ generation })
const targetsOf = async (code: string) =>
  draftContract.response.parse((await lib.tabs.rhea.get(`${apiRoot}/pages/${code}/draft`)).body).targets
async function addSource(code: string): Promise<number> {
  const answer = await lib.tabs.cora
    .post(`${apiRoot}/pages/${code}/sources`)
    .send({ from: 'form', type: 'report', title: 'Runs of the rig', authors: [] })
  return answer.body.sources.at(-1).id
}
const linkTo = (code: string, source: number, target: object) =>
  lib.tabs.cora.post(`${apiRoot}/pages/${code}/sources/${source}/links`).send({ target })

describe('a draft begun anew', () => {
  test('says the same without the steps that led there, links of lines included', async () => {
    const code = await lib.makePage()
    for (const letter of 'abcdef') await lib.edit(code, lib.who.max.id, setParameter('mu', 'meaning', letter))
    const source = await addSource(code)
    expect((await linkTo(code, source, { kind: 'line', line: 3 })).status).toBe(201)
    const { id } = await lib.rowOf(code)
    const before = readDraft(await loadDocument(lib.db, id, 1))

    const answer = await renew('mara', code, 1)
    expect(answer.status).toBe(201)
    expect(answer.body).toEqual({ generation: 2 })
    expect(readDraft(await loadDocument(lib.db, id, 2))).toEqual(before)
    // Above the line something is put in: the link follows it in the new generation too.
    await lib.edit(code, lib.who.cora.id, (doc) => equationsOf(doc).insert(0, '# turning pair\n'))
    const listed = await lib.tabs.cora.get(`${apiRoot}/pages/${code}/sources`)
    expect(listed.body.sources[0].links.map((one: { target: object }) => one.target)).toContainEqual(
      expect.objectContaining({ kind: 'line', line: 4 }),
    )
    const entries = await lib.db
      .select()
      .from(log)
      .where(and(eq(log.act, 'draft:renew'), eq(log.target, `page ${code}`)))
    expect(entries.map((entry) => entry.personId)).toEqual([lib.who.mara.id])
  })

  test('keeps its writers: who wrote before does not come to approve their own text', async () => {
    const code = await lib.makePage()
    await lib.edit(code, lib.who.max.id, setParameter('mu', 'meaning', 'growth'))
    await renew('mara', code, 1)
    const head = await lib.head(lib.tabs.cora, code)
    expect(head.draft?.writers.map((one) => one.name)).toEqual(['Cora Vane', 'Max Flint'])
    const sent = await lib.send(lib.tabs.cora, code)
    expectProblem(await lib.tryApprove(lib.tabs.max, code, sent), 'may-not')
    expect((await lib.tryApprove(lib.tabs.mara, code, sent)).status).toBe(200)
  })

  test('is refused for another generation than the one seen, and of two at once one comes first', async () => {
    const code = await lib.makePage()
    expectProblem(await renew('mara', code, 7), 'changed')
    const both = await Promise.all([renew('mara', code, 1), renew('mara', code, 1)])
    expect(both.map((answer) => answer.status).sort()).toEqual([201, 412])
    expect((await lib.rowOf(code)).generation).toBe(2)
    expectProblem(await renew('cora', code, 2), 'may-not')
  })
})

describe('what a source may stand behind', () => {
  test('symbols of both tables and lines of statements, also while the draft has a fault', async () => {
    const code = await lib.makePage()
    await lib.edit(code, lib.who.cora.id, (doc) => {
      replaceText('dx/dt', '# the pair\n\ndx/dt')(doc)
      setParameter('mu', 'low', '1e')(doc)
    })
    const { symbols, lines } = await targetsOf(code)
    expect(symbols).toEqual([
      { symbol: 'mu', meaning: 'net growth rate' },
      { symbol: 'x', meaning: 'pitch' },
      { symbol: 'y', meaning: '' },
    ])
    expect(lines.map(({ line, text }) => [line, text.slice(0, 5)])).toEqual([
      [1, 'q2 = '],
      [4, 'dx/dt'],
      [5, 'dy/dt'],
    ])
  })

  test('a line chosen before others typed above it is still that line', async () => {
    const code = await lib.makePage()
    const source = await addSource(code)
    const line = (await targetsOf(code)).lines.find(({ text }) => text.startsWith('dy/dt'))
    await lib.edit(code, lib.who.max.id, (doc) => equationsOf(doc).insert(0, '# one\n# two\n'))
    const answer = await linkTo(code, source, { kind: 'line', line: line?.line, anchor: line?.anchor })
    expect(answer.status).toBe(201)
    const linked = answer.body.sources.at(-1).links.map((one: { target: object }) => one.target)
    // It was line 3 when it was read; two lines were put in above it.
    expect(line?.line).toBe(3)
    expect(linked).toContainEqual(expect.objectContaining({ kind: 'line', line: 5 }))
  })
})
