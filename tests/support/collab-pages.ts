import { eq } from 'drizzle-orm'
import { createDraft, loadDocument } from '#collab/persistence.ts'
import type { Database } from '#drizzle/client.ts'
import { cards, groups, memberships, pages, people, revisions } from '#drizzle/schema/index.ts'
import type { MemberRole } from '#shared/api/roles.ts'
import type { DraftContent } from '#shared/model/draft.ts'
import { readDraft } from '#shared/ydoc/shape.ts'

const then = new Date('2026-11-30T12:00:00.000Z')

/** An invented planar oscillator, as a draft's plain strings. */
export const smallDraft: DraftContent = {
  equations: 'dx/dt = mu*x - y - x*(x^2 + y^2)\ndy/dt = x + mu*y - y*(x^2 + y^2)\n',
  parameters: [
    {
      id: 'p1',
      symbol: 'mu',
      value: '-0.5',
      low: '-1',
      high: '1',
      unit: '1/s',
      meaning: 'net growth',
      uncertainty: '',
    },
  ],
  states: [
    { id: 's1', symbol: 'x', low: '-2', high: '2', start: '0.1', unit: '', meaning: '' },
    { id: 's2', symbol: 'y', low: '-2', high: '2', start: '', unit: '', meaning: '' },
  ],
  settings: { title: 'Small oscillator', control: 'mu', observed: 'x' },
}

let counter = 0

/** People, one group and pages with a draft, for the tests of the co-editing server. */
export async function makePeople(db: Database, roles: readonly (MemberRole | null)[]) {
  const slug = `group-${++counter}`
  await db.insert(groups).values({ slug, name: slug, createdAt: then })
  const [group] = await db.select({ id: groups.id }).from(groups).where(eq(groups.slug, slug))
  if (!group) throw new Error('no group')
  const ids: number[] = []
  for (const [index, role] of roles.entries()) {
    const [{ insertId }] = await db
      .insert(people)
      .values({ email: `${slug}-${index}@example.org`, name: `Person ${index}`, createdAt: then })
    ids.push(insertId)
    if (role) await db.insert(memberships).values({ groupId: group.id, personId: insertId, role, since: then })
  }
  return { groupId: group.id, ids }
}

export async function makePage(db: Database, groupId: number, content: DraftContent = smallDraft): Promise<number> {
  const code = `TS-${String(++counter).padStart(3, '0')}`
  return db.transaction(async (tx) => {
    const [{ insertId }] = await tx
      .insert(pages)
      .values({ code, groupId, title: 'Test page', draftChangedAt: then, createdAt: then, changedAt: then })
    await createDraft(tx, insertId, 1, content, then)
    return insertId
  })
}

/** A revision of the page, so that the page's row can point at one in force or under review. @returns its id. */
export async function makeRevision(
  db: Database,
  pageId: number,
  { number = 1, state = 'in-review' }: { number?: number; state?: 'in-review' | 'in-force' } = {},
): Promise<number> {
  const key = `sha256:${pageId}-${number}`
  const [card] = await db
    .insert(cards)
    .values({ fingerprint: key, engine: '0.0.0', parts: 'steady,hopf', card: {}, at: then })
    .$returningId()
  const [sender] = await db
    .insert(people)
    .values({ email: `sender-${++counter}@example.org`, name: 'Some sender', createdAt: then })
    .$returningId()
  if (!card || !sender) throw new Error('no card or no sender')
  const [revision] = await db
    .insert(revisions)
    .values({
      pageId,
      number,
      major: number,
      minor: 0,
      patch: 0,
      state,
      summary: 'Sent for a test',
      document: {},
      digest: key,
      fingerprint: key,
      engine: '0.0.0',
      cardId: card.id,
      cardSummary: {},
      generation: 1,
      sentBy: sender.id,
      sentAt: then,
    })
    .$returningId()
  if (!revision) throw new Error('no revision')
  return revision.id
}

/** The committed draft as plain strings, from a document loaded afresh. */
export async function committed(db: Database, pageId: number, generation = 1): Promise<DraftContent> {
  const doc = await loadDocument(db, pageId, generation)
  const content = readDraft(doc)
  doc.destroy()
  return content
}
