import type { Queryable } from '#drizzle/client.ts'
import * as queries from '#server/queries/viewer.ts'
import {
  type GroupRole,
  type MemberRole,
  type PageRole,
  type PageState,
  pageRole,
  pageState,
  type ReadAccess,
} from '#shared/api/roles.ts'
import type { Viewer } from './viewer.ts'

type PageRow = NonNullable<Awaited<ReturnType<typeof queries.findPage>>>['row']

/** A page as one viewer meets it. */
export interface PageContext {
  id: number
  code: string
  groupId: number
  groupSlug: string
  groupName: string
  access: ReadAccess
  role: PageRole
  state: PageState
  /** Raised with every change of the row: the page's ETag. */
  version: number
  generation: number
  inForceId: number | null
  inReviewId: number | null
  row: PageRow
}

/** A group as one viewer meets it. `role` is the membership, else administrator, else outsider or anonymous. */
export interface GroupContext {
  id: number
  slug: string
  name: string
  role: GroupRole
  memberRole: MemberRole | null
  administrator: boolean
}

/** The state of a page's row (shared/api/roles.ts). */
export const stateOfRow = (row: PageRow): PageState =>
  pageState({
    removed: row.removedAt !== null,
    inForce: row.inForceId !== null,
    everPublic: row.everPublic > 0,
    inReview: row.inReviewId !== null,
  })

function contextOf(found: NonNullable<Awaited<ReturnType<typeof queries.findPage>>>, signedIn: boolean): PageContext {
  const { row, groupSlug, groupName, memberRole } = found
  return {
    id: row.id,
    code: row.code,
    groupId: row.groupId,
    groupSlug,
    groupName,
    access: row.access,
    role: pageRole({ signedIn, member: memberRole }, row.access),
    state: stateOfRow(row),
    version: row.version,
    generation: row.generation,
    inForceId: row.inForceId,
    inReviewId: row.inReviewId,
    row,
  }
}

/** The page with the viewer's role in it, or null where there is none of that code. Decides nothing: whoever asks checks the policy. */
export async function loadPageContext(
  db: Queryable,
  viewer: Viewer,
  of: { code: string } | { id: number },
): Promise<PageContext | null> {
  const found = await queries.findPage(db, of, viewer.person?.id ?? null)
  return found ? contextOf(found, viewer.person !== null) : null
}

/**
 * What a person is to a page, for the co-editing socket. Null where there is no such page, or the person is disabled or
 * of another epoch than the socket began with.
 */
export async function loadPageAccess(
  db: Queryable,
  input: { personId: number; epoch: number; pageId: number },
): Promise<PageContext | null> {
  const person = await queries.findPersonState(db, input.personId)
  if (!person || person.disabled || person.epoch !== input.epoch) return null
  const found = await queries.findPage(db, { id: input.pageId }, input.personId)
  return found ? contextOf(found, true) : null
}

/** The group with the viewer's role in it, or null where there is none. */
export async function loadGroupContext(db: Queryable, viewer: Viewer, slug: string): Promise<GroupContext | null> {
  const found = await queries.findGroup(db, slug, viewer.person?.id ?? null)
  if (!found) return null
  const administrator = viewer.siteRole === 'administrator'
  const outside: GroupRole = viewer.person === null ? 'anonymous' : administrator ? 'administrator' : 'outsider'
  return { ...found, role: found.memberRole ?? outside, administrator }
}
