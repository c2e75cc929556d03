import { eq, sql } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { append, loadDocument } from '#collab/persistence.ts'
import { cards, log, revisions, signatures } from '#drizzle/schema/index.ts'
import type { RevisionHead } from '#shared/api/pages.ts'
import { readRevision, revision as revisionContract } from '#shared/api/revisions.ts'
import { readDraft } from '#shared/ydoc/shape.ts'
import { apiRoot, expectProblem, type Tab } from '#tests/support/http.ts'
import {
  createLibrary,
  type Library,
  oscillator,
  replaceText,
  retype,
  setParameter,
  setSetting,
} from '#tests/support/pages.ts'
import { password } from '#tests/support/users.ts'

let lib: Library
beforeAll(async () => {
  lib = await createLibrary()
})
afterAll(() => lib.close())

const at = (code: string, rest = '') => `${apiRoot}/pages/${code}/revisions${rest}`
const settle = (
  by: Tab,
  code: string,
  { mark, etag }: { mark: string; etag: string },
  act: string,
  body: object = {},
) =>
  by
    .post(at(code, `/${mark}/${act}`))
    .set('If-Match', `"${etag}"`)
    .send(body)
const remarks = {
  remarks: [
    { text: 'The sign of the cubic term', line: 2 },
    { text: 'No source', symbol: 'mu' },
  ],
}
async function readOne(by: Tab, code: string, rest: string) {
  const answer = await by.get(at(code, `/${rest}`))
  expect(answer.status).toBe(200)
  return readRevision.response.parse(answer.body)
}
async function rowOf(code: string, mark: string) {
  const page = await lib.rowOf(code)
  const rows = await lib.db.select().from(revisions).where(eq(revisions.pageId, page.id))
  const row = rows.find((one) => `${one.major}.${one.minor}.${one.patch}` === mark)
  if (!row) throw new Error(`${code} has no ${mark}`)
  return row
}

describe('the whole way', () => {
  test('from a draft by two people to a revision that anybody may read', async () => {
    const code = await lib.makePage()
    await lib.edit(code, lib.who.max.id, setParameter('mu', 'meaning', 'growth less damping'))
    const head = await lib.head(lib.tabs.mara, code)
    const opened = await lib.tabs.mara
      .patch(`${apiRoot}/pages/${code}`)
      .set('If-Match', `"${head.etag}"`)
      .send({ access: 'open' })
    expect(opened.status).toBe(200)

    const sent = await lib.send(lib.tabs.cora, code, 'First model of the rig')
    expect(sent).toMatchObject({
      mark: '1.0.0',
      state: 'in-review',
      summary: 'First model of the rig',
      sentBy: { name: 'Cora Vane' },
      settledAt: null,
      base: null,
      card: { kind: 'soft', main: 0 },
    })
    expect(sent.signatures.map((one) => [one.person.name, one.meaning])).toEqual([
      ['Cora Vane', 'written'],
      ['Max Flint', 'written'],
    ])

    // Max is a maintainer, but wrote in it; cora is no maintainer.
    expectProblem(await lib.tryApprove(lib.tabs.max, code, sent), 'may-not')
    expectProblem(await lib.tryApprove(lib.tabs.cora, code, sent), 'may-not')
    expectProblem(await lib.tabs.nobody.get(`${apiRoot}/pages/${code}`), 'not-signed-in')

    const approved = await lib.approve(lib.tabs.mara, code, sent)
    expect(approved.state).toBe('in-force')
    expect(approved.signatures.map((one) => [one.person.name, one.meaning])).toEqual([
      ['Cora Vane', 'written'],
      ['Max Flint', 'written'],
      ['Mara Kettle', 'checked'],
      ['Mara Kettle', 'approved'],
    ])
    expect(await lib.head(lib.tabs.nobody, code)).toMatchObject({
      state: 'in-force',
      role: 'visitor',
      inForce: { mark: '1.0.0', card: { kind: 'soft' } },
    })

    const { revision } = await readOne(lib.tabs.nobody, code, '1.0.0')
    const growth = { symbol: 'mu', value: -0.5, low: -1, high: 1, unit: '1/s', meaning: 'growth less damping' }
    expect(revision.document).toEqual(oscillator({ parameters: [growth] }))
    // r' = r (mu - r^2): the onset at 0 turns at 1 and its cubic coefficient is -1.
    expect(revision.stabilityCard?.hopf).toHaveLength(1)
    expect(revision.stabilityCard?.hopf?.[0]?.p).toBeCloseTo(0, 9)
    expect(revision.stabilityCard?.hopf?.[0]?.omega).toBeCloseTo(1, 9)
    expect(revision.stabilityCard?.hopf?.[0]?.cubic).toBeCloseTo(-1, 7)
    expect(revision.lines.map((line) => [line.line, line.kind])).toEqual([
      [1, 'helper'],
      [2, 'equation'],
      [3, 'equation'],
    ])
    expect(revision.lines[0]?.tex).toContain('x')

    // The draft goes on from what was approved, in a new generation that nobody wrote in yet.
    const after = await lib.head(lib.tabs.cora, code)
    expect(after.draft).toMatchObject({ generation: 2, writers: [], differs: false, kind: 'soft' })
    const acts = await lib.db
      .select({ act: log.act, person: log.personId })
      .from(log)
      .where(sql`${log.target} like ${`page ${code}%`}`)
    expect(acts).toEqual([
      { act: 'page:create', person: lib.who.cora.id },
      { act: 'page:settings', person: lib.who.mara.id },
      { act: 'revision:send', person: lib.who.cora.id },
      { act: 'revision:approve', person: lib.who.mara.id },
    ])
  })

  test('signatures refer to the digest of the document', async () => {
    const code = await lib.publicPage('group')
    const row = await rowOf(code, '1.0.0')
    const signed = await lib.db.select().from(signatures).where(eq(signatures.revisionId, row.id))
    expect(signed.map((one) => one.digest)).toEqual(signed.map(() => row.digest))
    expect(row.digest).toMatch(/^sha256:[0-9a-f]{64}$/)
    expect(row.fingerprint).toMatch(/^sha256:[0-9a-f]{64}$/)
    expect(row.digest).not.toBe(row.fingerprint)
  })

  test('pages that share a model share its card', async () => {
    const first = await rowOf(await lib.publicPage('group'), '1.0.0')
    const second = await rowOf(await lib.publicPage('group'), '1.0.0')
    expect(second.cardId).toBe(first.cardId)
    const kept = await lib.db.select().from(cards).where(eq(cards.fingerprint, first.fingerprint))
    expect(kept).toHaveLength(1)
  })
})

