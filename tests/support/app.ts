import { pino } from 'pino'
import { createApp } from '#server/app.ts'
import type { Compute } from '#server/compute/compute.ts'
import { type Config, readConfig } from '#server/config.ts'
import { type BusEvent, createEventBus } from '#server/event-bus.ts'
import type { ClientSource } from '#server/http/client-files.ts'
import { createLogger } from '#server/http/logging.ts'
import { type Limits, limits } from '#server/limits.ts'
import { freshDatabase } from './database.ts'
import { createPeople } from './users.ts'

export const testOrigin = 'http://127.0.0.1:4180'

export interface TestAppOptions {
  config?: Partial<Config>
  /** Limits are those of the product but for the number of requests in a minute, which tests need more of. */
  limits?: (given: Limits) => Limits
  client?: ClientSource
  compute?: Compute
  /** Lines of the log are collected here. */
  log?: string[]
}

/** For tests of what needs no card: every card is refused as if too many waited. */
const noCompute: Compute = {
  card: async () => ({ ok: false, reason: 'busy' }),
  check: async () => ({ ok: false, reason: 'busy' }),
  citations: {
    read: async () => ({ ok: false, reason: 'queue-full' }),
    format: async (items) => items.map(() => null),
  },
  close: async () => {},
}

/** The app on a database of its own, with a clock that the test may move and the events it told. */
export async function createTestApp(options: TestAppOptions = {}) {
  const database = await freshDatabase()
  const config: Config = {
    ...readConfig({
      NODE_ENV: 'test',
      DATABASE_URL: database.url,
      SESSION_SECRET: 'a-secret-of-the-tests-worth-nothing-0123456789',
    }),
    ...options.config,
  }
  const clock = { ahead: 0 }
  const told: BusEvent[] = []
  const events = createEventBus((error) => {
    throw error
  })
  events.subscribe((event) => told.push(event))
  const { log } = options
  const logger = log
    ? createLogger({ logLevel: 'info' }, { write: (line: string) => void log.push(line) })
    : pino({ level: 'silent' })
  const widened: Limits = { ...limits, rate: { ...limits.rate, api: 1_000_000 } }
  const dependencies = {
    db: database.db,
    config,
    limits: options.limits?.(widened) ?? widened,
    events,
    compute: options.compute ?? noCompute,
    logger,
    now: () => new Date(Date.now() + clock.ahead),
  }
  const app = createApp({ ...dependencies, client: options.client })
  return {
    dependencies,
    built: app,
    app: app.express,
    api: app.api,
    gate: app.gate,
    readiness: app.readiness,
    db: database.db,
    database,
    config,
    events,
    told,
    /** Milliseconds that the app's clock is ahead of the real one. */
    clock,
    people: createPeople(app.express, database.db),
    close: async () => {
      await app.close()
      await database.close()
    },
  }
}
export type TestApp = Awaited<ReturnType<typeof createTestApp>>
