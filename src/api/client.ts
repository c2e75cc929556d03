import type { z } from 'zod'
import type { Endpoint } from '#shared/api/endpoint.ts'
import { type ProblemCode, problem, problemStatus } from '#shared/api/problem.ts'
import { ApiProblem } from './api-problem.ts'

type Part<Name extends string, T> = Record<never, never> extends T ? { [K in Name]?: T } : { [K in Name]: T }

/** What a request needs: parameters, query and body as its contract says, and the headers it asks for. */
export type CallOptions<P extends z.ZodType, Q extends z.ZodType, B extends z.ZodType> = Part<'params', z.output<P>> & {
  query?: Partial<z.output<Q>>
} & Part<'body', z.input<B>> & {
    signal?: AbortSignal
    /** The ETag the change is meant for, as bodies carry it (without quotes); without it an endpoint with `ifMatch` answers 428. */
    ifMatch?: string
    /** The same key on a repeated request does the act once. */
    idempotencyKey?: string
  }

const root = '/api/v1'

/**
 * One request of the API. Resolves to the answer as its contract parses it; throws ApiProblem for everything else, also
 * for a connection that fails (`network`) and an answer that is not what the contract says (`unexpected-answer`).
 */
export async function call<P extends z.ZodType, Q extends z.ZodType, B extends z.ZodType, R extends z.ZodType>(
  endpoint: Endpoint<P, Q, B, R>,
  options: CallOptions<P, Q, B>,
): Promise<z.output<R>> {
  const { params, query, body, signal, ifMatch, idempotencyKey } = options as LooseOptions
  const headers = new Headers({ Accept: 'application/json, application/problem+json' })
  // An entity tag stands in quotes (RFC 9110 8.8.3); bodies carry it without.
  if (ifMatch !== undefined) headers.set('If-Match', `"${ifMatch}"`)
  if (idempotencyKey !== undefined) headers.set('Idempotency-Key', idempotencyKey)
  if (body !== undefined) headers.set('Content-Type', 'application/json')

  let answer: Response
  try {
    answer = await fetch(addressOf(endpoint.path, params, query), {
      method: endpoint.method,
      headers,
      body: body === undefined ? undefined : JSON.stringify(body),
      signal,
      credentials: 'same-origin',
    })
  } catch (error) {
    // A request given up on purpose is no fault: the caller asked for it.
    if (signal?.aborted) throw error
    throw new ApiProblem('network', 0, 'The library did not answer. Check the connection, then try again.')
  }
  if (!answer.ok) throw await problemOf(answer)
  const parsed = endpoint.response.safeParse(answer.status === 204 ? undefined : await jsonOf(answer))
  if (parsed.success) return parsed.data
  const where = parsed.error.issues[0]?.path.join('.') ?? ''
  throw new ApiProblem(
    'unexpected-answer',
    answer.status,
    `The library answered in a way this page does not know (${endpoint.method} ${endpoint.path}, ${where}). Load the page again.`,
  )
}

interface LooseOptions {
  params?: Record<string, string | number>
  query?: Record<string, unknown>
  body?: unknown
  signal?: AbortSignal
  ifMatch?: string
  idempotencyKey?: string
}

/** The address of a request: `:name` filled from the parameters, lists repeated in the query. */
export function addressOf(
  path: string,
  params: Record<string, string | number> = {},
  query: Record<string, unknown> = {},
): string {
  const filled = path.replaceAll(/:(\w+)/g, (_, name: string) => encodeURIComponent(String(params[name] ?? '')))
  const search = new URLSearchParams()
  for (const [name, value] of Object.entries(query)) {
    for (const item of Array.isArray(value) ? value : [value]) {
      if (item !== undefined && item !== null) search.append(name, String(item))
    }
  }
  const tail = search.toString()
  return `${root}${filled}${tail === '' ? '' : `?${tail}`}`
}

async function jsonOf(answer: Response): Promise<unknown> {
  try {
    return await answer.json()
  } catch {
    return null
  }
}

const isKnown = (code: string): code is ProblemCode => Object.hasOwn(problemStatus, code)

async function problemOf(answer: Response): Promise<ApiProblem> {
  const parsed = problem.safeParse(await jsonOf(answer))
  const seconds = Number(answer.headers.get('Retry-After'))
  const retryAfter = Number.isFinite(seconds) && seconds > 0 ? seconds : null
  if (!parsed.success) {
    return new ApiProblem('unexpected-answer', answer.status, 'The library did not answer as it should. Try again.', {
      retryAfter,
    })
  }
  const { code, detail, errors, etag } = parsed.data
  return new ApiProblem(isKnown(code) ? code : 'unexpected-answer', answer.status, detail, { errors, etag, retryAfter })
}
