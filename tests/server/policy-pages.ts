import { eq } from 'drizzle-orm'
import { createDraft } from '#collab/persistence.ts'
import type { Database } from '#drizzle/client.ts'
import { cards, pages, revisions } from '#drizzle/schema/index.ts'
import { smallDraft } from '#tests/support/collab-pages.ts'
import type { TestGroup } from '#tests/support/users.ts'
import { type AccessName, accesses, type StateName, states } from './policy-expectations.ts'

export interface PolicyPage {
  id: number
  code: string
  state: StateName
  access: AccessName
}

const at = new Date('2026-11-30T12:00:00.000Z')

/** One page of each state and read access, straight in the tables, with a draft and the revisions that its state speaks of. */
export async function makePolicyPages(db: Database, group: TestGroup, authorId: number): Promise<PolicyPage[]> {
  const card = { fingerprint: `sha256:${group.prefix}`, engine: '0', parts: 'steady', card: {}, at }
  const [{ insertId: cardId }] = await db.insert(cards).values(card)
  const made: PolicyPage[] = []
  for (const access of accesses) {
    for (const state of states) {
      const code = `${group.prefix}-${String(made.length + 10).padStart(3, '0')}`
      const id = await makePage(db, { code, groupId: group.id, access, state, authorId, cardId })
      made.push({ id, code, state, access })
    }
  }
  return made
}

interface Wanted {
  code: string
  groupId: number
  access: AccessName
  state: StateName
  authorId: number
  cardId: number
}

async function makePage(db: Database, wanted: Wanted): Promise<number> {
  const { code, groupId, access, state } = wanted
  return db.transaction(async (tx) => {
    const times = { draftChangedAt: at, createdAt: at, changedAt: at }
    const removedAt = state === 'removed' ? at : null
    const everPublic = state.startsWith('in-force') || state.startsWith('withdrawn') ? 1 : 0
    const row = { code, groupId, access, title: `Hidden title of ${code}`, everPublic, removedAt, ...times }
    const [{ insertId: pageId }] = await tx.insert(pages).values(row)
    await createDraft(tx, pageId, 1, smallDraft, at)
    const revise = async (number: number, revisionState: 'in-force' | 'in-review' | 'withdrawn') => {
      const [{ insertId }] = await tx.insert(revisions).values({
        pageId,
        number,
        major: number,
        minor: 0,
        patch: 0,
        state: revisionState,
        summary: 'Hidden summary',
        document: {},
        cardSummary: {},
        digest: 'sha256:0',
        fingerprint: 'sha256:policy',
        engine: '0',
        cardId: wanted.cardId,
        generation: 1,
        sentBy: wanted.authorId,
        sentAt: at,
      })
      return insertId
    }
    const first = everPublic ? await revise(1, state.startsWith('in-force') ? 'in-force' : 'withdrawn') : null
    const inForceId = state.startsWith('in-force') ? first : null
    const inReviewId = state.endsWith('in-review') ? await revise(2, 'in-review') : null
    await tx.update(pages).set({ inForceId, inReviewId }).where(eq(pages.id, pageId))
    return pageId
  })
}
