import { z } from 'zod'

/**
 * Every error answer of the API (RFC 9457, `application/problem+json`), one code each. `status` follows from the code.
 * Codes of a model document's faults (shared/model/errors.ts) stand inside `errors`, not here.
 */
export const problemStatus = {
  'bad-request': 400,
  'not-signed-in': 401,
  'wrong-password': 401,
  'may-not': 403,
  'not-same-site': 403,
  'not-found': 404,
  'method-not-allowed': 405,
  'already-settled': 409,
  'base-superseded': 409,
  'in-review': 409,
  'already-exists': 409,
  'last-maintainer': 409,
  'unsaved-edits': 409,
  /** An Idempotency-Key that belongs to another request, or to one that has not ended. */
  'same-key': 409,
  'link-used': 410,
  changed: 412,
  'too-large': 413,
  'wrong-content-type': 415,
  'model-refused': 422,
  /** Pasted BibTeX or CSL-JSON that cannot be read. */
  'source-refused': 422,
  'needs-if-match': 428,
  'too-many': 429,
  bug: 500,
  'not-ready': 503,
  'analysis-budget': 503,
} as const
export type ProblemCode = keyof typeof problemStatus

/** One fault of one field or line inside a problem. */
export const problemDetail = z.object({
  code: z.string(),
  message: z.string(),
  path: z.string().optional(),
  line: z.number().int().optional(),
  column: z.number().int().optional(),
})

export const problem = z.object({
  type: z.string(),
  title: z.string(),
  status: z.number().int(),
  detail: z.string(),
  code: z.string(),
  instance: z.string().optional(),
  etag: z.string().optional(),
  errors: z.array(problemDetail).optional(),
})
export type Problem = z.infer<typeof problem>
