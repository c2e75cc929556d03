import { eq } from 'drizzle-orm'
import type { Queryable } from '#drizzle/client.ts'
import { settings } from '#drizzle/schema/index.ts'

/** A small fact about this installation, or null; whoever reads it parses it. */
export async function readSetting(db: Queryable, name: string): Promise<unknown> {
  const [row] = await db.select({ value: settings.value }).from(settings).where(eq(settings.name, name)).limit(1)
  return row?.value ?? null
}

/** Writes a small fact, over an older one of that name. */
export async function writeSetting(db: Queryable, name: string, value: object): Promise<void> {
  await db.insert(settings).values({ name, value }).onDuplicateKeyUpdate({ set: { value } })
}

export async function removeSetting(db: Queryable, name: string): Promise<void> {
  await db.delete(settings).where(eq(settings.name, name))
}