describe('sending for review', () => {
  test('locks the draft until it is settled', async () => {
    const code = await lib.makePage()
    const sent = await lib.send(lib.tabs.cora, code)
    expect(await lib.edit(code, lib.who.cora.id, setSetting('notes', 'late'))).toEqual({ ok: false, reason: 'locked' })
    const again = await lib.tabs.max.post(at(code)).send({ summary: 'Again', generation: 1 })
    expectProblem(again, 'may-not')
    expect((await settle(lib.tabs.mara, code, sent, 'return', remarks)).status).toBe(200)
    expect(await lib.edit(code, lib.who.cora.id, setSetting('notes', 'now'))).toEqual({ ok: true })
  })

  test('refuses a draft that makes no model, with every fault at its place', async () => {
    const code = await lib.makePage()
    await lib.edit(code, lib.who.cora.id, (doc) => {
      retype('q2 = x^2 + z^2\ndx/dt = mu*x - y\ndy/dt = 2x')(doc)
      setParameter('mu', 'low', '1e')(doc)
    })
    const answer = await lib.tabs.cora.post(at(code)).send({ summary: 'Broken', generation: 1 })
    const { errors = [] } = expectProblem(answer, 'model-refused')
    expect(errors).toEqual(
      expect.arrayContaining([
        expect.objectContaining({ code: 'unknown-symbol', line: 1 }),
        expect.objectContaining({ code: 'syntax', line: 3 }),
        expect.objectContaining({ path: 'parameters[0].low' }),
      ]),
    )
    expect((await lib.rowOf(code)).inReviewId).toBeNull()
    expect(await lib.edit(code, lib.who.cora.id, setSetting('notes', 'still open'))).toEqual({ ok: true })
  })

  test('asks for a title', async () => {
    const code = await lib.makePage()
    await lib.edit(code, lib.who.cora.id, setSetting('title', ''))
    const answer = await lib.tabs.cora.post(at(code)).send({ summary: 'Nameless', generation: 1 })
    expect(expectProblem(answer, 'model-refused').errors).toEqual([
      { code: 'missing-field', message: 'Give the model a title.', path: 'title' },
    ])
  })

  test('refuses a sender who saw another generation of the draft', async () => {
    const code = await lib.publicPage('group')
    expectProblem(await lib.tabs.cora.post(at(code)).send({ summary: 'Old', generation: 1 }), 'changed')
  })

  test('is for writers: not for readers, outsiders, administrators, strangers', async () => {
    const code = await lib.publicPage('open')
    const body = { summary: 'No', generation: 2 }
    expectProblem(await lib.tabs.rhea.post(at(code)).send(body), 'may-not')
    expectProblem(await lib.tabs.olaf.post(at(code)).send(body), 'may-not')
    expectProblem(await lib.tabs.ada.post(at(code)).send(body), 'may-not')
    expectProblem(await lib.tabs.nobody.post(at(code)).send(body), 'not-signed-in')
  })

  test('needs a summary in one line', async () => {
    const code = await lib.makePage()
    for (const summary of ['', '   ', 'a\u0000b', 'x'.repeat(501)]) {
      expectProblem(await lib.tabs.cora.post(at(code)).send({ summary, generation: 1 }), 'bad-request')
    }
  })

  test('happens once for one Idempotency-Key', async () => {
    const code = await lib.makePage()
    const ask = () =>
      lib.tabs.cora
        .post(at(code))
        .set('Idempotency-Key', `send-${code}-only-once`)
        .send({ summary: 'Once', generation: 1 })
    const first = await ask()
    expect(first.status).toBe(201)
    const { etag } = (first.body as RevisionHead) ?? {}
    expect(first.headers.etag).toBe(`"${etag}"`)
    // The draft is locked by now; the repetition gets the first answer all the same, another request does not.
    const second = await ask()
    expect(second.status).toBe(201)
    expect(second.body).toEqual(first.body)
    expectProblem(
      await lib.tabs.cora
        .post(at(code))
        .set('Idempotency-Key', `send-${code}-only-once`)
        .send({ summary: 'Twice', generation: 1 }),
      'may-not',
    )
    expect((await lib.tabs.cora.get(at(code))).body.revisions).toHaveLength(1)
  })

  test('of eight at once exactly one wins', async () => {
    const code = await lib.makePage()
    const answers = await Promise.all(
      Array.from({ length: 8 }, (_, i) =>
        (i % 2 ? lib.tabs.cora : lib.tabs.max).post(at(code)).send({ summary: `Race ${i}`, generation: 1 }),
      ),
    )
    const won = answers.filter((answer) => answer.status === 201)
    expect(won).toHaveLength(1)
    for (const answer of answers) {
      if (answer.status !== 201) expect(['in-review', 'may-not']).toContain(answer.body.code)
    }
    const page = await lib.rowOf(code)
    const rows = await lib.db.select().from(revisions).where(eq(revisions.pageId, page.id))
    expect(rows).toHaveLength(1)
    expect(page.inReviewId).toBe(rows[0]?.id)
  })

  test('freezes what is committed while others type: no edit is half in, none acknowledged is lost', async () => {
    const code = await lib.makePage()
    const typing = (async () => {
      const results = []
      for (let i = 0; i < 60; i++) {
        const result = await lib.edit(code, lib.who.max.id, setSetting('notes', `edit ${i}`))
        results.push(result)
        if (!result.ok) break
      }
      return results
    })()
    const answers = []
    for (let i = 0; i < 20; i++) {
      const answer = await lib.tabs.cora.post(at(code)).send({ summary: 'While typing', generation: 1 })
      answers.push(answer)
      if (answer.status === 201) break
      expectProblem(answer, 'unsaved-edits')
    }
    const results = await typing
    expect(answers.at(-1)?.status).toBe(201)
    const accepted = results.filter((result) => result.ok).length
    const row = await rowOf(code, '1.0.0')
    // Edits that were taken are all in, in the frozen document as in the draft; those after it were refused.
    expect(row.document).toMatchObject({ notes: `edit ${accepted - 1}` })
    const doc = await loadDocument(lib.db, row.pageId, 1)
    expect(readDraft(doc).settings.notes).toBe(`edit ${accepted - 1}`)
  })
})

