import { and, desc, eq, inArray, sql } from 'drizzle-orm'
import { alias } from 'drizzle-orm/mysql-core'
import type { Queryable } from '#drizzle/client.ts'
import { groups, memberships, pages, revisions } from '#drizzle/schema/index.ts'
import type { RevisionState } from '#shared/api/pages.ts'

const inForce = alias(revisions, 'in_force')

/** Revisions in these states on pages of the person's groups, with the person's role there. Newest first. */
export async function listOfGroups(
  db: Queryable,
  personId: number,
  of: { states: readonly RevisionState[]; limit: number },
) {
  return db
    .select({
      revisionId: revisions.id,
      code: pages.code,
      title: pages.title,
      group: { slug: groups.slug, name: groups.name },
      role: memberships.role,
      inForceSummary: inForce.cardSummary,
    })
    .from(revisions)
    .innerJoin(pages, eq(pages.id, revisions.pageId))
    .innerJoin(groups, eq(groups.id, pages.groupId))
    .innerJoin(memberships, and(eq(memberships.groupId, pages.groupId), eq(memberships.personId, personId)))
    .leftJoin(inForce, eq(inForce.id, pages.inForceId))
    .where(inArray(revisions.state, [...of.states]))
    .orderBy(desc(sql`coalesce(${revisions.settledAt}, ${revisions.sentAt})`), desc(revisions.id))
    .limit(of.limit)
}
