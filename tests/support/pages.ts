import * as Y from 'yjs'
import { append, loadDocument } from '#collab/persistence.ts'
import type { Database } from '#drizzle/client.ts'
import { type Compute, createCompute } from '#server/compute/compute.ts'
import { type Limits, limits } from '#server/limits.ts'
import { findPageByCode } from '#server/queries/pages.ts'
import { createDraftCards } from '#server/services/draft-cards.ts'
import { type Page, page as pageContract, type RevisionHead, revisionHead } from '#shared/api/pages.ts'
import type { ModelDocument } from '#shared/model/document.ts'
import { equationsOf, parameterRows, parametersOf, settingsOf } from '#shared/ydoc/shape.ts'
import { createTestApp, type TestAppOptions } from './app.ts'
import { apiRoot, type Tab } from './http.ts'
import { password } from './users.ts'

/**
 * The planar oscillator r' = r (mu - r^2), turning at 1: steady below mu = 0, where a soft onset is (cubic -1); running
 * at -0.5. With `hard` the cubic term has the other sign and a fifth-order one holds it.
 */
export function oscillator(changes: Partial<ModelDocument> & { hard?: boolean } = {}): ModelDocument {
  const { hard = false, ...others } = changes
  const growth = hard ? 'mu + q2 - q2^2' : 'mu - q2'
  return {
    format: 'brinkbook-model',
    version: 1,
    title: 'Rig A pitch mode',
    timeUnit: 's',
    equations: `q2 = x^2 + y^2\ndx/dt = (${growth})*x - y\ndy/dt = x + (${growth})*y`,
    parameters: [{ symbol: 'mu', value: -0.5, low: -1, high: 1, unit: '1/s', meaning: 'net growth rate' }],
    states: [
      { symbol: 'x', low: -2, high: 2, start: 0.1, meaning: 'pitch' },
      { symbol: 'y', low: -2, high: 2, start: 0.1 },
    ],
    control: 'mu',
    observed: 'x',
    ...others,
  }
}

