import { mysqlEnum, mysqlTable, primaryKey, uniqueIndex, varchar } from 'drizzle-orm/mysql-core'
import { memberRoles } from '#shared/api/roles.ts'
import { idColumn, kept, primaryId, time } from './columns.ts'
import { people } from './people.ts'

export const groups = mysqlTable(
  'groups',
  {
    id: primaryId(),
    slug: varchar('slug', { length: 60 }).notNull(),
    name: varchar('name', { length: 60 }).notNull(),
    createdAt: time('created_at').notNull(),
  },
  (table) => [uniqueIndex('groups_slug').on(table.slug)],
)

/** A prefix of page codes belongs to one group for good. */
export const groupPrefixes = mysqlTable('group_prefixes', {
  prefix: varchar('prefix', { length: 4 }).primaryKey(),
  groupId: idColumn('group_id')
    .notNull()
    .references(() => groups.id, kept),
})

export const memberships = mysqlTable(
  'memberships',
  {
    groupId: idColumn('group_id')
      .notNull()
      .references(() => groups.id, kept),
    personId: idColumn('person_id')
      .notNull()
      .references(() => people.id, kept),
    role: mysqlEnum('role', memberRoles).notNull(),
    since: time('since').notNull(),
  },
  (table) => [primaryKey({ columns: [table.groupId, table.personId] })],
)
