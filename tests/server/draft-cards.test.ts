import { afterAll, afterEach, beforeAll, expect, test, vi } from 'vitest'
import type { Compute } from '#server/compute/compute.ts'
import { listDueDrafts } from '#server/queries/pages.ts'
import { createDraftCards, type DraftCards } from '#server/services/draft-cards.ts'
import { createLibrary, type Library, oscillator, retype, setParameter } from '#tests/support/pages.ts'

let lib: Library
const open: DraftCards[] = []
beforeAll(async () => {
  lib = await createLibrary()
})
afterEach(() => Promise.all(open.splice(0).map((cards) => cards.close())))
afterAll(() => lib.close())

/** Draft cards of their own, with the real computation counted; `refuse` first ones find it busy. */
function draftCards(settings: { settle: number; latest: number; refuse?: number }) {
  const count = { cards: 0, refused: 0 }
  const compute: Compute = {
    ...lib.compute,
    card: async (document, options) => {
      expect(options?.background).toBe(true)
      if (count.refused < (settings.refuse ?? 0)) {
        count.refused++
        return { ok: false, reason: 'busy' }
      }
      count.cards++
      return lib.compute.card(document, options)
    },
  }
  const errors: unknown[] = []
  const report = (error: unknown) => void errors.push(error)
  const cards = createDraftCards({ db: lib.db, compute, ...settings, now: () => new Date(), report })
  open.push(cards)
  return { cards, count, errors }
}

const kindOf = async (code: string) => (await lib.head(lib.tabs.rhea, code)).draft?.kind
const turnHard = (code: string) => lib.edit(code, lib.who.cora.id, retype(oscillator({ hard: true }).equations))

test('a burst of edits costs one card', async () => {
  const code = await lib.makePage()
  const { id } = await lib.rowOf(code)
  const { cards, count } = draftCards({ settle: 300, latest: 60_000 })
  await turnHard(code)
  for (let i = 0; i < 5; i++) cards.changed(id)
  await vi.waitFor(async () => expect(await kindOf(code)).toBe('hard'), 30_000)
  expect(count.cards).toBe(1)
})

test('somebody who never stops typing does not keep the card from being computed', async () => {
  const code = await lib.makePage()
  const { id } = await lib.rowOf(code)
  const { cards, count } = draftCards({ settle: 60_000, latest: 300 })
  await vi.waitFor(
    () => {
      cards.changed(id)
      expect(count.cards).toBeGreaterThan(0)
    },
    { timeout: 30_000, interval: 50 },
  )
})

test('what changed while nobody listened is due at the next start, and only that', async () => {
  const code = await lib.makePage()
  const other = await lib.makePage()
  const { cards, count } = draftCards({ settle: 60_000, latest: 60_000 })
  await cards.catchUp()
  expect(await listDueDrafts(lib.db)).toEqual([])
  await turnHard(code)
  const { id } = await lib.rowOf(code)
  expect(await listDueDrafts(lib.db)).toEqual([id])
  const before = count.cards
  await cards.catchUp()
  expect(count.cards).toBe(before + 1)
  expect(await kindOf(code)).toBe('hard')
  expect(await kindOf(other)).toBe('soft')
})

test('a draft that found the computation busy is tried again', async () => {
  const code = await lib.makePage()
  const { id } = await lib.rowOf(code)
  const { cards, count, errors } = draftCards({ settle: 50, latest: 1000, refuse: 2 })
  cards.changed(id)
  await vi.waitFor(async () => expect(await kindOf(code)).toBe('soft'), 30_000)
  expect(count).toEqual({ cards: 1, refused: 2 })
  expect(errors).toEqual([])
})

test('a card that comes after the draft’s generation ended is not written over the new one', async () => {
  const code = await lib.makePage()
  const { id } = await lib.rowOf(code)
  let release = () => {}
  const held = new Promise<void>((resolve) => {
    release = resolve
  })
  const compute: Compute = {
    ...lib.compute,
    card: async (document, options) => {
      await held
      return lib.compute.card(document, options)
    },
  }
  const cards = createDraftCards({
    db: lib.db,
    compute,
    settle: 1,
    latest: 1,
    now: () => new Date(),
    report: (error) => {
      throw error
    },
  })
  const done = cards.catchUp()
  await turnHard(code)
  await lib.approve(lib.tabs.mara, code, await lib.send(lib.tabs.cora, code))
  const approved = await lib.rowOf(code)
  release()
  await done
  await cards.close()
  const { draftCardId, draftDigest, draftSummary, generation } = await lib.rowOf(code)
  expect({ draftCardId, draftDigest, draftSummary, generation }).toEqual({
    draftCardId: approved.draftCardId,
    draftDigest: approved.draftDigest,
    draftSummary: approved.draftSummary,
    generation: 2,
  })
  expect(id).toBe(approved.id)
})

test('a page whose draft cannot be read is reported and disturbs no other', async () => {
  const broken = await lib.makePage()
  const fine = await lib.makePage()
  await lib.edit(fine, lib.who.cora.id, setParameter('mu', 'high', '2'))
  const { id } = await lib.rowOf(broken)
  await lib.db.execute(`delete from page_snapshots where page_id = ${id}`)
  const { cards, errors } = draftCards({ settle: 1, latest: 1 })
  await cards.catchUp()
  expect(errors).toHaveLength(1)
  expect(await kindOf(fine)).toBe('soft')
})