describe('marks', () => {
  async function next(code: string, change: Parameters<Library['edit']>[2]) {
    expect(await lib.edit(code, lib.who.cora.id, change)).toEqual({ ok: true })
    const sent = await lib.send(lib.tabs.cora, code)
    await lib.approve(lib.tabs.mara, code, sent)
    return sent.mark
  }

  test('follow from how the card differs from the revision in force', async () => {
    const code = await lib.publicPage('group')
    expect(await next(code, setSetting('notes', 'Only words'))).toBe('1.0.1')
    // The frequency is 2 instead of 1: a number beyond its tolerance.
    expect(await next(code, retype('q2 = x^2 + y^2\ndx/dt = (mu - q2)*x - 2*y\ndy/dt = 2*x + (mu - q2)*y'))).toBe(
      '1.1.0',
    )
    expect(await next(code, replaceText('(mu - q2)*x', '(mu - q2)*x + 0'))).toBe('1.1.1')
    expect(await next(code, retype(oscillator({ hard: true }).equations))).toBe('2.0.0')
    expect(await next(code, setParameter('mu', 'unit', '1/min'))).toBe('3.0.0')
  })

  test('are never used twice: a returned one is passed over', async () => {
    const code = await lib.makePage()
    const first = await lib.send(lib.tabs.cora, code)
    expect(first.mark).toBe('1.0.0')
    await settle(lib.tabs.mara, code, first, 'return', remarks)
    const second = await lib.send(lib.tabs.cora, code)
    expect(second).toMatchObject({ mark: '1.0.1', base: null })
    const list = await lib.tabs.rhea.get(at(code))
    expect(list.body.revisions.map((one: RevisionHead) => [one.mark, one.state])).toEqual([
      ['1.0.1', 'in-review'],
      ['1.0.0', 'returned'],
    ])
  })

  test('go on after a withdrawal instead of beginning again below it', async () => {
    const code = await lib.publicPage('group')
    const { inForce } = await lib.head(lib.tabs.mara, code)
    if (!inForce) throw new Error('nothing in force')
    const gone = await settle(lib.tabs.mara, code, inForce, 'withdraw', { reason: 'Wrong rig', password })
    expect(gone.status).toBe(200)
    await lib.edit(code, lib.who.cora.id, setSetting('notes', 'Right rig'))
    expect(await lib.send(lib.tabs.cora, code)).toMatchObject({ mark: '1.0.1', base: null })
  })
})

