import type { ErrorRequestHandler, RequestHandler } from 'express'
import type { Logger } from 'pino'
import { z } from 'zod'
import { type Problem, type ProblemCode, problemStatus } from '#shared/api/problem.ts'
import { AppError } from './app-error.ts'

const titles: Record<ProblemCode, string> = {
  'bad-request': 'The request is not understood',
  'not-signed-in': 'Not signed in',
  'wrong-password': 'Wrong password',
  'may-not': 'Not allowed',
  'not-same-site': 'Not from the library’s own pages',
  'not-found': 'Nothing here',
  'method-not-allowed': 'Not possible at this address',
  'already-settled': 'Already settled',
  'base-superseded': 'Another revision came into force',
  'in-review': 'A review is under way',
  'already-exists': 'It exists already',
  'last-maintainer': 'Nobody else would be left',
  'unsaved-edits': 'Edits are not saved yet',
  'same-key': 'The key was used before',
  'link-used': 'This link is used up',
  changed: 'It has changed since',
  'too-large': 'Too large',
  'wrong-content-type': 'Wrong type of content',
  'model-refused': 'The model is refused',
  'source-refused': 'The source cannot be read',
  'needs-if-match': 'If-Match is missing',
  'too-many': 'Too many requests',
  bug: 'Something went wrong here',
  'not-ready': 'Not ready at the moment',
  'analysis-budget': 'The analysis took too long',
}

/** Errors of the driver and of sockets that mean: the database does not answer now. */
const databaseAway = new Set([
  'ECONNREFUSED',
  'ECONNRESET',
  'EPIPE',
  'ETIMEDOUT',
  'ENOTFOUND',
  'PROTOCOL_CONNECTION_LOST',
  'PROTOCOL_ENQUEUE_AFTER_FATAL_ERROR',
  'PROTOCOL_SEQUENCE_TIMEOUT',
  'POOL_CLOSED',
  'ER_CON_COUNT_ERROR',
  'ER_SERVER_SHUTDOWN',
  'ER_LOCK_WAIT_TIMEOUT',
  'ER_LOCK_DEADLOCK',
  'ER_OPTION_PREVENTS_STATEMENT',
  'ER_DISK_FULL',
  'ER_RECORD_FILE_FULL',
  'ER_ERROR_DURING_COMMIT',
])
const coded = z.object({ code: z.string() })

export function isDatabaseAway(error: unknown): boolean {
  const code = coded.safeParse(error)
  if (code.success && databaseAway.has(code.data.code)) return true
  if (!(error instanceof Error)) return false
  return (
    /Pool is closed|Queue limit reached|connection is in closed state/i.test(error.message) ||
    isDatabaseAway(error.cause)
  )
}

/** What express.json and the router say of a request that cannot be read. */
const unreadable = z.object({ status: z.number().int().min(400).max(499), type: z.string().optional() })

/** The expected error that a thrown one amounts to; null for a bug. */
function expected(error: unknown): AppError | null {
  if (error instanceof AppError) return error
  const fault = unreadable.safeParse(error)
  if (fault.success) {
    if (fault.data.status === 413) return new AppError('too-large', 'The body is too large.')
    if (fault.data.status === 415) {
      return new AppError('wrong-content-type', 'The body must be JSON in UTF-8, not compressed.')
    }
    if (fault.data.status === 404) return new AppError('not-found', 'There is nothing at this address.')
    return new AppError('bad-request', 'The request cannot be read.')
  }
  if (isDatabaseAway(error)) {
    return new AppError('not-ready', 'The library cannot be reached at the moment. Try again.', { retryAfter: 2 })
  }
  return null
}

const problemOf = ({ code, status, detail, extra }: AppError, instance: string): Problem => ({
  type: `/problems/${code}`,
  title: titles[code],
  status,
  detail,
  code,
  instance: `urn:request:${instance}`,
  ...(extra.etag === undefined ? {} : { etag: extra.etag }),
  ...(extra.errors === undefined ? {} : { errors: extra.errors }),
})

/** Turns whatever was thrown into `application/problem+json` (RFC 9457). Nothing of an unexpected error is told. */
export function problems(logger: Logger): ErrorRequestHandler {
  return (error: unknown, request, response, next) => {
    const known = expected(error)
    if (!known || known.code === 'not-ready') logger.error({ err: error, requestId: request.id }, 'request failed')
    if (response.headersSent) {
      next(error)
      return
    }
    const answer = known ?? new AppError('bug', 'This is a fault of the library, not yours. It has been written down.')
    if (answer.extra.retryAfter !== undefined) response.setHeader('Retry-After', String(answer.extra.retryAfter))
    response.removeHeader('ETag')
    response.setHeader('Cache-Control', 'no-store')
    response.status(problemStatus[answer.code]).type('application/problem+json')
    response.send(JSON.stringify(problemOf(answer, String(request.id))))
  }
}

export const nothingHere: RequestHandler = () => {
  throw new AppError('not-found', 'There is nothing at this address.')
}
