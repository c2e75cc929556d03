import { createDraft } from '#collab/persistence.ts'
import type { Database } from '#drizzle/client.ts'
import type { Compute } from '#server/compute/compute.ts'
import { AppError } from '#server/http/app-error.ts'
import * as queries from '#server/queries/pages.ts'
import type { ModelDocument } from '#shared/model/document.ts'
import { draftFromDocument } from '#shared/model/draft.ts'
import * as cards from './cards.ts'
import { firstModel } from './first-model.ts'
import { record } from './log.ts'
import { type Actor, titleBlockOf } from './pages.ts'
import { bringSources } from './source-import.ts'

/**
 * Makes a page with its first draft: the given model document, else a small example. Its code is the next free number of
 * the prefix, which is never given again.
 *
 * @throws {AppError} `bad-request` for a prefix of another group, `model-refused` for a document with faults.
 */
export async function create(
  db: Database,
  compute: Compute,
  input: Actor & {
    groupId: number
    prefix: string
    /** Of the code; the next free one unless given. A number that was ever given fails. */
    number?: number
    title: string
    summary?: string
    field?: string
    document?: unknown
  },
): Promise<{ id: number; code: string }> {
  const { personId, now, requestId, prefix } = input
  const document = await firstDocument(compute, input)
  return db.transaction(async (tx) => {
    if ((await queries.lockPrefix(tx, prefix)) !== input.groupId) {
      throw new AppError('bad-request', `The prefix ${prefix} does not belong to this group.`, {
        errors: [{ code: 'unknown-prefix', message: 'Choose one of the group’s prefixes.', path: 'prefix' }],
      })
    }
    const number = input.number ?? (await queries.lastNumber(tx, prefix)) + 1
    if (number > 999_999) throw new AppError('bad-request', `Every number of ${prefix} has been given.`)
    const code = `${prefix}-${String(number).padStart(2, '0')}`
    await queries.insertCode(tx, { code, prefix, number, givenAt: now })
    const times = { createdAt: now, changedAt: now, draftChangedAt: now }
    const id = await queries.insertPage(tx, { code, groupId: input.groupId, ...titleBlockOf(document), ...times })
    await createDraft(tx, id, 1, draftFromDocument(document), now)
    await queries.noteWriter(tx, { pageId: id, generation: 1, personId, now })
    await bringSources(tx, { pageId: id, groupId: input.groupId, personId, now, document })
    await record(tx, { at: now, personId, act: 'page:create', target: `page ${code}`, after: { code }, requestId })
    return { id, code }
  })
}

async function firstDocument(
  compute: Compute,
  input: { title: string; summary?: string; field?: string; document?: unknown },
): Promise<ModelDocument> {
  const { title, summary, field } = input
  if (input.document === undefined) return firstModel({ title, summary, field })
  const { document } = await cards.compute(compute, input.document)
  return { ...document, title, ...(summary ? { summary } : {}), ...(field ? { field } : {}) }
}