describe('approving', () => {
  test('supersedes the revision before', async () => {
    const code = await lib.publicPage('open')
    await lib.edit(code, lib.who.cora.id, (doc) => {
      retype(oscillator({ hard: true }).equations)(doc)
      setSetting('title', 'Rig A, worn')(doc)
    })
    const sent = await lib.send(lib.tabs.cora, code, 'Worn bearing')
    expect(sent).toMatchObject({ mark: '2.0.0', base: '1.0.0' })
    await lib.approve(lib.tabs.max, code, sent)
    const visitor = await lib.head(lib.tabs.nobody, code)
    expect(visitor).toMatchObject({ title: 'Rig A, worn', inForce: { mark: '2.0.0', card: { kind: 'hard' } } })
    const list = await lib.tabs.nobody.get(at(code))
    expect(list.body.revisions.map((one: RevisionHead) => [one.mark, one.state])).toEqual([
      ['2.0.0', 'in-force'],
      ['1.0.0', 'superseded'],
    ])
    const both = await readOne(lib.tabs.nobody, code, '2.0.0?with=1.0.0')
    expect(both.revision.card?.kind).toBe('hard')
    expect(both.other?.card?.kind).toBe('soft')
  })

  test('asks for the password; a wrong one signs nothing and is counted', async () => {
    const code = await lib.makePage()
    const sent = await lib.send(lib.tabs.cora, code)
    expectProblem(await lib.tryApprove(lib.tabs.max, code, sent, 'not it'), 'wrong-password')
    const row = await rowOf(code, '1.0.0')
    expect(row.state).toBe('in-review')
    const signed = await lib.db.select().from(signatures).where(eq(signatures.revisionId, row.id))
    expect(signed.map((one) => one.meaning)).toEqual(['written'])
    for (let i = 0; i < 4; i++) await lib.tryApprove(lib.tabs.max, code, sent, 'not it')
    expectProblem(await lib.tryApprove(lib.tabs.max, code, sent), 'too-many')
    await lib.approve(lib.tabs.mara, code, sent)
    // A minute later max may try again.
    lib.clock.ahead += 61_000
  })

  test('needs both checks ticked', async () => {
    const code = await lib.makePage()
    const sent = await lib.send(lib.tabs.cora, code)
    const unread = { password, equationsRead: true, verdictRead: false }
    expectProblem(await settle(lib.tabs.mara, code, sent, 'approve', unread), 'bad-request')
  })

  test('is refused to a writer of any size, also one who only attached a source', async () => {
    const code = await lib.makePage()
    const attached = await lib.tabs.mara
      .post(`${apiRoot}/pages/${code}/sources`)
      .send({ from: 'form', type: 'book', title: 'Notes on rigs', authors: [] })
    expect(attached.status).toBe(201)
    const sent = await lib.send(lib.tabs.cora, code)
    const { detail } = expectProblem(await lib.tryApprove(lib.tabs.mara, code, sent), 'may-not')
    expect(detail).toContain('You wrote in this revision')
    expect((await lib.head(lib.tabs.mara, code)).may).not.toContain('revision:approve')
    expect((await lib.head(lib.tabs.max, code)).may).toContain('revision:approve')
  })

  test('is refused to the sender, also where somebody else typed everything', async () => {
    const code = await lib.makePage()
    const sent = await lib.send(lib.tabs.mara, code)
    expectProblem(await lib.tryApprove(lib.tabs.mara, code, sent), 'may-not')
  })

  test('is refused to everybody but a maintainer of the group', async () => {
    const code = await lib.publicPage('open')
    await lib.edit(code, lib.who.cora.id, setSetting('notes', 'x'))
    const sent = await lib.send(lib.tabs.cora, code)
    for (const by of [lib.tabs.cora, lib.tabs.rhea, lib.tabs.olaf, lib.tabs.ada]) {
      expectProblem(await lib.tryApprove(by, code, sent), 'may-not')
    }
    expectProblem(await lib.tryApprove(lib.tabs.nobody, code, sent), 'not-signed-in')
  })

  test('needs If-Match and the state that was seen', async () => {
    const code = await lib.makePage()
    const sent = await lib.send(lib.tabs.cora, code)
    const body = { password, equationsRead: true, verdictRead: true }
    expectProblem(await lib.tabs.mara.post(at(code, '/1.0.0/approve')).send(body), 'needs-if-match')
    const stale = expectProblem(
      await settle(lib.tabs.mara, code, { mark: '1.0.0', etag: 'other' }, 'approve', body),
      'changed',
    )
    expect(stale.etag).toBe(sent.etag)
    expectProblem(await settle(lib.tabs.mara, code, { mark: '9.9.9', etag: sent.etag }, 'approve', body), 'not-found')
  })

  test('is refused where what it was compared with is no longer in force', async () => {
    const code = await lib.publicPage('group')
    await lib.edit(code, lib.who.cora.id, setSetting('notes', 'x'))
    const sent = await lib.send(lib.tabs.cora, code)
    const { inForce } = await lib.head(lib.tabs.max, code)
    if (!inForce) throw new Error('nothing in force')
    expect((await settle(lib.tabs.max, code, inForce, 'withdraw', { reason: 'Wrong rig', password })).status).toBe(200)
    expectProblem(await lib.tryApprove(lib.tabs.mara, code, sent), 'base-superseded')
    expect((await rowOf(code, sent.mark)).state).toBe('in-review')
  })

  test('of eight at once exactly one wins', async () => {
    const code = await lib.makePage()
    const sent = await lib.send(lib.tabs.cora, code)
    const answers = await Promise.all(
      Array.from({ length: 8 }, (_, i) => lib.tryApprove(i % 2 ? lib.tabs.mara : lib.tabs.max, code, sent)),
    )
    expect(answers.filter((answer) => answer.status === 200)).toHaveLength(1)
    for (const answer of answers) {
      if (answer.status !== 200) expect(['changed', 'may-not', 'too-many']).toContain(answer.body.code)
    }
    const row = await rowOf(code, '1.0.0')
    const signed = await lib.db.select().from(signatures).where(eq(signatures.revisionId, row.id))
    expect(signed.filter((one) => one.meaning === 'approved')).toHaveLength(1)
    expect((await lib.rowOf(code)).generation).toBe(2)
    const approvals = await lib.db
      .select()
      .from(log)
      .where(eq(log.target, `page ${code} revision 1.0.0`))
    expect(approvals.filter((entry) => entry.act === 'revision:approve')).toHaveLength(1)
  })

  test('and returning at once: one of the two', async () => {
    const code = await lib.makePage()
    const sent = await lib.send(lib.tabs.cora, code)
    const answers = await Promise.all([
      lib.tryApprove(lib.tabs.mara, code, sent),
      settle(lib.tabs.max, code, sent, 'return', remarks),
      settle(lib.tabs.cora, code, sent, 'take-back'),
    ])
    expect(answers.filter((answer) => answer.status === 200)).toHaveLength(1)
    const row = await rowOf(code, '1.0.0')
    const page = await lib.rowOf(code)
    expect(page.inReviewId).toBeNull()
    expect(page.inForceId).toBe(row.state === 'in-force' ? row.id : null)
  })

  test('closes the generation: an edit from before is refused', async () => {
    const code = await lib.makePage()
    const before = await lib.rowOf(code)
    await lib.approve(lib.tabs.mara, code, await lib.send(lib.tabs.cora, code))
    const now = new Date()
    const owner = { pageId: before.id, generation: before.generation, ownerEpoch: before.ownerEpoch }
    const late = await append(
      lib.db,
      owner,
      [{ personId: lib.who.cora.id, data: new Uint8Array([0, 0]), at: now }],
      now,
    )
    expect(late).toEqual({ ok: false, reason: 'generation-closed' })
  })
})

