import { index, mysqlTable, varchar } from 'drizzle-orm/mysql-core'
import { idColumn, jsonDocument, kept, primaryId, time } from './columns.ts'
import { people } from './people.ts'

/** Every act: insert only (a trigger sees to it), in the act's own transaction. `hash` covers this row and `previous_hash`, so a changed row breaks the chain. */
export const log = mysqlTable(
  'log',
  {
    id: primaryId(),
    at: time('at').notNull(),
    personId: idColumn('person_id').references(() => people.id, kept),
    act: varchar('act', { length: 60 }).notNull(),
    target: varchar('target', { length: 120 }).notNull(),
    before: jsonDocument('before_value'),
    after: jsonDocument('after_value'),
    requestId: varchar('request_id', { length: 64 }),
    previousHash: varchar('previous_hash', { length: 64 }).notNull(),
    hash: varchar('hash', { length: 64 }).notNull(),
  },
  (table) => [index('log_target').on(table.target, table.id)],
)

/** Small facts about this installation (for instance: the demonstration library was loaded). */
export const settings = mysqlTable('settings', {
  name: varchar('name', { length: 60 }).primaryKey(),
  value: jsonDocument('value').notNull(),
})
