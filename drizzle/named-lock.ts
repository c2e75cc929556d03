import { z } from 'zod'
import type { Database } from './client.ts'

/**
 * Runs work that only one process may do at a time. The lock belongs to a connection of its own, so it is free again
 * when the process ends, however it ends.
 *
 * @param seconds How long to wait for another process.
 * @throws {Error} if the other one did not finish in time.
 */
export async function withNamedLock<T>(
  db: Database,
  name: string,
  seconds: number,
  work: () => Promise<T>,
): Promise<T> {
  const connection = await db.$client.promise().getConnection()
  try {
    const [rows] = await connection.query("SELECT GET_LOCK(CONCAT(?, ' ', DATABASE()), ?) AS taken", [name, seconds])
    const taken = z.array(z.object({ taken: z.number().nullable() })).parse(rows)[0]?.taken
    if (taken !== 1)
      throw new Error(`Another process is busy with the same database (${name}); try again when it is done.`)
    try {
      return await work()
    } finally {
      await connection.query("DO RELEASE_LOCK(CONCAT(?, ' ', DATABASE()))", [name])
    }
  } finally {
    connection.release()
  }
}