/** Two maintainers, a contributor and a reader of one group, a maintainer of another, an administrator, and nobody. */
export async function createLibrary(options: TestAppOptions & { compute?: Compute } = {}) {
  const compute =
    options.compute ?? createCompute({ ...limits.compute, cardDeadline: 60_000, citationDeadline: 60_000 })
  const many = (given: Limits): Limits => ({ ...given, rate: { ...given.rate, cards: 1_000_000 } })
  const app = await createTestApp({ limits: many, ...options, compute })
  const { db, events, people } = app
  const draftCards = createDraftCards({
    db,
    compute,
    ...limits.compute,
    settle: 10_000,
    now: () => new Date(),
    report: (error) => {
      throw error
    },
  })
  events.subscribe((event) => {
    if (event.kind === 'draft-changed') draftCards.changed(event.pageId)
  })
  const who = {
    mara: await people.person('Mara Kettle'),
    max: await people.person('Max Flint'),
    cora: await people.person('Cora Vane'),
    rhea: await people.person('Rhea Moss'),
    olaf: await people.person('Olaf Reed'),
    ada: await people.person('Ada Wren', { administrator: true }),
  }
  const kiln = await people.group('Kiln Lab', 'KLN', [
    [who.mara, 'maintainer'],
    [who.max, 'maintainer'],
    [who.cora, 'contributor'],
    [who.rhea, 'reader'],
  ])
  const ford = await people.group('Ford Shop', 'FRD', [[who.olaf, 'maintainer']])
  const tabs = {
    mara: await people.signedIn(who.mara),
    max: await people.signedIn(who.max),
    cora: await people.signedIn(who.cora),
    rhea: await people.signedIn(who.rhea),
    olaf: await people.signedIn(who.olaf),
    ada: await people.signedIn(who.ada),
    nobody: people.signedOut(),
  }

  async function makePage(by: Tab = tabs.cora, body: object = { document: oscillator() }): Promise<string> {
    const answer = await by
      .post(`${apiRoot}/groups/${kiln.slug}/pages`)
      .send({ prefix: kiln.prefix, title: 'Rig A pitch mode', ...body })
    if (answer.status !== 201) throw new Error(`Making a page answered ${answer.status} ${JSON.stringify(answer.body)}`)
    return answer.body.code
  }

  async function rowOf(code: string) {
    const row = await findPageByCode(db, code)
    if (!row) throw new Error(`There is no page ${code}`)
    return row
  }

  /** The head of a page as this tab gets it. */
  async function head(by: Tab, code: string): Promise<Page> {
    return pageContract.parse((await by.get(`${apiRoot}/pages/${code}`)).body)
  }

  async function send(by: Tab, code: string, summary = 'First go'): Promise<RevisionHead> {
    const { generation } = await rowOf(code)
    const answer = await by.post(`${apiRoot}/pages/${code}/revisions`).send({ summary, generation })
    if (answer.status !== 201) throw new Error(`Sending answered ${answer.status} ${JSON.stringify(answer.body)}`)
    return revisionHead.parse(answer.body)
  }

  /** Asks to approve what is in review; the answer as it comes. */
  async function tryApprove(by: Tab, code: string, { mark, etag }: { mark: string; etag: string }, secret = password) {
    return by
      .post(`${apiRoot}/pages/${code}/revisions/${mark}/approve`)
      .set('If-Match', `"${etag}"`)
      .send({ password: secret, equationsRead: true, verdictRead: true })
  }

  async function approve(by: Tab, code: string, revision: { mark: string; etag: string }): Promise<RevisionHead> {
    const answer = await tryApprove(by, code, revision)
    if (answer.status !== 200) throw new Error(`Approving answered ${answer.status} ${JSON.stringify(answer.body)}`)
    return revisionHead.parse(answer.body)
  }

  /** A page with a first revision in force, written by cora and approved by mara. */
  async function publicPage(access: 'group' | 'signed-in' | 'open' = 'open', body?: object): Promise<string> {
    const code = await makePage(tabs.cora, body)
    await approve(tabs.mara, code, await send(tabs.cora, code))
    if (access !== 'group') {
      const { etag } = await head(tabs.mara, code)
      const answer = await tabs.mara.patch(`${apiRoot}/pages/${code}`).set('If-Match', `"${etag}"`).send({ access })
      if (answer.status !== 200) throw new Error(`Opening answered ${answer.status}`)
    }
    return code
  }

  return {
    ...app,
    compute,
    draftCards,
    who,
    kiln,
    ford,
    tabs,
    makePage,
    publicPage,
    rowOf,
    head,
    send,
    tryApprove,
    approve,
    edit: (code: string, personId: number, change: (doc: Y.Doc) => void) => editDraft(db, code, personId, change),
    close: async () => {
      await draftCards.close()
      await compute.close()
      await app.close()
    },
  }
}
export type Library = Awaited<ReturnType<typeof createLibrary>>

/** Types into a draft as the co-editing server commits it: one update, appended in the page's owner's name. */
export async function editDraft(
  db: Database,
  code: string,
  personId: number,
  change: (doc: Y.Doc) => void,
): Promise<Awaited<ReturnType<typeof append>>> {
  const row = await findPageByCode(db, code)
  if (!row) throw new Error(`There is no page ${code}`)
  const doc = await loadDocument(db, row.id, row.generation)
  const before = Y.encodeStateVector(doc)
  doc.transact(() => change(doc))
  const data = Y.encodeStateAsUpdate(doc, before)
  doc.destroy()
  const now = new Date()
  return append(
    db,
    { pageId: row.id, generation: row.generation, ownerEpoch: row.ownerEpoch },
    [{ personId, data, at: now }],
    now,
  )
}

/** Puts a whole equation block in the place of the present one. */
export const retype = (equations: string) => (doc: Y.Doc) => {
  const text = equationsOf(doc)
  text.delete(0, text.length)
  text.insert(0, equations)
}

/** Replaces the first occurrence of a piece of the equation block, as an editor would. */
export const replaceText = (what: string, by: string) => (doc: Y.Doc) => {
  const text = equationsOf(doc)
  const at = text.toString().indexOf(what)
  if (at < 0) throw new Error(`The block has no ${what}`)
  text.delete(at, what.length)
  text.insert(at, by)
}

/** Writes one cell of the parameter table. */
export const setParameter = (symbol: string, cell: string, value: string) => (doc: Y.Doc) => {
  const row = parameterRows(doc).find((one) => one.symbol === symbol)
  if (!row) throw new Error(`There is no parameter ${symbol}`)
  parametersOf(doc).get(row.id)?.set(cell, value)
}

export const setSetting = (name: string, value: string) => (doc: Y.Doc) => {
  settingsOf(doc).set(name, value)
}
