import { eq } from 'drizzle-orm'
import type { Queryable } from '#drizzle/client.ts'
import { settings } from '#drizzle/schema/index.ts'

/** A small fact about this installation, or null; whoever reads it parses it. */
export async function readSetting(db: Queryable, name: string): Promise<unknown> {
  const [row] = await db.select({ value: settings.value }).from(settings).where(eq(settings.name, name)).limit(1)
  return row?.value ?? null
}
