import { type Request, type RequestHandler, type Response, Router } from 'express'
import type { z } from 'zod'
import type { AnyEndpoint, Endpoint } from '#shared/api/endpoint.ts'
import { type Access, allow } from './access.ts'
import { AppError } from './app-error.ts'
import { jsonReader, readBody, readParams, readQuery } from './checked-input.ts'
import type { Dependencies, HandlerContext } from './context.ts'
import { matchesNone, quoteTag, readIfMatch } from './etag.ts'
import { type Answer, keptAnswer, once } from './idempotency.ts'
import type { Limiter } from './rate-limits.ts'
import type { SessionGate } from './session.ts'

/** The one router of the API with what its handlers need. */
export interface Api extends Dependencies {
  router: Router
  limiter: Limiter
  gate: SessionGate
}

const endpoints = new WeakMap<object, AnyEndpoint>()

/** The endpoint that a route of the live router serves (the policy test lists them). */
export const endpointOf = (handle: object): AnyEndpoint | null => endpoints.get(handle) ?? null

export const createApi = (parts: Omit<Api, 'router'>): Api => ({ ...parts, router: Router({ caseSensitive: true }) })

/** What a handler hands back: the answer's body, or nothing where the contract has none. */
type Handler<C, R extends z.ZodType> = R extends z.ZodUndefined
  ? (context: C) => Promise<void>
  : (context: C) => Promise<z.input<R>> | z.input<R>

const methods = { GET: 'get', POST: 'post', PUT: 'put', PATCH: 'patch', DELETE: 'delete' } as const

/**
 * Serves one endpoint. Before the handler runs, in this order: the viewer is loaded, the policy table asked (allow),
 * If-Match demanded, then query and body checked against the contract; nothing is parsed for people who may not act.
 * The answer is checked against the contract as well: what the contract does not name never leaves the server.
 */
export function mount<P extends z.ZodType, Q extends z.ZodType, B extends z.ZodType, R extends z.ZodType>(
  api: Api,
  endpoint: Endpoint<P, Q, B, R>,
  handler: Handler<HandlerContext<z.output<P>, z.output<Q>, z.output<B>>, R>,
): void {
  const readJson = jsonReader(api.limits)
  const serve: RequestHandler = async (request, response) => {
    response.locals.route = endpoint.path
    const now = api.now()
    const viewer = await api.gate.loadViewer(request, now)
    const params = readParams(endpoint.params, request.params)
    const name = request.params.code ?? request.params.group
    const key = endpoint.idempotent ? request.get('idempotency-key') : undefined
    let access: Access
    try {
      access = await allow(api.db, viewer, endpoint.act, params.ok && typeof name === 'string' ? name : null)
    } catch (error) {
      // The act itself may have taken the right away (sending locks the draft): a repetition still gets its answer.
      const repeated = error instanceof AppError && error.code === 'may-not' && key !== undefined && viewer.person
      if (!repeated) throw error
      await readJson(request, response)
      const kept = await keptAnswer(api.db, {
        personId: repeated.id,
        key,
        request: requestTextOf(request, readBody(endpoint.body, request)),
      })
      if (!kept) throw error
      send(request, response, kept)
      return
    }
    if (!params.ok) throw new AppError('not-found', 'There is nothing at this address.')
    const ifMatch = endpoint.ifMatch ? readIfMatch(request.get('if-match')) : null
    const query = readQuery(endpoint.query, request)
    await readJson(request, response)
    const body = readBody(endpoint.body, request)
    request.body = body

    let etag: string | null = null
    const context: HandlerContext<z.output<P>, z.output<Q>, z.output<B>> = {
      ...api,
      params: params.value,
      query,
      body,
      now,
      requestId: String(request.id),
      viewer,
      get person() {
        if (!viewer.person) throw new AppError('not-signed-in', 'Sign in first.')
        return viewer.person
      },
      get group() {
        if (!access.group) throw new Error(`${endpoint.act} is no act on a group.`)
        return access.group
      },
      get page() {
        if (!access.page) throw new Error(`${endpoint.act} is no act on a page.`)
        return access.page
      },
      ifMatch,
      setEtag: (value) => {
        etag = value
      },
      setHeader: (header, value) => {
        response.setHeader(header, value)
      },
      session: api.gate.controlOf(request, response, now),
      request,
    }
    const run = async (): Promise<Answer> => {
      const result = endpoint.response.parse(await handler(context))
      return { status: result === undefined ? 204 : endpoint.status, body: result, etag }
    }
    const keep = api.limits.idempotencyKeys.keep
    const answer =
      key !== undefined && viewer.person
        ? await once(api.db, { personId: viewer.person.id, key, request: requestTextOf(request, body), now, keep }, run)
        : await run()
    send(request, response, answer)
  }
  endpoints.set(serve, endpoint)
  api.router[methods[endpoint.method]](endpoint.path, serve)
}

const requestTextOf = (request: Request, body: unknown) =>
  `${request.method} ${request.originalUrl}\n${JSON.stringify(body)}`

function send(request: Request, response: Response, { status, body, etag }: Answer): void {
  if (etag !== null) {
    response.setHeader('ETag', quoteTag(etag))
    if (request.method === 'GET' && matchesNone(request.get('if-none-match'), etag)) {
      response.status(304).end()
      return
    }
  }
  if (body === undefined) response.status(204).end()
  else response.status(status).json(body)
}

/** Answers 405 with Allow where a known address is asked with another method. Call once, after every mount. */
export function refuseOtherMethods(api: Api): void {
  const known = new Map<string, Set<string>>()
  for (const layer of api.router.stack) {
    if (!layer.route) continue
    const served = known.get(layer.route.path) ?? new Set<string>()
    for (const { method } of layer.route.stack) if (method) served.add(method.toUpperCase())
    known.set(layer.route.path, served)
  }
  for (const [path, served] of known) {
    if (served.has('GET')) served.add('HEAD')
    api.router.all(path, (request, response) => {
      response.setHeader('Allow', [...served].sort().join(', '))
      throw new AppError('method-not-allowed', `${request.method} is not possible at this address.`)
    })
  }
}
