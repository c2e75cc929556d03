import supertest from 'supertest'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { endpointOf } from '#server/http/mount.ts'
import type { AnyEndpoint } from '#shared/api/endpoint.ts'
import { createTestApp, type TestApp, testOrigin } from '#tests/support/app.ts'
import type { Tab } from '#tests/support/http.ts'
import { apiRoot, expectProblem } from '#tests/support/http.ts'

let t: TestApp
let agent: Tab
let cookie: string
beforeAll(async () => {
  t = await createTestApp()
  const admin = await t.people.person('Site Admin', { administrator: true })
  agent = await t.people.signedIn(admin)
  const signIn = await supertest(t.app)
    .post(`${apiRoot}/session`)
    .set('Origin', testOrigin)
    .send({ email: admin.email, password: 'four otters mend clocks' })
  cookie = String(signIn.headers['set-cookie']).split(';')[0] ?? ''
})
afterAll(() => t.close())

type Headers = Record<string, string>
const foreign: [string, Headers][] = [
  ['another site', { Origin: 'https://evil.example', 'Sec-Fetch-Site': 'cross-site' }],
  ['another site that hides its origin', { Origin: 'null', 'Sec-Fetch-Site': 'cross-site' }],
  ['a sandboxed frame', { Origin: 'null' }],
  ['a sister site', { Origin: 'http://sub.127.0.0.1:4180', 'Sec-Fetch-Site': 'same-site' }],
  ['another port of this machine', { Origin: 'http://127.0.0.1:9999', 'Sec-Fetch-Site': 'same-site' }],
  ['another scheme', { Origin: 'https://127.0.0.1:4180' }],
  ['our origin as a prefix', { Origin: `${testOrigin}.evil.example` }],
  ['our origin with a path', { Origin: `${testOrigin}/` }],
  ['our origin twice', { Origin: `${testOrigin}, ${testOrigin}` }],
  ['our origin, but the browser says cross-site', { Origin: testOrigin, 'Sec-Fetch-Site': 'cross-site' }],
  ['the address bar', { 'Sec-Fetch-Site': 'none' }],
  ['no word of where it comes from', {}],
]
const ours: [string, Headers][] = [
  ['our origin', { Origin: testOrigin }],
  ['our origin as localhost', { Origin: 'http://localhost:4180' }],
  ['same-origin by the browser', { 'Sec-Fetch-Site': 'same-origin' }],
  ['both', { Origin: testOrigin, 'Sec-Fetch-Site': 'same-origin' }],
]

const changing = (): AnyEndpoint[] =>
  t.api.router.stack
    .flatMap((layer) => layer.route?.stack ?? [])
    .flatMap((layer) => endpointOf(layer.handle) ?? [])
    .filter((endpoint) => endpoint.method !== 'GET')

const addressOf = (endpoint: AnyEndpoint) => apiRoot + endpoint.path.replace(/:\w+/g, '1')
const send = (endpoint: AnyEndpoint, headers: Headers) => {
  const method = endpoint.method.toLowerCase() as 'post' | 'put' | 'patch' | 'delete'
  return supertest(t.app)[method](addressOf(endpoint)).set('Cookie', cookie).set(headers).send({})
}

describe('requests that change something', () => {
  test('the list of them is not empty', () => {
    expect(changing().length).toBeGreaterThan(10)
  })

  test.each(foreign)('from %s are refused on every route, before anything is looked up', async (_name, headers) => {
    for (const endpoint of changing()) expectProblem(await send(endpoint, headers), 'not-same-site')
  })

  test.each(ours)('with %s are let through on every route', async (_name, headers) => {
    for (const endpoint of changing().filter((candidate) => !candidate.path.startsWith('/session'))) {
      const answer = await send(endpoint, headers)
      expect(answer.body.code ?? answer.status).not.toBe('not-same-site')
    }
  })

  test('reading needs no proof and gives no other site leave to read', async () => {
    const answer = await supertest(t.app)
      .get(`${apiRoot}/session`)
      .set({ Cookie: cookie, Origin: 'https://evil.example', 'Sec-Fetch-Site': 'cross-site' })
    expect(answer.status).toBe(200)
    expect(answer.headers['access-control-allow-origin']).toBeUndefined()
    expect(answer.headers['access-control-allow-credentials']).toBeUndefined()
    expect(answer.headers['cross-origin-resource-policy']).toBe('same-origin')
  })

  test('a preflight gets no leave', async () => {
    const answer = await supertest(t.app)
      .options(`${apiRoot}/session`)
      .set({ Origin: 'https://evil.example', 'Access-Control-Request-Method': 'POST' })
    expect(answer.headers['access-control-allow-origin']).toBeUndefined()
    expectProblem(answer, 'method-not-allowed')
  })

  test('a form of another site cannot send JSON, and nothing but JSON is read', async () => {
    for (const type of ['text/plain', 'application/x-www-form-urlencoded', 'multipart/form-data; boundary=x']) {
      const answer = await agent.post(`${apiRoot}/groups`).set('Content-Type', type).send('{"name":"X"}')
      expectProblem(answer, 'wrong-content-type')
    }
  })
})