describe('returning and taking back', () => {
  test('a returned revision keeps its remarks, for members', async () => {
    const code = await lib.publicPage('open')
    await lib.edit(code, lib.who.cora.id, setSetting('notes', 'x'))
    const sent = await lib.send(lib.tabs.cora, code)
    const answer = await settle(lib.tabs.mara, code, sent, 'return', remarks)
    expect(answer.body).toMatchObject({ state: 'returned', mark: '1.0.1' })
    expect(answer.body.settledAt).not.toBeNull()
    const { revision } = await readOne(lib.tabs.cora, code, '1.0.1')
    expect(revision.remarks.map(({ author, text, line, symbol }) => [author.name, text, line, symbol])).toEqual([
      ['Mara Kettle', 'The sign of the cubic term', 2, null],
      ['Mara Kettle', 'No source', null, 'mu'],
    ])
    expectProblem(await lib.tabs.nobody.get(at(code, '/1.0.1')), 'not-found')
    expect(await lib.head(lib.tabs.cora, code)).toMatchObject({
      state: 'in-force',
      draft: { generation: 2 },
      inReview: null,
    })
  })

  test('needs a remark, and a maintainer', async () => {
    const code = await lib.makePage()
    const sent = await lib.send(lib.tabs.cora, code)
    expectProblem(await settle(lib.tabs.mara, code, sent, 'return', { remarks: [] }), 'bad-request')
    expectProblem(await settle(lib.tabs.mara, code, sent, 'return', { remarks: [{ text: '  ' }] }), 'bad-request')
    expectProblem(await settle(lib.tabs.cora, code, sent, 'return', remarks), 'may-not')
  })

  test('only the sender or a maintainer takes it back', async () => {
    const code = await lib.makePage(lib.tabs.mara)
    const dan = await lib.people.person('Dan Birch')
    await lib.db.execute(
      sql`insert into memberships (group_id, person_id, role, since) values (${lib.kiln.id}, ${dan.id}, 'contributor', now(3))`,
    )
    const sent = await lib.send(lib.tabs.cora, code)
    const other = await lib.people.signedIn(dan)
    expect((await lib.head(other, code)).may).not.toContain('revision:take-back')
    expectProblem(await settle(other, code, sent, 'take-back'), 'may-not')
    expect((await settle(lib.tabs.cora, code, sent, 'take-back')).body).toMatchObject({ state: 'returned' })
    const again = await lib.send(lib.tabs.cora, code)
    expect((await settle(lib.tabs.max, code, again, 'take-back')).status).toBe(200)
  })

  test('is refused where it was settled before', async () => {
    const code = await lib.makePage()
    const sent = await lib.send(lib.tabs.cora, code)
    await settle(lib.tabs.mara, code, sent, 'return', remarks)
    // Nothing is in review, so the policy has no such act; with another revision in review the tag is stale.
    expectProblem(await settle(lib.tabs.mara, code, sent, 'return', remarks), 'may-not')
    await lib.send(lib.tabs.cora, code)
    expectProblem(await settle(lib.tabs.mara, code, sent, 'return', remarks), 'changed')
    expectProblem(
      await settle(lib.tabs.mara, code, { ...sent, etag: '1.0.0.returned' }, 'return', remarks),
      'already-settled',
    )
  })
})

