import { z } from 'zod'
import type { Queryable } from '#drizzle/client.ts'
import * as queries from '#server/queries/settings.ts'

/** The setting `demonstration`, written by the seed where it loaded the demonstration library into an empty database. */
export const demonstrationSetting = z.object({
  password: z.string(),
  people: z.array(z.object({ name: z.string(), email: z.string(), role: z.string() })),
})
export type Demonstration = z.infer<typeof demonstrationSetting>

/** The accounts to try the product with; null where the demonstration library was not loaded. */
export async function findDemonstration(db: Queryable): Promise<Demonstration | null> {
  const value = await queries.readSetting(db, 'demonstration')
  return value === null ? null : demonstrationSetting.parse(value)
}
