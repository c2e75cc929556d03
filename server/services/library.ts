import { z } from 'zod'
import type { Queryable } from '#drizzle/client.ts'
import { AppError } from '#server/http/app-error.ts'
import * as queries from '#server/queries/library.ts'
import {
  type CardSummary,
  cardSummary,
  type listPages,
  onsetKinds,
  type PageRow,
  rowStates,
} from '#shared/api/pages.ts'
import { foldSymbol } from '#shared/model/symbols.ts'
import { termsOf } from './search-words.ts'

type Query = z.output<(typeof listPages)['query']>
type Answer = z.infer<(typeof listPages)['response']>

const kindLabels = { hard: 'Hard', soft: 'Soft', undecided: 'Undecided', none: 'No onset' } as const
const stateLabels = {
  draft: 'Draft',
  'in-review': 'In review',
  returned: 'Returned',
  'in-force': 'In force',
  superseded: 'Superseded',
  withdrawn: 'Withdrawn',
} as const

const cursorShape = z.strictObject({
  sort: z.enum(['changed', 'code', 'title']),
  value: z.string().max(250),
  id: z.number().int(),
})

function readCursor(cursor: string | undefined, sort: Query['sort']): queries.After | null {
  if (cursor === undefined) return null
  let read: unknown
  try {
    read = JSON.parse(Buffer.from(cursor, 'base64url').toString('utf8'))
  } catch {
    read = undefined
  }
  const parsed = cursorShape.safeParse(read)
  if (parsed.success && parsed.data.sort === sort) return parsed.data
  throw new AppError('bad-request', 'This cursor does not belong to this list. Begin at its first page.')
}

const writeCursor = (cursor: z.infer<typeof cursorShape>): string =>
  Buffer.from(JSON.stringify(cursor)).toString('base64url')

/** What the viewer may see of the library, newest change first unless asked otherwise. */
export async function list(db: Queryable, personId: number | null, query: Query): Promise<Answer> {
  const { sort, limit, onset, state, group } = query
  const terms = termsOf(query.q ?? '').map((text) => {
    const spelledOut = foldSymbol(text) ?? text
    return { text, spelledOut, short: [...spelledOut].length < 3 }
  })
  const facets = { onset, state, group }
  const search = { personId, terms }
  const after = readCursor(query.cursor, sort)
  const [rows, tallies] = await Promise.all([
    queries.listRows(db, search, { facets, sort, after, limit: limit + 1 }),
    queries.countRows(db, search),
  ])
  const shown = rows.slice(0, limit)
  const last = rows.length > limit ? shown.at(-1) : undefined
  return {
    pages: shown.map(toPageRow),
    total: tallies.filter((one) => fits(one, facets)).reduce((sum, one) => sum + one.count, 0),
    next: last ? writeCursor({ sort, value: last[sort], id: last.id }) : null,
    facets: facetsOf(tallies, facets),
  }
}

const summaryOf = (stored: unknown): CardSummary | null =>
  stored === null || stored === undefined ? null : cardSummary.parse(stored)

function toPageRow(row: queries.LibraryRow): PageRow {
  const inForce = row.in_force_id === null ? null : summaryOf(row.public_summary)
  const draft = row.member === 1 ? summaryOf(row.draft_summary) : null
  return {
    code: row.code,
    title: row.title,
    summary: row.summary,
    field: row.field,
    group: { slug: row.group_slug, name: row.group_name },
    state: z.enum(rowStates).parse(row.state),
    mark: row.mark,
    changedAt: new Date(`${row.changed.replace(' ', 'T')}Z`).toISOString(),
    card: inForce ?? draft,
    draftKind: inForce && draft && draft.kind !== inForce.kind ? draft.kind : null,
  }
}

const chosen = (values: readonly string[] | undefined, value: string | null) =>
  values === undefined || values.length === 0 || (value !== null && values.includes(value))

function fits(one: queries.Tally, facets: queries.Facets, but?: keyof queries.Facets): boolean {
  return (
    (but === 'onset' || chosen(facets.onset, one.kind)) &&
    (but === 'state' || chosen(facets.state, one.state)) &&
    (but === 'group' || chosen(facets.group, one.group_slug))
  )
}

/** Counts of each value where only the other facets are chosen: what ticking it would show. */
function facetsOf(tallies: readonly queries.Tally[], facets: queries.Facets): Answer['facets'] {
  const count = (facet: keyof queries.Facets, is: (one: queries.Tally) => boolean) =>
    tallies.filter((one) => is(one) && fits(one, facets, facet)).reduce((sum, one) => sum + one.count, 0)
  const groups = [...new Map(tallies.map((one) => [one.group_slug, one.group_name]))]
  const fixed = <Value extends string>(
    facet: 'onset' | 'state',
    values: readonly Value[],
    labels: Record<Value, string>,
    of: (one: queries.Tally) => string | null,
  ) =>
    values
      .filter((value) => tallies.some((one) => of(one) === value))
      .map((value) => ({ value, label: labels[value], count: count(facet, (one) => of(one) === value) }))
  return {
    onset: fixed('onset', onsetKinds, kindLabels, (one) => one.kind),
    state: fixed('state', rowStates, stateLabels, (one) => one.state),
    group: groups
      .sort(([, a], [, b]) => a.localeCompare(b, 'en'))
      .map(([value, label]) => ({ value, label, count: count('group', (one) => one.group_slug === value) })),
  }
}
