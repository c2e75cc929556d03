import type { Database } from '#drizzle/client.ts'
import { demonstrationPassword, emailOf, type PersonKey, pages, people } from '#drizzle/seed/demonstration.ts'
import type { Compute } from '#server/compute/compute.ts'
import { limits } from '#server/limits.ts'
import * as pageQueries from '#server/queries/pages.ts'
import * as settings from '#server/queries/settings.ts'
import { cardSummary, type RevisionHead } from '#shared/api/pages.ts'
import type { Demonstration } from './demonstration.ts'
import { bringPeople } from './demonstration-people.ts'
import { bringSource, type DemonstrationPage, makePage, openPage, type Teller, tell } from './demonstration-story.ts'
import { createDraftCards, type DraftCards } from './draft-cards.ts'

/** Stands while the library is being loaded: where it is found later, the load was cut off. */
export const loadingSetting = 'demonstration-loading'
const day = 24 * 60 * 60 * 1000
const minute = 60 * 1000
/** When the consortium began, before the first page. */
const foundedDaysAgo = 90

export interface LoadInput {
  /** The present; everything in the library happened so many days before. */
  now: Date
  /** Told one line of progress a page. */
  say: (line: string) => void
}

/** Fills an empty library with the demonstration people, groups and pages, everything by the services that real acts go through. */
export async function loadDemonstration(db: Database, compute: Compute, { now, say }: LoadInput): Promise<void> {
  await settings.writeSetting(db, loadingSetting, { since: now.toISOString() })
  const founded = new Date(now.getTime() - foundedDaysAgo * day)
  const idOf = await bringPeople(db, founded)
  say(`${people.length} people and their groups are there`)
  const draftCards = createDraftCards({
    db,
    compute,
    settle: limits.compute.settle,
    latest: limits.compute.latest,
    now: () => now,
    report: (error) => {
      throw error
    },
  })
  try {
    await playAll({ db, compute, idOf }, draftCards, { now, say })
  } finally {
    await draftCards.close()
  }
  const loaded: Demonstration = {
    password: demonstrationPassword,
    people: people.map(({ key, name, job }) => ({ name, email: emailOf(key), role: job })),
  }
  await db.transaction(async (tx) => {
    await settings.writeSetting(tx, 'demonstration', loaded)
    await settings.removeSetting(tx, loadingSetting)
  })
}

/** One thing that happened to a page, so many days and minutes ago. */
interface Scene {
  page: DemonstrationPage
  at: Date
  play: () => Promise<void>
}

/** All pages' stories in the order of time, so that the log reads as one history. */
async function playAll(teller: Teller, draftCards: DraftCards, { now, say }: LoadInput): Promise<void> {
  const scenes = pages.flatMap((page) => scenesOf(teller, page, now)).sort((a, b) => a.at.getTime() - b.at.getTime())
  let done = 0
  for (const [index, { page, play }] of scenes.entries()) {
    await play()
    if (scenes.slice(index + 1).some((later) => later.page === page)) continue
    await draftCards.catchUp()
    done++
    say(`${await describe(teller.db, page.code)}  (${done} of ${pages.length})`)
  }
}

function scenesOf(teller: Teller, page: DemonstrationPage, now: Date): Scene[] {
  const at = (daysAgo: number, minutes = 0) => new Date(now.getTime() - daysAgo * day + minutes * minute)
  const scene = (time: Date, play: (at: Date) => Promise<void>): Scene => ({ page, at: time, play: () => play(time) })
  const scenes = [scene(at(page.daysAgo), (time) => makePage(teller, page, time))]
  for (const [index, source] of page.sources.entries()) {
    const { by, daysAgo }: { by: PersonKey; daysAgo: number } = source.since ?? page
    scenes.push(scene(at(daysAgo, 20 + index), (time) => bringSource(teller, page.code, { ...source, by }, time)))
  }
  if (page.access !== 'group') scenes.push(scene(at(page.daysAgo, 60), (time) => openPage(teller, page, time)))
  let sent: RevisionHead | null = null
  for (const event of page.story) {
    scenes.push(
      scene(at(event.daysAgo, 90), async (time) => {
        sent = await tell(teller, page.code, event, sent, time)
      }),
    )
  }
  return scenes
}

/** A page in one line of progress. */
async function describe(db: Database, code: string): Promise<string> {
  const page = await pageQueries.findPageByCode(db, code)
  if (!page) throw new Error(`${code} is not there.`)
  const summary = page.draftSummary === null ? null : cardSummary.parse(page.draftSummary)
  const main = summary?.main === null ? undefined : summary?.onsets[summary?.main ?? 0]
  if (!summary) throw new Error(`The card of ${code} could not be computed.`)
  const { symbol, unit } = summary.control
  const where = main
    ? `${summary.kind} onset at ${symbol} = ${[Number(main.p.toPrecision(4)), ...(unit === '1' ? [] : [unit])].join(' ')}`
    : 'no onset'
  return `${code} ${page.title}: ${where}`
}
