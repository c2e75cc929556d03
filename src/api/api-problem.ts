import type { z } from 'zod'
import type { ProblemCode, problemDetail } from '#shared/api/problem.ts'

export type ProblemDetail = z.infer<typeof problemDetail>

/** A request that did not do what was asked: the server's problem, or `network`, or an answer outside the contract. `message` is in the user's words. */
export class ApiProblem extends Error {
  readonly code: ProblemCode | 'network' | 'unexpected-answer'
  /** HTTP status, 0 where no answer came. */
  readonly status: number
  readonly errors: readonly ProblemDetail[]
  /** The present ETag, with code `changed`. */
  readonly etag: string | null
  /** Seconds to wait, with code `too-many`. */
  readonly retryAfter: number | null

  constructor(
    code: ApiProblem['code'],
    status: number,
    message: string,
    more: { errors?: readonly ProblemDetail[]; etag?: string; retryAfter?: number | null } = {},
  ) {
    super(message)
    this.name = 'ApiProblem'
    this.code = code
    this.status = status
    this.errors = more.errors ?? []
    this.etag = more.etag ?? null
    this.retryAfter = more.retryAfter ?? null
  }

  /** The fault of one field of the request's body, where the problem names it. */
  of(path: string): string | null {
    return this.errors.find((error) => error.path === path)?.message ?? null
  }
}

/** What the server says of one field; null where the error is of another kind or names other fields. */
export function fieldFault(error: unknown, path: string): string | null {
  return error instanceof ApiProblem ? error.of(path) : null
}

/** The error's own message, but not where its fields say it already. */
export function generalFault(error: Error | null, ...paths: string[]): string | null {
  if (error === null || paths.some((path) => fieldFault(error, path) !== null)) return null
  return error.message
}

/** True for what may pass by itself: no answer, or an answer of the 5xx kind. */
export function mayPass(error: unknown): boolean {
  return error instanceof ApiProblem && (error.code === 'network' || error.status >= 500)
}
