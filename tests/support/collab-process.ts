import { z } from 'zod'
import { createDatabase } from '#drizzle/client.ts'
import { changedLimits, startCollab } from './collab-server.ts'

/**
 * The co-editing server as a process of its own, to be killed and stopped by tests (support/collab-child.ts). It loads
 * everything first and listens when its parent says so, so that a standby takes over at once. SIGTERM stops it as the
 * product does.
 */
const settings = z.object({ databaseUrl: z.string(), people: z.array(z.number()), roomy: z.boolean() })
const order = z.discriminatedUnion('order', [
  z.object({ order: z.literal('listen'), port: z.number() }),
  z.object({ order: z.literal('memory') }),
])

const { databaseUrl, people, roomy } = settings.parse(JSON.parse(process.argv[2] ?? ''))
const database = createDatabase(databaseUrl)
const limits = changedLimits((own) => {
  own.handshake.perSecond = 10_000
  own.socket.heartbeat = 2000
  if (!roomy) return
  own.strikes = 1_000_000
  own.rate.frames = { perSecond: 1e6, burst: 1e6 }
  own.rate.bytes = { perSecond: 1e9, burst: 1e9 }
})
let server: Awaited<ReturnType<typeof startCollab>> | null = null

process.on('message', async (message) => {
  const told = order.parse(message)
  if (told.order === 'listen') {
    server = await startCollab(database.db, { port: told.port, limits })
    for (const id of people) server.signIn(id)
    process.send?.({ port: server.port })
  } else {
    globalThis.gc?.()
    process.send?.({ rss: process.memoryUsage().rss, errors: server?.errors.map(({ message: text }) => text) ?? [] })
  }
})
process.on('SIGTERM', async () => {
  await server?.close()
  await database.close()
  process.exit(0)
})
process.on('disconnect', () => process.exit(1))
process.send?.({ ready: true })
