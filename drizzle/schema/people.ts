import {
  boolean,
  index,
  int,
  mysqlEnum,
  mysqlTable,
  primaryKey,
  smallint,
  text,
  uniqueIndex,
  varchar,
} from 'drizzle-orm/mysql-core'
import { memberRoles } from '#shared/api/roles.ts'
import { idColumn, jsonDocument, kept, primaryId, time } from './columns.ts'
import { groups } from './groups.ts'

export const people = mysqlTable(
  'people',
  {
    id: primaryId(),
    email: varchar('email', { length: 254 }).notNull(),
    name: varchar('name', { length: 80 }).notNull(),
    passwordHash: varchar('password_hash', { length: 255 }),
    administrator: boolean('administrator').notNull().default(false),
    disabled: boolean('disabled').notNull().default(false),
    /** Raised by signing out everywhere, a new password and disabling; a session of an older epoch is void. */
    epoch: int('epoch').notNull().default(1),
    createdAt: time('created_at').notNull(),
  },
  (table) => [uniqueIndex('people_email').on(table.email)],
)

/** The session store's own table (express-mysql-session). */
export const sessions = mysqlTable(
  'sessions',
  {
    sessionId: varchar('session_id', { length: 128 }).primaryKey(),
    expires: int('expires', { unsigned: true }).notNull(),
    data: text('data'),
  },
  (table) => [index('sessions_expires').on(table.expires)],
)

export const signIns = mysqlTable(
  'sign_ins',
  {
    id: primaryId(),
    personId: idColumn('person_id')
      .notNull()
      .references(() => people.id, kept),
    sessionHash: varchar('session_hash', { length: 64 }).notNull(),
    at: time('at').notNull(),
    lastSeen: time('last_seen').notNull(),
    endedAt: time('ended_at'),
    userAgent: varchar('user_agent', { length: 200 }).notNull().default(''),
  },
  (table) => [index('sign_ins_person').on(table.personId, table.at)],
)

/** One-time links (set-up, invitation, new password): only the SHA-256 of the secret is kept. */
export const oneTimeLinks = mysqlTable(
  'one_time_links',
  {
    id: primaryId(),
    kind: mysqlEnum('kind', ['setup', 'invitation', 'password']).notNull(),
    tokenHash: varchar('token_hash', { length: 64 }).notNull(),
    personId: idColumn('person_id').references(() => people.id, kept),
    createdAt: time('created_at').notNull(),
    expiresAt: time('expires_at').notNull(),
    usedAt: time('used_at'),
  },
  (table) => [uniqueIndex('one_time_links_token').on(table.tokenHash)],
)

export const invitations = mysqlTable(
  'invitations',
  {
    id: primaryId(),
    groupId: idColumn('group_id')
      .notNull()
      .references(() => groups.id, kept),
    linkId: idColumn('link_id')
      .notNull()
      .references(() => oneTimeLinks.id, kept),
    email: varchar('email', { length: 254 }).notNull(),
    name: varchar('name', { length: 80 }),
    role: mysqlEnum('role', memberRoles).notNull(),
    invitedBy: idColumn('invited_by')
      .notNull()
      .references(() => people.id, kept),
    createdAt: time('created_at').notNull(),
    revokedAt: time('revoked_at'),
  },
  (table) => [index('invitations_group').on(table.groupId)],
)

/** The answer once given to an Idempotency-Key of a person, so that a repeated request makes nothing twice. */
export const idempotencyKeys = mysqlTable(
  'idempotency_keys',
  {
    personId: idColumn('person_id')
      .notNull()
      .references(() => people.id, kept),
    key: varchar('idempotency_key', { length: 100 }).notNull(),
    requestHash: varchar('request_hash', { length: 64 }).notNull(),
    status: smallint('status'),
    answer: jsonDocument('answer'),
    createdAt: time('created_at').notNull(),
  },
  (table) => [primaryKey({ columns: [table.personId, table.key] })],
)