describe('withdrawing', () => {
  test('leaves nothing in force, and nothing older comes back', async () => {
    const code = await lib.publicPage('open')
    await lib.edit(code, lib.who.cora.id, setSetting('notes', 'x'))
    const second = await lib.approve(lib.tabs.mara, code, await lib.send(lib.tabs.cora, code))
    expectProblem(await settle(lib.tabs.mara, code, second, 'withdraw', { reason: 'no', password }), 'bad-request')
    expectProblem(
      await settle(lib.tabs.mara, code, second, 'withdraw', { reason: 'Wrong rig', password: 'x' }),
      'wrong-password',
    )
    expectProblem(await settle(lib.tabs.cora, code, second, 'withdraw', { reason: 'Wrong rig', password }), 'may-not')
    const answer = await settle(lib.tabs.mara, code, second, 'withdraw', { reason: 'Wrong rig', password })
    expect(answer.body).toMatchObject({ state: 'withdrawn', reason: 'Wrong rig', mark: '1.0.1' })
    expect(answer.body.signatures.at(-1)).toMatchObject({ meaning: 'withdrawn', person: { name: 'Mara Kettle' } })
    const visitor = await lib.head(lib.tabs.nobody, code)
    expect(visitor).toMatchObject({
      state: 'withdrawn',
      inForce: null,
      lastPublic: { mark: '1.0.1', state: 'withdrawn' },
    })
    expect((await readOne(lib.tabs.nobody, code, '1.0.1')).revision.reason).toBe('Wrong rig')
    expect((await readOne(lib.tabs.nobody, code, '1.0.0')).revision.state).toBe('superseded')
    expect((await lib.head(lib.tabs.cora, code)).draft?.generation).toBe(3)
  })

  test('of eight at once exactly one wins', async () => {
    const code = await lib.publicPage('group')
    const { inForce } = await lib.head(lib.tabs.mara, code)
    if (!inForce) throw new Error('nothing in force')
    const answers = await Promise.all(
      Array.from({ length: 8 }, (_, i) =>
        settle(i % 2 ? lib.tabs.mara : lib.tabs.max, code, inForce, 'withdraw', { reason: 'Race', password }),
      ),
    )
    expect(answers.filter((answer) => answer.status === 200)).toHaveLength(1)
  })

  test('a superseded revision cannot be withdrawn', async () => {
    const code = await lib.publicPage('group')
    await lib.edit(code, lib.who.cora.id, setSetting('notes', 'x'))
    await lib.approve(lib.tabs.mara, code, await lib.send(lib.tabs.cora, code))
    const old = { mark: '1.0.0', etag: '1.0.0.superseded' }
    expectProblem(await settle(lib.tabs.mara, code, old, 'withdraw', { reason: 'Old', password }), 'already-settled')
  })
})

