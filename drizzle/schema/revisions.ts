import { type AnyMySqlColumn, index, int, mysqlEnum, mysqlTable, uniqueIndex, varchar } from 'drizzle-orm/mysql-core'
import { revisionStates } from '#shared/api/pages.ts'
import { idColumn, jsonDocument, kept, primaryId, time } from './columns.ts'
import { pages } from './pages.ts'
import { people } from './people.ts'

/** A card by what it was computed from; immutable. */
export const cards = mysqlTable(
  'cards',
  {
    id: primaryId(),
    fingerprint: varchar('fingerprint', { length: 80 }).notNull(),
    engine: varchar('engine', { length: 20 }).notNull(),
    parts: varchar('parts', { length: 60 }).notNull(),
    card: jsonDocument('card').notNull(),
    at: time('at').notNull(),
  },
  (table) => [uniqueIndex('cards_key').on(table.fingerprint, table.engine, table.parts)],
)

/** Frozen: `state` moves on, and `settled_at` and `reason` are written with it; a trigger refuses everything else. */
export const revisions = mysqlTable(
  'revisions',
  {
    id: primaryId(),
    pageId: idColumn('page_id')
      .notNull()
      .references(() => pages.id, kept),
    number: int('number').notNull(),
    major: int('major').notNull(),
    minor: int('minor').notNull(),
    patch: int('patch').notNull(),
    state: mysqlEnum('state', revisionStates).notNull(),
    summary: varchar('summary', { length: 500 }).notNull(),
    document: jsonDocument('document').notNull(),
    /** SHA-256 of the RFC 8785 form of the frozen document: what signatures refer to. */
    digest: varchar('digest', { length: 80 }).notNull(),
    fingerprint: varchar('fingerprint', { length: 80 }).notNull(),
    engine: varchar('engine', { length: 20 }).notNull(),
    cardId: idColumn('card_id')
      .notNull()
      .references(() => cards.id, kept),
    /** shared/api/pages.ts cardSummary: what a list row needs. Not with the card: it names meanings, which the fingerprint leaves out. */
    cardSummary: jsonDocument('card_summary').notNull(),
    /** What was in force when it was sent. */
    baseId: idColumn('base_id').references((): AnyMySqlColumn => revisions.id, kept),
    generation: int('generation').notNull(),
    sentBy: idColumn('sent_by')
      .notNull()
      .references(() => people.id, kept),
    sentAt: time('sent_at').notNull(),
    settledAt: time('settled_at'),
    reason: varchar('reason', { length: 1000 }),
  },
  (table) => [
    uniqueIndex('revisions_number').on(table.pageId, table.number),
    uniqueIndex('revisions_mark').on(table.pageId, table.major, table.minor, table.patch),
    index('revisions_state').on(table.state, table.sentAt),
  ],
)

/** Only ever inserted. */
export const signatures = mysqlTable(
  'signatures',
  {
    id: primaryId(),
    revisionId: idColumn('revision_id')
      .notNull()
      .references(() => revisions.id, kept),
    personId: idColumn('person_id')
      .notNull()
      .references(() => people.id, kept),
    meaning: mysqlEnum('meaning', ['written', 'checked', 'approved', 'withdrawn']).notNull(),
    digest: varchar('digest', { length: 80 }).notNull(),
    at: time('at').notNull(),
  },
  (table) => [uniqueIndex('signatures_once').on(table.revisionId, table.personId, table.meaning)],
)

export const remarks = mysqlTable(
  'remarks',
  {
    id: primaryId(),
    revisionId: idColumn('revision_id')
      .notNull()
      .references(() => revisions.id, kept),
    authorId: idColumn('author_id')
      .notNull()
      .references(() => people.id, kept),
    /** Line or parameter it speaks of; both null: the whole revision. */
    line: int('line'),
    symbol: varchar('symbol', { length: 64 }),
    text: varchar('text', { length: 4000 }).notNull(),
    at: time('at').notNull(),
  },
  (table) => [index('remarks_revision').on(table.revisionId)],
)
