import type { IncomingMessage, ServerResponse } from 'node:http'
import type { RequestHandler } from 'express'
import { type DestinationStream, type Logger, pino, stdTimeFunctions } from 'pino'
import { pinoHttp } from 'pino-http'
import { z } from 'zod'
import type { Config } from '#server/config.ts'
import { AppError } from './app-error.ts'

/** Only where it happened: messages and texts of database errors hold what people typed. */
function errorFields(error: unknown): Record<string, unknown> {
  if (!(error instanceof Error)) return { name: typeof error }
  const frames = (error.stack ?? '').split('\n').filter((line) => /^\s+at /.test(line))
  const code = 'code' in error ? error.code : undefined
  const errno = 'errno' in error ? error.errno : undefined
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
  const fields = (request: IncomingMessage, response: ServerResponse, { ms }: { ms?: number }) => ({
    method: request.method,
    route: routeOf(response),
    person: personOf(request),
    status: response.statusCode,
    ms,
  })
  const handler: RequestHandler = pinoHttp({
    logger,
    genReqId: (request) => request.id,
    quietReqLogger: true,
    quietResLogger: true,
    customAttributeKeys: { reqId: 'requestId', responseTime: 'ms' },
    serializers: { err: errorFields },
    wrapSerializers: false,
    customLogLevel: (_request, response, error) =>
      error || response.statusCode >= 500 ? 'error' : response.statusCode >= 400 ? 'warn' : 'info',
    customSuccessObject: fields,
    customErrorObject: (request, response, _error, given) => fields(request, response, given),
    customSuccessMessage: () => 'answered',
    customErrorMessage: () => 'answered',
    autoLogging: { ignore: (request) => /^\/(healthz|readyz|assets\/)/.test(request.url ?? '') },
  })
  return handler
}

/** Left on the answer by whoever serves it (mount.ts). */
const routed = z.object({ locals: z.object({ route: z.string() }) })
const routeOf = (response: ServerResponse): string | undefined => {
  const parsed = routed.safeParse({ locals: 'locals' in response ? response.locals : null })
  return parsed.success ? parsed.data.locals.route : undefined
}
const withPerson = z.object({ user: z.object({ personId: z.number() }) })
const personOf = (request: IncomingMessage): number | undefined => {
  const parsed = withPerson.safeParse({ user: 'user' in request ? request.user : null })
  return parsed.success ? parsed.data.user.personId : undefined
}