describe('what is frozen', () => {
  test('does not change by any act that comes after it', async () => {
    const code = await lib.publicPage('open')
    const frozen = async () => {
      const { state, settledAt, reason, ...row } = await rowOf(code, '1.0.0')
      const [card] = await lib.db.select().from(cards).where(eq(cards.id, row.cardId))
      const { revision } = await readOne(lib.tabs.rhea, code, '1.0.0')
      return { row, card, document: revision.document, lines: revision.lines, sources: revision.sources }
    }
    const before = await frozen()
    const head = await lib.head(lib.tabs.mara, code)
    const addSource = { from: 'form', type: 'book', title: 'Later book', authors: [] }
    await lib.edit(code, lib.who.cora.id, (doc) => {
      retype(oscillator({ hard: true }).equations)(doc)
      setSetting('title', 'Later title')(doc)
    })
    expect((await lib.tabs.cora.post(`${apiRoot}/pages/${code}/sources`).send(addSource)).status).toBe(201)
    await lib.draftCards.catchUp()
    await lib.tabs.mara
      .patch(`${apiRoot}/pages/${code}`)
      .set('If-Match', `"${head.etag}"`)
      .send({ access: 'signed-in' })
    const second = await lib.send(lib.tabs.cora, code)
    await settle(lib.tabs.max, code, second, 'return', remarks)
    await lib.approve(lib.tabs.max, code, await lib.send(lib.tabs.cora, code))
    const { inForce } = await lib.head(lib.tabs.max, code)
    if (inForce) await settle(lib.tabs.max, code, inForce, 'withdraw', { reason: 'Done', password })
    expect((await rowOf(code, '1.0.0')).state).toBe('superseded')
    expect(await frozen()).toEqual(before)
  })

  test('cannot be changed by a request with more in it than the contract names', async () => {
    const code = await lib.makePage()
    const sent = await lib.send(lib.tabs.cora, code)
    const forged = { password, equationsRead: true, verdictRead: true, document: {}, mark: '7.0.0', summary: 'forged' }
    expectProblem(await settle(lib.tabs.mara, code, sent, 'approve', forged), 'bad-request')
    for (const method of ['put', 'patch', 'delete'] as const) {
      expectProblem(await lib.tabs.mara[method](at(code, '/1.0.0')).send({}), 'method-not-allowed')
    }
    expect(await rowOf(code, '1.0.0')).toMatchObject({ state: 'in-review', summary: 'First go' })
  })

  test.each([
    'document = \'{"forged": true}\'',
    "digest = 'sha256:0'",
    "fingerprint = 'sha256:0'",
    'card_id = card_id + 1',
    'card_summary = \'{"kind":"none"}\'',
    'major = 9',
    "summary = 'forged'",
    'sent_by = sent_by + 1',
    'sent_at = now(3)',
    "engine = '9.9.9'",
    'base_id = 1',
    "state = 'in-review'",
    "state = 'withdrawn', reason = 'forged'",
    'settled_at = now(3)',
    "reason = 'forged'",
  ])('is kept by the database itself: update revisions set %s', async (change) => {
    const code = await lib.makePage()
    const sent = await lib.send(lib.tabs.cora, code)
    await settle(lib.tabs.mara, code, sent, 'return', remarks)
    const row = await rowOf(code, '1.0.0')
    const attempt = lib.db.execute(sql`update revisions set ${sql.raw(change)} where id = ${row.id}`)
    await expect(attempt).rejects.toMatchObject({ cause: { errno: 1644 } })
    expect(await rowOf(code, '1.0.0')).toEqual(row)
  })

  test.each([
    'delete from revisions',
    "update signatures set digest = 'sha256:0'",
    'delete from signatures',
    "update cards set card = '{}'",
    'delete from cards',
    "update remarks set text = 'forged'",
    'delete from remarks',
    'update log set at = now(3)',
    'delete from log',
    'update page_codes set number = number + 1',
    'delete from page_codes',
  ])('nor by: %s', async (statement) => {
    await expect(lib.db.execute(sql.raw(statement))).rejects.toMatchObject({ cause: { errno: 1644 } })
  })
})

