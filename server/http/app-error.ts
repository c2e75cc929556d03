import type { z } from 'zod'
import { type ProblemCode, type problemDetail, problemStatus } from '#shared/api/problem.ts'

export type ProblemDetail = z.infer<typeof problemDetail>

export interface AppErrorExtra {
  /** One entry a faulty field or line. */
  errors?: ProblemDetail[]
  /** The current ETag, where the request's was stale. */
  etag?: string
  /** Seconds after which another try makes sense. */
  retryAfter?: number
}

/** An expected refusal: `detail` is a sentence for the user. Anything else that is thrown is a bug and answers 500. */
export class AppError extends Error {
  readonly code: ProblemCode
  readonly status: number
  readonly detail: string
  readonly extra: AppErrorExtra

  constructor(code: ProblemCode, detail: string, extra: AppErrorExtra = {}) {
    super(`${code}: ${detail}`)
    this.name = 'AppError'
    this.code = code
    this.status = problemStatus[code]
    this.detail = detail
    this.extra = extra
  }
}
