import type { Server } from 'node:http'
import type { Logger } from 'pino'
import { Late, within } from '#collab/within.ts'

export interface Stoppable {
  logger: Logger
  server: Server
  /** Milliseconds that running requests and sockets get. */
  drain: number
  /** First: say that nothing new may be sent here. */
  refuseNew: () => void
  /** Closes sockets after their last edits are committed. */
  closeSockets: () => Promise<void>
  /** Last, one after the other: child processes, session store, database. */
  release: (() => Promise<void>)[]
  exit: (code: number) => void
}

/**
 * Returns the function that ends the process in order: readiness off, no new connections, sockets closed with their
 * edits saved, running requests answered, everything released, exit. Called again while it runs, it exits 1 at once.
 */
export function createStop(parts: Stoppable): (code: number, reason: string) => Promise<void> {
  let stopping = false
  return async (code, reason) => {
    if (stopping) {
      parts.exit(1)
      return
    }
    stopping = true
    let clean = true
    const attempt = async (what: string, work: () => Promise<unknown>) => {
      try {
        await within(parts.drain, work())
        return
      } catch (error) {
        if (error instanceof Late) parts.logger.warn({ what }, 'not done in time')
        else parts.logger.error({ err: error, what }, 'failed while stopping')
      }
      clean = false
    }
    parts.logger.info({ reason }, 'stopping')
    parts.refuseNew()
    const answered = new Promise<void>((resolve) => parts.server.close(() => resolve()))
    parts.server.closeIdleConnections()
    await Promise.all([
      attempt('sockets', parts.closeSockets),
      attempt('requests', async () => {
        // A kept-alive connection becomes idle only once its request is answered.
        const idle = setInterval(() => parts.server.closeIdleConnections(), 100)
        await answered.finally(() => clearInterval(idle))
      }),
    ])
    parts.server.closeAllConnections()
    for (const release of parts.release) await attempt('release', release)
    parts.logger.info({ clean }, 'stopped')
    parts.exit(code)
  }
}

/** SIGTERM, Ctrl-C and the end of the starting process stop it; so does an error that nobody expected, with exit code 1. */
export function stopOnSignals(stop: (code: number, reason: string) => Promise<void>, logger: Logger): void {
  process.on('SIGTERM', () => void stop(0, 'SIGTERM'))
  process.on('SIGINT', () => void stop(0, 'SIGINT'))
  // npm start holds a channel to this process; when it closes, npm start is gone.
  if (process.channel) process.on('disconnect', () => void stop(0, 'the starting process ended'))
  else if (process.env.BRINKBOOK_SUPERVISED) void stop(0, 'the starting process ended')
  const fatal = (kind: string) => (error: unknown) => {
    logger.fatal({ err: error }, kind)
    void stop(1, kind)
  }
  process.on('unhandledRejection', fatal('unhandled rejection'))
  process.on('uncaughtException', fatal('uncaught exception'))
}