describe('rows that others speak of', () => {
  // 1452: the row pointed to is not there; 1451: rows that point here would be left behind.
  test.each([
    ['update pages set in_force_id = 999999', 1452],
    ['update pages set in_review_id = 999999', 1452],
    ['update pages set draft_card_id = 999999', 1452],
    ["insert into page_codes (code, prefix, number, given_at) values ('NONE-01', 'NONE', 1, now(3))", 1452],
    [
      "insert into log (at, person_id, act, target, previous_hash, hash) values (now(3), 999999, 'x', 'x', '', '')",
      1452,
    ],
    ['delete from people', 1451],
    ['delete from `groups`', 1451],
    ['delete from group_prefixes', 1451],
    ['delete from pages', 1451],
  ] as const)('stay, and are there: %s', async (statement, errno) => {
    await expect(lib.db.execute(sql.raw(statement))).rejects.toMatchObject({ cause: { errno } })
  })
})

describe('reading', () => {
  test('a revision is told from its ETag, for members and visitors apart', async () => {
    const code = await lib.publicPage('open')
    const member = await lib.tabs.rhea.get(at(code, '/1.0.0'))
    expect(revisionContract.parse(member.body.revision).mark).toBe('1.0.0')
    const again = await lib.tabs.rhea.get(at(code, '/1.0.0')).set('If-None-Match', member.headers.etag ?? '')
    expect(again.status).toBe(304)
    const visitor = await lib.tabs.nobody.get(at(code, '/1.0.0')).set('If-None-Match', member.headers.etag ?? '')
    expect(visitor.status).toBe(200)
  })

  test('what is not there is not found', async () => {
    const code = await lib.publicPage('open')
    for (const rest of ['/9.0.0', '/1.0.0?with=9.0.0', '/latest', '/1.0']) {
      expectProblem(await lib.tabs.rhea.get(at(code, rest)), 'not-found')
    }
  })
})
