import type { RequestHandler } from 'express'
import { type DestinationStream, type Logger, pino, stdTimeFunctions } from 'pino'
import { pinoHttp } from 'pino-http'
import type { Config } from '#server/config.ts'
import { AppError } from './app-error.ts'

/** Only where it happened: messages and texts of database errors hold what people typed. */
function errorFields(error: unknown): Record<string, unknown> {
  if (!(error instanceof Error)) return { name: typeof error }
  const frames = (error.stack ?? '').split('\n').filter((line) => /^\s+at /.test(line))
  const { code, errno } = error as Error & { code?: unknown; errno?: unknown }
  const known = error instanceof AppError ? { detail: error.detail } : {}
  const cause = error.cause === undefined ? {} : { cause: errorFields(error.cause) }
  return { name: error.name, code, errno, ...known, at: frames.slice(0, 12).map((line) => line.trim()), ...cause }
}

/** JSON lines, times in UTC. Secrets, cookies, bodies, queries and equation text never reach it: nothing logs a whole object of theirs. */
export function createLogger(config: Pick<Config, 'logLevel'>, destination?: DestinationStream): Logger {
  const options = {
    level: config.logLevel,
    base: undefined,
    timestamp: stdTimeFunctions.isoTime,
    formatters: { level: (label: string) => ({ level: label }) },
    serializers: { err: errorFields, error: errorFields },
    redact: {
      paths: [
        'password',
        '*.password',
        'token',
        '*.token',
        'cookie',
        '*.cookie',
        'authorization',
        '*.authorization',
        'secret',
        '*.secret',
      ],
      censor: '[removed]',
    },
  }
  return destination ? pino(options, destination) : pino(options)
}

/** One line an answer: id, method, route template (never the address itself, which may hold a one-time secret), person, status, time. */
export function requestLog(logger: Logger): RequestHandler {
  return pinoHttp({
    logger,
    genReqId: (request) => request.id,
    quietReqLogger: true,
    serializers: { req: () => undefined, res: () => undefined, err: errorFields },
    wrapSerializers: false,
    customLogLevel: (_request, response, error) =>
      error || response.statusCode >= 500 ? 'error' : response.statusCode >= 400 ? 'warn' : 'info',
    customAttributeKeys: { responseTime: 'ms' },
    customSuccessMessage: () => 'answered',
    customErrorMessage: () => 'failed',
    customProps: (request, response) => ({
      requestId: request.id,
      method: request.method,
      route: routeOf(request),
      person: personOf(request),
      status: response.statusCode,
    }),
    autoLogging: { ignore: (request) => /^\/(healthz|readyz|assets\/)/.test(request.url ?? '') },
  }) as RequestHandler
}

const routeOf = (request: object): string | undefined => {
  const { route, baseUrl } = request as { route?: { path?: unknown }; baseUrl?: string }
  return typeof route?.path === 'string' ? `${baseUrl ?? ''}${route.path}` : undefined
}
const personOf = (request: object): number | undefined => (request as { user?: Express.User }).user?.personId
