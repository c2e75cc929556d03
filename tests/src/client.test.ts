import { createServer, type IncomingMessage, type Server } from 'node:http'
import type { AddressInfo } from 'node:net'
import { afterAll, beforeAll, describe, expect, test, vi } from 'vitest'
import { changeMember, createGroup, listGroups } from '#shared/api/groups.ts'
import { changePage, listPages } from '#shared/api/pages.ts'
import { readSession, signOut } from '#shared/api/session.ts'
import { ApiProblem, fieldFault, generalFault, mayPass } from '#src/api/api-problem.ts'
import { addressOf, call } from '#src/api/client.ts'

// A real HTTP server that gives the next answer it was told to, and keeps what it was asked.
interface Asked {
  method: string
  url: string
  headers: IncomingMessage['headers']
  body: string
}
let server: Server
let asked: Asked[] = []
let next: { status: number; type?: string; headers?: Record<string, string>; body?: string }

beforeAll(async () => {
  server = createServer((request, response) => {
    let body = ''
    request.on('data', (part: Buffer) => {
      body += part.toString('utf8')
    })
    request.on('end', () => {
      asked.push({ method: request.method ?? '', url: request.url ?? '', headers: request.headers, body })
      response.writeHead(next.status, { 'content-type': next.type ?? 'application/json', ...next.headers })
      response.end(next.body)
    })
  })
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
  const { port } = server.address() as AddressInfo
  const real = globalThis.fetch
  // In a page the addresses are relative to the library's own origin.
  vi.stubGlobal('fetch', (path: string, init: RequestInit) => real(`http://127.0.0.1:${port}${path}`, init))
})

afterAll(async () => {
  vi.unstubAllGlobals()
  await new Promise((resolve) => server.close(resolve))
})

const answer = (status: number, body?: unknown, headers?: Record<string, string>) => {
  asked = []
  next = { status, body: body === undefined ? undefined : JSON.stringify(body), headers }
}
const problem = (status: number, code: string, more: object = {}) => ({
  type: `/problems/${code}`,
  title: code,
  status,
  detail: 'In words.',
  code,
  ...more,
})
const failure = async (promise: Promise<unknown>): Promise<ApiProblem> => {
  const error: unknown = await promise.then(
    () => null,
    (reason: unknown) => reason,
  )
  if (error instanceof ApiProblem) return error
  throw new Error('the request did not fail as an ApiProblem', { cause: error })
}

describe('address of a request', () => {
  test('parameters are filled in and escaped, lists repeated, what is undefined left out', () => {
    expect(addressOf('/groups/:group/members/:person', { group: 'a/b', person: 7 })).toBe(
      '/api/v1/groups/a%2Fb/members/7',
    )
    expect(addressOf('/pages', {}, { q: 'ω & x', onset: ['hard', 'soft'], cursor: undefined })).toBe(
      '/api/v1/pages?q=%CF%89+%26+x&onset=hard&onset=soft',
    )
  })
})

describe('a request', () => {
  test('resolves to the answer as the contract reads it', async () => {
    answer(200, { groups: [], more: 'dropped by the contract' })
    expect(await call(listGroups, {})).toEqual({ groups: [] })
    expect(asked[0]).toMatchObject({ method: 'GET', url: '/api/v1/groups', body: '' })
    expect(asked[0]?.headers['content-type']).toBeUndefined()
  })

  test('sends body, ETag and key of the act in their headers', async () => {
    answer(201, {
      group: { slug: 'g', name: 'G', prefixes: ['AB'], memberCount: 0, pageCount: 0, role: null },
      invitation: { link: '/invitations/x', expiresAt: '2026-12-08T09:00:00.000Z' },
    })
    const body = { name: 'G', prefixes: ['AB'], maintainerEmail: 'a@example.org' }
    await call(createGroup, { body, idempotencyKey: 'k'.repeat(32) })
    expect(JSON.parse(asked[0]?.body ?? '')).toEqual(body)
    expect(asked[0]?.headers).toMatchObject({ 'content-type': 'application/json', 'idempotency-key': 'k'.repeat(32) })

    answer(412, problem(412, 'changed', { etag: '8' }))
    const refused = await failure(
      call(changePage, { params: { code: 'RUN-09' }, body: { access: 'open' }, ifMatch: '7' }),
    )
    expect(asked[0]).toMatchObject({ method: 'PATCH', url: '/api/v1/pages/RUN-09' })
    // RFC 9110 8.8.3: an entity tag is quoted. The server answers 428 to one that is not.
    expect(asked[0]?.headers['if-match']).toBe('"7"')
    expect(refused).toMatchObject({ code: 'changed', status: 412, etag: '8', message: 'In words.' })
  })

  test('an empty answer is undefined', async () => {
    answer(204)
    expect(await call(signOut, {})).toBeUndefined()
  })

  test('a problem carries its code, its words and the faults of its fields', async () => {
    answer(
      409,
      problem(409, 'already-exists', {
        errors: [{ code: 'already-exists', message: 'RUN is taken', path: 'prefixes.0' }],
      }),
    )
    const body = { name: 'G', prefixes: ['RUN'], maintainerEmail: 'a@example.org' }
    const error = await failure(call(createGroup, { body, idempotencyKey: 'k'.repeat(32) }))
    expect(fieldFault(error, 'prefixes.0')).toBe('RUN is taken')
    expect(fieldFault(error, 'name')).toBeNull()
    expect(generalFault(error, 'prefixes.0')).toBeNull()
    expect(generalFault(error, 'name')).toBe('In words.')
  })

  test('says how long to wait', async () => {
    answer(429, problem(429, 'too-many'), { 'retry-after': '90' })
    expect(await failure(call(readSession, {}))).toMatchObject({ code: 'too-many', retryAfter: 90 })
  })

  test('an answer outside the contract is a fault of its own and names the place', async () => {
    answer(200, { groups: [{ slug: 'ok' }] })
    const error = await failure(call(listGroups, {}))
    expect(error.code).toBe('unexpected-answer')
    expect(error.message).toContain('GET /groups')
  })

  test('an error page that is no problem document does not leak its text', async () => {
    answer(502)
    next = { status: 502, type: 'text/html', body: '<h1>proxy at 10.0.0.7</h1>' }
    const error = await failure(call(listPages, { query: { q: 'x' } }))
    expect(error).toMatchObject({ code: 'unexpected-answer', status: 502 })
    expect(error.message).not.toContain('10.0.0.7')
    expect(mayPass(error)).toBe(true)
  })

  test('no answer at all may pass by itself; a refusal does not', async () => {
    const working = globalThis.fetch
    vi.stubGlobal('fetch', () => Promise.reject(new TypeError('Failed to fetch')))
    const lost = await failure(call(readSession, {}))
    vi.stubGlobal('fetch', working)
    expect(lost).toMatchObject({ code: 'network', status: 0 })
    expect(mayPass(lost)).toBe(true)
    answer(403, problem(403, 'may-not'))
    const refused = await failure(call(changeMember, { params: { group: 'g', person: 1 }, body: { role: 'reader' } }))
    expect(mayPass(refused)).toBe(false)
  })

  test('a request given up on purpose is no problem of the library', async () => {
    answer(200, { groups: [] })
    const gone = new AbortController()
    gone.abort()
    await expect(call(listGroups, { signal: gone.signal })).rejects.not.toBeInstanceOf(ApiProblem)
  })
})
