import { z } from 'zod'

const request = z.strictObject({ id: z.number(), job: z.unknown() })

/**
 * The child's end of pool.ts: answers jobs one after another until the parent is gone. `work` may throw; the parent
 * then hears `failed` and this child lives on. Call it once all modules are loaded.
 */
export function serveJobs(work: (job: unknown) => unknown): void {
  const send = (message: object) => {
    if (process.connected) process.send?.(message)
  }
  process.on('message', async (received) => {
    const { id, job } = request.parse(received)
    try {
      send({ id, answer: await work(job) })
    } catch (error) {
      send({ id, failed: error instanceof Error ? error.message : String(error) })
    }
  })
  process.on('disconnect', () => process.exit(0))
  send({ ready: true })
}
