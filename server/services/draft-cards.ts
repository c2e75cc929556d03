import type { Database } from '#drizzle/client.ts'
import type { Compute } from '#server/compute/compute.ts'
import * as queries from '#server/queries/pages.ts'
import * as cards from './cards.ts'
import { digestOf, type ReadDraftDocument, readDraftDocument } from './draft-document.ts'
import { within } from './pages.ts'
import { wordsOf } from './search-words.ts'

/** Keeps what the library shows of drafts (card, words, title) up to date, after and away from the typing. */
export interface DraftCards {
  /** The page's draft changed: computed once it has settled. */
  changed(pageId: number): void
  /** Computes what is due now, and every draft that changed while nobody listened. For start-up and tests. */
  catchUp(): Promise<void>
  /** Waits for what is being computed; nothing new begins. What was due then is caught up at the next start. */
  close(): Promise<void>
}

export interface DraftCardsOptions {
  db: Database
  compute: Compute
  /** Milliseconds without a change after which a draft counts as settled; at the latest `latest` after the first one. */
  settle: number
  latest: number
  now: () => Date
  report: (error: unknown, pageId: number) => void
}

interface Waiting {
  timer: NodeJS.Timeout
  since: number
}

export function createDraftCards(options: DraftCardsOptions): DraftCards {
  const { settle, latest, report } = options
  const waiting = new Map<number, Waiting>()
  const running = new Map<number, Promise<void>>()
  let closed = false

  /** One computation at a time for a page: the newest state is read when its turn comes. */
  function run(pageId: number): Promise<void> {
    const known = waiting.get(pageId)
    if (known) clearTimeout(known.timer)
    waiting.delete(pageId)
    const before = running.get(pageId) ?? Promise.resolve()
    const work = before
      .then(() => bringUpToDate(options, pageId))
      .then((done) => {
        if (!done) changed(pageId)
      })
      .catch((error: unknown) => report(error, pageId))
      .finally(() => {
        if (running.get(pageId) === work) running.delete(pageId)
      })
    running.set(pageId, work)
    return work
  }

  function changed(pageId: number): void {
    if (closed) return
    const now = performance.now()
    const known = waiting.get(pageId)
    if (known) clearTimeout(known.timer)
    const since = known?.since ?? now
    const timer = setTimeout(() => void run(pageId), Math.max(0, Math.min(settle, since + latest - now)))
    timer.unref()
    waiting.set(pageId, { timer, since })
  }

  return {
    changed,
    async catchUp() {
      const due = new Set([...waiting.keys(), ...(await queries.listDueDrafts(options.db))])
      await Promise.all([...due].map(run))
    },
    async close() {
      closed = true
      for (const { timer } of waiting.values()) clearTimeout(timer)
      waiting.clear()
      await Promise.all(running.values())
    },
  }
}

/**
 * Computes a draft's card and stores it with the page. A draft that makes no model now has none: an older verdict would
 * speak of other equations. Nothing is written over a generation that began meanwhile.
 *
 * @returns false where too many cards wait, so that it has to be tried again.
 */
async function bringUpToDate({ db, compute, now }: DraftCardsOptions, pageId: number): Promise<boolean> {
  const page = await queries.findPage(db, pageId)
  if (!page || page.removedAt !== null) return true
  const { generation, draftChangedAt } = page
  const draft = await readDraftDocument(db, pageId, generation)
  const { content, links } = draft
  if (page.everPublic === 0) await queries.followDraft(db, { pageId, generation }, titleOf(content.settings))
  const draftWords = wordsOf(
    content,
    links.map(({ source }) => source.words),
  )
  const computed = await cardOf(db, compute, draft, now)
  if (!computed) return false
  // Computed of what was committed at draftChangedAt or later: an edit since then comes with its own event.
  await queries.setDraftCard(db, { pageId, generation }, { ...computed, draftWords, draftCardAt: draftChangedAt })
  return true
}

function titleOf(settings: Record<string, string>) {
  const title = within((settings.title ?? '').trim(), 200)
  const words = {
    summary: within((settings.summary ?? '').trim(), 1000),
    field: within((settings.field ?? '').trim(), 80),
  }
  return title === '' ? words : { title, ...words }
}

const none = { draftCardId: null, draftSummary: null, draftDigest: null }

async function cardOf(db: Database, compute: Compute, { document }: ReadDraftDocument, now: () => Date) {
  if (document === null) return none
  const outcome = await compute.card(document, { background: true })
  if (!outcome.ok) return outcome.reason === 'busy' ? null : none
  const draftCardId = await cards.keep(db, outcome.card, now())
  return { draftCardId, draftSummary: outcome.summary, draftDigest: digestOf(document) }
}
