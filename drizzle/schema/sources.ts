import { index, int, mysqlEnum, mysqlTable, uniqueIndex, varchar } from 'drizzle-orm/mysql-core'
import { linkLabels } from '#shared/model/locators.ts'
import { idColumn, jsonDocument, kept, primaryId, time } from './columns.ts'
import { groups } from './groups.ts'
import { pages } from './pages.ts'
import { people } from './people.ts'

/** A group's sources; `doi` in lower case, one a group. `key` is the id in model documents, one a group. */
export const sources = mysqlTable(
  'sources',
  {
    id: primaryId(),
    groupId: idColumn('group_id')
      .notNull()
      .references(() => groups.id, kept),
    key: varchar('citation_key', { length: 120 }).notNull(),
    csl: jsonDocument('csl').notNull(),
    doi: varchar('doi', { length: 200 }),
    /** For search: authors, title, container, year in one line. */
    words: varchar('words', { length: 1000 }).notNull().default(''),
    addedBy: idColumn('added_by')
      .notNull()
      .references(() => people.id, kept),
    addedAt: time('added_at').notNull(),
  },
  (table) => [
    uniqueIndex('sources_doi').on(table.groupId, table.doi),
    uniqueIndex('sources_key').on(table.groupId, table.key),
  ],
)

/** A link of a draft (revision links are frozen inside the document). `target` page means: attached to the page as a whole. */
export const sourceLinks = mysqlTable(
  'source_links',
  {
    id: primaryId(),
    pageId: idColumn('page_id')
      .notNull()
      .references(() => pages.id, kept),
    sourceId: idColumn('source_id')
      .notNull()
      .references(() => sources.id, kept),
    target: mysqlEnum('target', ['page', 'parameter', 'line']).notNull(),
    symbol: varchar('symbol', { length: 64 }),
    line: int('line'),
    anchor: varchar('anchor', { length: 200 }),
    label: mysqlEnum('label', linkLabels),
    locator: varchar('locator', { length: 60 }),
    quoted: varchar('quoted', { length: 200 }),
    addedBy: idColumn('added_by')
      .notNull()
      .references(() => people.id, kept),
    addedAt: time('added_at').notNull(),
    removedAt: time('removed_at'),
  },
  (table) => [index('source_links_page').on(table.pageId)],
)
