import { bigint, customType, datetime } from 'drizzle-orm/mysql-core'

/** Ids are BIGINT, handled as numbers (far below 2^53). */
export const idColumn = (name: string) => bigint(name, { mode: 'number' })
export const primaryId = () => bigint('id', { mode: 'number' }).autoincrement().primaryKey()

/** DATETIME(3), UTC. */
export const time = (name: string) => datetime(name, { mode: 'date', fsp: 3 })

/**
 * A JSON document. MariaDB's JSON is LONGTEXT; the driver hands it back as an object in plain queries and as text through
 * functions, so both are taken. The value is `unknown` on purpose: whoever reads it parses it with zod.
 */
export const jsonDocument = customType<{ data: unknown; driverData: string }>({
  dataType: () => 'json',
  toDriver: (value) => JSON.stringify(value),
  fromDriver: (value: unknown) => (typeof value === 'string' ? (JSON.parse(value) as unknown) : value),
})

export const longBlob = customType<{ data: Uint8Array; driverData: Buffer }>({
  dataType: () => 'longblob',
  toDriver: (value) => Buffer.from(value.buffer, value.byteOffset, value.byteLength),
  fromDriver: (value) => new Uint8Array(value.buffer, value.byteOffset, value.byteLength),
})

/** Rule of every foreign key: what something else speaks of stays. */
export const kept = { onDelete: 'restrict', onUpdate: 'restrict' } as const
