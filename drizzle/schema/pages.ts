import {
  type AnyMySqlColumn,
  index,
  int,
  mysqlEnum,
  mysqlTable,
  primaryKey,
  text,
  uniqueIndex,
  varchar,
} from 'drizzle-orm/mysql-core'
import { readAccess } from '#shared/api/roles.ts'
import { idColumn, jsonDocument, kept, longBlob, primaryId, time } from './columns.ts'
import { groupPrefixes, groups } from './groups.ts'
import { people } from './people.ts'
import { cards, revisions } from './revisions.ts'

/** One row a model page. Title, summary and field follow the draft while nothing is public, then the revision in force. */
export const pages = mysqlTable(
  'pages',
  {
    id: primaryId(),
    code: varchar('code', { length: 11 }).notNull(),
    groupId: idColumn('group_id')
      .notNull()
      .references(() => groups.id, kept),
    title: varchar('title', { length: 200 }).notNull(),
    summary: varchar('summary', { length: 1000 }).notNull().default(''),
    field: varchar('field', { length: 80 }).notNull().default(''),
    access: mysqlEnum('access', readAccess).notNull().default('group'),
    /** The two tables point at each other: the services write these under the page's lock, after the revision is there. */
    inForceId: idColumn('in_force_id').references((): AnyMySqlColumn => revisions.id, kept),
    inReviewId: idColumn('in_review_id').references((): AnyMySqlColumn => revisions.id, kept),
    /** 1 where a revision was ever approved (also when it is withdrawn now). */
    everPublic: int('ever_public').notNull().default(0),
    /** Generation of the draft; a new one begins when a revision is approved or a maintainer renews the draft. */
    generation: int('generation').notNull().default(1),
    /** Raised whenever another process takes the room over; an append with an older epoch is refused. */
    ownerEpoch: int('owner_epoch').notNull().default(0),
    /** The last computed card of the draft, if it makes a model. */
    draftCardId: idColumn('draft_card_id').references((): AnyMySqlColumn => cards.id, kept),
    /** Its summary (shared/api/pages.ts cardSummary). */
    draftSummary: jsonDocument('draft_summary'),
    /** What would be frozen now (revisions.digest), so that a draft can be told from the revision in force; null where it makes no model. */
    draftDigest: varchar('draft_digest', { length: 80 }),
    draftChangedAt: time('draft_changed_at').notNull(),
    /** draft_changed_at of the state that card, summary, digest and words were computed from; older or null: they are due. */
    draftCardAt: time('draft_card_at'),
    /** Symbols, meanings and sources to search by: of the draft (members only), and of what is public. */
    draftWords: text('draft_words').notNull().default(''),
    publicWords: text('public_words').notNull().default(''),
    /** Raised with every change of the page's row that a client may hold: its ETag. */
    version: int('version').notNull().default(1),
    createdAt: time('created_at').notNull(),
    changedAt: time('changed_at').notNull(),
    removedAt: time('removed_at'),
  },
  (table) => [uniqueIndex('pages_code').on(table.code), index('pages_group').on(table.groupId, table.changedAt)],
)

/** Every code ever given; never reused, so rows are only ever inserted. */
export const pageCodes = mysqlTable('page_codes', {
  code: varchar('code', { length: 11 }).primaryKey(),
  prefix: varchar('prefix', { length: 4 })
    .notNull()
    .references(() => groupPrefixes.prefix, kept),
  number: int('number').notNull(),
  givenAt: time('given_at').notNull(),
})

/** Who wrote in the draft, written in the update's own transaction. */
export const draftWriters = mysqlTable(
  'draft_writers',
  {
    pageId: idColumn('page_id')
      .notNull()
      .references(() => pages.id, kept),
    generation: int('generation').notNull(),
    personId: idColumn('person_id')
      .notNull()
      .references(() => people.id, kept),
    first: time('first').notNull(),
    last: time('last').notNull(),
  },
  (table) => [primaryKey({ columns: [table.pageId, table.generation, table.personId] })],
)

/** Append-only updates of the co-edited document. A row is committed before its edit is acknowledged. */
export const pageUpdates = mysqlTable(
  'page_updates',
  {
    seq: idColumn('seq').autoincrement().primaryKey(),
    pageId: idColumn('page_id')
      .notNull()
      .references(() => pages.id, kept),
    generation: int('generation').notNull(),
    ownerEpoch: int('owner_epoch').notNull(),
    personId: idColumn('person_id').references(() => people.id, kept),
    data: longBlob('data').notNull(),
    at: time('at').notNull(),
  },
  (table) => [index('page_updates_page').on(table.pageId, table.generation, table.seq)],
)

/** Compacted states: everything up to and with `upto_seq`. The one before the newest is kept. */
export const pageSnapshots = mysqlTable(
  'page_snapshots',
  {
    id: primaryId(),
    pageId: idColumn('page_id')
      .notNull()
      .references(() => pages.id, kept),
    generation: int('generation').notNull(),
    uptoSeq: idColumn('upto_seq').notNull(),
    data: longBlob('data').notNull(),
    at: time('at').notNull(),
  },
  (table) => [index('page_snapshots_page').on(table.pageId, table.generation, table.uptoSeq)],
)
