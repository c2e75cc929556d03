import { createServer } from 'node:http'
import { fileURLToPath } from 'node:url'
import { createDatabase } from '#drizzle/client.ts'
import { createApp } from './app.ts'
import { createCompute } from './compute/compute.ts'
import { ConfigError, readConfig } from './config.ts'
import { attachEditing } from './editing.ts'
import { createEventBus } from './event-bus.ts'
import type { ClientSource } from './http/client-files.ts'
import { createLogger } from './http/logging.ts'
import { limits } from './limits.ts'
import { findDemonstration } from './services/demonstration.ts'
import { createStop, stopOnSignals } from './stopping.ts'

/** Exit code for what another start would not change; the starting process then does not try again. */
const wrongConfiguration = 78

async function main(): Promise<void> {
  const config = readConfig(process.env)
  const logger = createLogger(config)
  const database = createDatabase(config.databaseUrl)
  if (!config.loopback && (await findDemonstration(database.db))) {
    throw new ConfigError(
      'BRINKBOOK_PUBLIC_URL: this database holds the demonstration accounts, whose password is public; they never leave this machine. Use another database.',
    )
  }
  const events = createEventBus((error) => logger.error({ err: error }, 'a listener failed'))
  const compute = createCompute(limits.compute, (event, detail) =>
    logger.warn({ event, pid: detail.pid }, 'child process ended'),
  )

  const server = createServer({ maxHeaderSize: 16 * 1024 })
  server.headersTimeout = limits.http.headersTimeout
  server.requestTimeout = limits.http.requestTimeout
  server.keepAliveTimeout = limits.http.keepAliveTimeout
  server.maxHeadersCount = limits.http.headersCount
  server.maxConnections = limits.http.connections

  let client: ClientSource = { kind: 'built', directory: fileURLToPath(new URL('../dist', import.meta.url)) }
  let closeClient = async () => {}
  if (config.mode === 'development') {
    const { developmentClient } = await import('./http/development-client.ts')
    const development = await developmentClient(server)
    client = development.source
    closeClient = development.close
  }
  const dependencies = { db: database.db, config, limits, events, compute, logger, now: () => new Date() }
  const app = createApp({ ...dependencies, client })
  server.on('request', app.express)
  const editing = attachEditing(server, dependencies, app)

  const stop = createStop({
    logger,
    server,
    drain: limits.shutdown.drain,
    refuseNew: () => {
      app.readiness.accepting = false
    },
    closeSockets: editing.closeSockets,
    release: [closeClient, editing.close, compute.close, app.close, database.close],
    exit: (code) => process.exit(code),
  })
  stopOnSignals(stop, logger)

  server.once('error', (error: NodeJS.ErrnoException) => {
    if (error.code === 'EADDRINUSE') refuse(`PORT: ${config.port} is taken. Choose another one, or stop what uses it.`)
    else if (error.code === 'EACCES') refuse(`PORT: this user may not listen on ${config.port}.`)
    else void stop(1, error.message)
  })
  server.listen(config.port, config.host, () => {
    logger.info({ port: config.port, host: config.host, publicOrigin: config.publicOrigin }, 'listening')
  })
}

function refuse(message: string): void {
  console.error(`Brinkbook does not start.\n${message}`)
  process.exit(wrongConfiguration)
}

main().catch((error: unknown) => {
  if (error instanceof ConfigError) refuse(error.message)
  console.error('Brinkbook does not start.', error)
  process.exit(1)
})
