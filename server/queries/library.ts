import { type SQL, sql } from 'drizzle-orm'
import { z } from 'zod'
import type { Queryable } from '#drizzle/client.ts'

/** Who looks, and for what. */
export interface LibrarySearch {
  personId: number | null
  /** All of them have to be found. `short` ones only as whole words. */
  terms: readonly { text: string; spelledOut: string; short: boolean }[]
}
export interface Facets {
  onset?: readonly string[]
  state?: readonly string[]
  group?: readonly string[]
}
export type Sort = 'changed' | 'code' | 'title'
/** Where the page before ended: the sorted value of its last row, and its id. */
export interface After {
  value: string
  id: number
}

const like = (text: string) => `%${text.replace(/[\\%_]/g, (character) => `\\${character}`)}%`

/** Everything a row may be found by, for this viewer: the words of a draft only for members of its group. */
const haystack = sql`concat_ws(' ', '', p.code, p.title, p.summary, p.field, p.public_words, if(m.role is null, '', p.draft_words), '')`

function found({ text, spelledOut, short }: LibrarySearch['terms'][number]): SQL {
  const one = (term: string) => sql`${haystack} like ${short ? like(` ${term} `) : like(term)}`
  return spelledOut === text ? one(text) : sql`(${one(text)} or ${one(spelledOut)})`
}

/**
 * Every page the viewer may see, with what the viewer may know of it. For members of its group everything; for others a
 * page that was public, if it is open (or open to signed-in people and the viewer is one), and of it only what is public.
 */
function visible({ personId, terms }: LibrarySearch): SQL {
  const signedIn = personId === null ? sql`false` : sql`true`
  const matches = terms.map((term) => sql` and ${found(term)}`)
  return sql`
    select p.id, p.code, p.title, p.summary, p.field, g.slug as group_slug, g.name as group_name,
      m.role is not null as member, p.in_force_id, f.card_summary as public_summary, p.draft_summary,
      case
        when p.in_force_id is not null then 'in-force'
        when m.role is not null and p.in_review_id is not null then 'in-review'
        when p.ever_public = 1 then 'withdrawn'
        when exists (select 1 from revisions r where r.page_id = p.id and r.state = 'returned') then 'returned'
        else 'draft'
      end as state,
      case
        when p.in_force_id is not null then json_value(f.card_summary, '$.kind')
        when m.role is not null then json_value(p.draft_summary, '$.kind')
      end as kind,
      case
        when m.role is not null then greatest(p.changed_at, p.draft_changed_at)
        else coalesce(f.settled_at, (select max(r.settled_at) from revisions r where r.page_id = p.id and r.state in ('withdrawn', 'superseded')))
      end as changed
    from pages p
    join \`groups\` g on g.id = p.group_id
    left join memberships m on m.group_id = p.group_id and m.person_id = ${personId ?? 0}
    left join revisions f on f.id = p.in_force_id
    where p.removed_at is null
      and (m.role is not null
        or (p.ever_public = 1 and (p.access = 'open' or (p.access = 'signed-in' and ${signedIn}))))
      ${sql.join(matches)}`
}

const among = (column: SQL, values: readonly string[] | undefined): SQL =>
  values === undefined || values.length === 0
    ? sql``
    : sql` and ${column} in (${sql.join(
        values.map((value) => sql`${value}`),
        sql`, `,
      )})`

const prefixOf = sql`substring_index(v.code, '-', 1)`
const numberOf = sql`cast(substring_index(v.code, '-', -1) as unsigned)`
const orders: Record<Sort, SQL> = {
  changed: sql`v.changed desc, v.id desc`,
  code: sql`${prefixOf}, ${numberOf}`,
  title: sql`v.title, v.id`,
}

function beyond(sort: Sort, { value, id }: After): SQL {
  if (sort === 'changed') return sql` and (v.changed < ${value} or (v.changed = ${value} and v.id < ${id}))`
  if (sort === 'title') return sql` and (v.title > ${value} or (v.title = ${value} and v.id > ${id}))`
  const [prefix = '', number = ''] = value.split('-')
  return sql` and (${prefixOf} > ${prefix} or (${prefixOf} = ${prefix} and ${numberOf} > ${Number(number)}))`
}

const json = z.preprocess((value) => (typeof value === 'string' ? JSON.parse(value) : value), z.unknown())
const row = z.object({
  id: z.number(),
  code: z.string(),
  title: z.string(),
  summary: z.string(),
  field: z.string(),
  group_slug: z.string(),
  group_name: z.string(),
  member: z.number(),
  in_force_id: z.number().nullable(),
  public_summary: json,
  draft_summary: json,
  state: z.string(),
  mark: z.string().nullable(),
  /** As the database writes it, for the cursor: exact. */
  changed: z.string(),
})
export type LibraryRow = z.infer<typeof row>

/** One page of rows. */
export async function listRows(
  db: Queryable,
  search: LibrarySearch,
  of: { facets: Facets; sort: Sort; after: After | null; limit: number },
): Promise<LibraryRow[]> {
  const { facets, sort, after, limit } = of
  const [rows] = await db.execute(sql`
    select v.id, v.code, v.title, v.summary, v.field, v.group_slug, v.group_name, v.member, v.in_force_id,
      v.public_summary, v.draft_summary, v.state, cast(v.changed as char) as changed,
      (select concat_ws('.', r.major, r.minor, r.patch) from revisions r
        where r.page_id = v.id and r.state = v.state order by r.number desc limit 1) as mark
    from (${visible(search)}) v
    where true${among(sql`v.kind`, facets.onset)}${among(sql`v.state`, facets.state)}${among(sql`v.group_slug`, facets.group)}
      ${after === null ? sql`` : beyond(sort, after)}
    order by ${orders[sort]}
    limit ${limit}`)
  return z.array(row).parse(rows)
}

const tally = z.object({
  state: z.string(),
  kind: z.string().nullable(),
  group_slug: z.string(),
  group_name: z.string(),
  count: z.coerce.number(),
})
export type Tally = z.infer<typeof tally>

/** How many rows of each state, kind and group the search finds, facets aside. */
export async function countRows(db: Queryable, search: LibrarySearch): Promise<Tally[]> {
  const [rows] = await db.execute(sql`
    select v.state, v.kind, v.group_slug, v.group_name, count(*) as count
    from (${visible(search)}) v
    group by v.state, v.kind, v.group_slug, v.group_name`)
  return z.array(tally).parse(rows)
}
