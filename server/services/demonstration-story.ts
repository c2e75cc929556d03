import type { Database } from '#drizzle/client.ts'
import {
  type DemonstrationSource,
  demonstrationPassword,
  type Event,
  groups,
  type PersonKey,
  type pages,
  readDemonstrationModel,
} from '#drizzle/seed/demonstration.ts'
import type { Compute } from '#server/compute/compute.ts'
import * as sourceQueries from '#server/queries/sources.ts'
import type { RevisionHead } from '#shared/api/pages.ts'
import { mayInGroup, mayInPage, type PageAct } from '#shared/api/roles.ts'
import { modelDocument } from '#shared/model/document.ts'
import { draftFromDocument } from '#shared/model/draft.ts'
import { create } from './create-page.ts'
import { demonstrationRequest, type PersonIds, viewerOf } from './demonstration-people.ts'
import { loadGroupContext, loadPageContext, type PageContext } from './page-context.ts'
import { changeAccess } from './pages.ts'
import { rewriteDraft } from './rewrite-draft.ts'
import { send } from './send-revision.ts'
import { confirmPassword } from './session.ts'
import { approve, giveBackWithRemarks } from './settle-revision.ts'
import { fromForm } from './source-input.ts'
import * as sources from './sources.ts'

export type DemonstrationPage = (typeof pages)[number]
export interface Teller {
  db: Database
  compute: Compute
  idOf: PersonIds
}

const requestId = demonstrationRequest

/** The page as the person meets it; an act that the policy table refuses them is a fault of the story. */
async function meet(teller: Teller, code: string, by: PersonKey, act: PageAct): Promise<PageContext> {
  const context = await loadPageContext(teller.db, await viewerOf(teller.db, teller.idOf(by)), { code })
  if (!context || !mayInPage(act, context.role, context.state)) throw new Error(`${by} may not ${act} on ${code}.`)
  return context
}

/** The page is made by who wrote it, from its first model. */
export async function makePage(teller: Teller, page: DemonstrationPage, now: Date): Promise<void> {
  const { db, compute, idOf } = teller
  const personId = idOf(page.by)
  const group = await loadGroupContext(db, await viewerOf(db, personId), page.group)
  if (!group || !mayInGroup('page:create', group.role)) throw new Error(`${page.by} may not make ${page.code}.`)
  const document = modelDocument.parse(readDemonstrationModel(page.model))
  const [prefix = '', number = ''] = page.code.split('-')
  const title = { title: document.title, summary: document.summary, field: document.field }
  const made = { groupId: group.id, prefix, number: Number(number), ...title, document, personId, now, requestId }
  await create(db, compute, made)
}

/** A maintainer of the group opens the page to more readers. */
export async function openPage(teller: Teller, page: DemonstrationPage, now: Date): Promise<void> {
  const maintainer = groups.find((one) => one.slug === page.group)?.members.find(([, role]) => role === 'maintainer')
  if (!maintainer) throw new Error(`${page.group} has no maintainer.`)
  const context = await meet(teller, page.code, maintainer[0], 'page:settings')
  const seen = { ifMatch: `${context.version}.`, access: page.access }
  await changeAccess(teller.db, context, { ...seen, personId: teller.idOf(maintainer[0]), now, requestId })
}

/** A source is put on the page and tied to the parameter it gives. */
export async function bringSource(
  teller: Teller,
  code: string,
  source: DemonstrationSource & { by: PersonKey },
  now: Date,
): Promise<void> {
  const { db, idOf } = teller
  const { type, title, year, publisher, parameter, by } = source
  const actor = { personId: idOf(by), now, requestId }
  const context = await meet(teller, code, by, 'source:write')
  await sources.add(db, context, {
    ...actor,
    sources: fromForm({ type, title, year, publisher, authors: [] }),
  })
  if (!parameter) return
  const added = (await sourceQueries.listLinks(db, context.id)).at(-1)
  if (!added) throw new Error(`${title} is not on ${code}.`)
  const { symbol, ...place } = parameter
  await sources.link(db, context, {
    ...actor,
    sourceId: added.source.id,
    target: { kind: 'parameter', symbol },
    ...place,
  })
}

/** One event of a page's story. `inReview` is the revision that was sent last. */
export async function tell(
  teller: Teller,
  code: string,
  event: Event,
  inReview: RevisionHead | null,
  now: Date,
): Promise<RevisionHead | null> {
  const { db, compute, idOf } = teller
  const personId = idOf(event.by)
  const actor = { personId, now, requestId }
  if (event.act === 'edit') {
    const { id: pageId } = await meet(teller, code, event.by, 'draft:write')
    const content = draftFromDocument(modelDocument.parse(readDemonstrationModel(event.model)))
    await rewriteDraft(db, { pageId, personId, content, now })
    return null
  }
  if (event.act === 'send') {
    const { id: pageId, generation } = await meet(teller, code, event.by, 'revision:send')
    return send(db, compute, { ...actor, pageId, generation, summary: event.summary })
  }
  if (!inReview) throw new Error(`Nothing of ${code} is in review.`)
  const { mark, etag } = inReview
  if (event.act === 'approve') {
    const { id: pageId } = await meet(teller, code, event.by, 'revision:approve')
    const confirm = () => confirmPassword(db, { personId, password: demonstrationPassword })
    return approve(db, { ...actor, pageId, mark, ifMatch: etag, confirm })
  }
  const { id: pageId } = await meet(teller, code, event.by, 'revision:return')
  const { remark: text, line, symbol } = event
  return giveBackWithRemarks(db, { ...actor, pageId, mark, ifMatch: etag, remarks: [{ text, line, symbol }] })
}
