import supertest from 'supertest'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { z } from 'zod'
import { limits } from '#server/limits.ts'
import { createTestApp, type TestApp, testOrigin } from '#tests/support/app.ts'
import { apiRoot, expectProblem, type Tab } from '#tests/support/http.ts'

let t: TestApp
let admin: Tab
const log: string[] = []
beforeAll(async () => {
  t = await createTestApp({ log })
  admin = await t.people.signedIn(await t.people.person('Site Admin', { administrator: true }))
  await t.people.group('Kiln Lab', 'KLN')
})
afterAll(() => t.close())

const addressInfo = z.object({ port: z.number() })
const jsonFromHere = { 'Content-Type': 'application/json', Origin: testOrigin }
const groups = `${apiRoot}/groups`
const raw = (body: string, type = 'application/json') => admin.post(groups).set('Content-Type', type).send(body)

describe('problem details', () => {
  test('an unknown address', async () => {
    expectProblem(await admin.get(`${apiRoot}/nothing`), 'not-found')
    expectProblem(await admin.get('/api/v2/session'), 'not-found')
    expectProblem(await admin.get('/collab/1'), 'not-found')
    expectProblem(await admin.get(`${apiRoot}/Session`), 'not-found')
  })

  test('an address that cannot be decoded', async () => {
    expectProblem(await admin.get(`${apiRoot}/groups/%E0%A4%A`), 'bad-request')
  })

  test('another method says which are possible', async () => {
    const answer = await admin.put(`${apiRoot}/session`).send({})
    expectProblem(answer, 'method-not-allowed')
    expect(answer.headers.allow).toBe('DELETE, GET, HEAD, POST')
  })

  test.each([
    ['no JSON', '{"name":'],
    ['a bare string', '"name"'],
    ['nothing but a number', '7'],
    ['a key that reaches for the prototype', '{"__proto__":{"administrator":true},"name":"X"}'],
    ['the same in other letters', '{"\\u005f_proto__":{},"name":"X"}'],
    ['brackets without end', '['.repeat(100_000)],
    ['a hundred thousand levels', '['.repeat(100_000) + ']'.repeat(100_000)],
    ['65 levels', `{"name":${'['.repeat(64)}${']'.repeat(64)}}`],
  ])('a body that is %s', async (_name, body) => {
    expectProblem(await raw(body), 'bad-request')
  })

  test('brackets inside a string are no nesting', async () => {
    const problem = expectProblem(await raw(JSON.stringify({ name: '[{'.repeat(200) })), 'bad-request')
    expect(problem.errors?.map((error) => error.path)).toContain('name')
  })

  test('a body over the limit, declared or not', async () => {
    const large = JSON.stringify({ name: 'x'.repeat(limits.http.bodyBytes) })
    expectProblem(await raw(large), 'too-large')
    // A body whose length is not told beforehand.
    const server = t.app.listen(0, '127.0.0.1')
    await new Promise((resolve) => server.once('listening', resolve))
    const { port } = addressInfo.parse(server.address())
    const parts = new ReadableStream({
      start(controller) {
        for (let i = 0; i < large.length; i += 65_536) controller.enqueue(Buffer.from(large.slice(i, i + 65_536)))
        controller.close()
      },
    })
    const options = { method: 'POST', body: parts, duplex: 'half', headers: jsonFromHere } as const
    const answer = await fetch(`http://127.0.0.1:${port}${apiRoot}/session`, options)
    expect(answer.status).toBe(413)
    expect(await answer.json()).toMatchObject({ code: 'too-large' })
    server.closeAllConnections()
    await new Promise((resolve) => server.close(resolve))
  })

  test('a compressed body, and one in another alphabet', async () => {
    const zipped = admin.post(groups).set({ 'Content-Type': 'application/json', 'Content-Encoding': 'gzip' })
    expectProblem(await zipped.send('{}'), 'wrong-content-type')
    expectProblem(await raw('{}', 'application/json; charset=latin1'), 'wrong-content-type')
  })

  test('a body where there should be none', async () => {
    const problem = expectProblem(await admin.delete(`${apiRoot}/session`).send({ extra: 1 }), 'bad-request')
    expect(problem.errors?.[0]?.code).toBe('unrecognized_keys')
  })

  test('strict bodies: every fault by its field, nothing unknown taken', async () => {
    const body = { name: '', prefixes: ['kln'], maintainerEmail: 'x', administrator: true }
    const problem = expectProblem(await admin.post(groups).send(body), 'bad-request')
    expect(problem.errors?.map((error) => error.path).sort()).toEqual(['', 'maintainerEmail', 'name', 'prefixes.0'])
  })

  test.each([
    ['an object for a text', { email: { like: '%' }, password: 'x' }],
    ['a list for a text', { email: ['a@example.org'], password: 'x' }],
    ['a text for a list', { email: 'a@example.org', password: ['x'] }],
    ['nothing', null],
    ['a list', []],
  ])('the wrong type: %s', async (_name, body) => {
    expectProblem(
      await t.people
        .signedOut()
        .post(`${apiRoot}/session`)
        .set('Content-Type', 'application/json')
        .send(JSON.stringify(body)),
      'bad-request',
    )
  })

  test('an unknown or repeated key of the query', async () => {
    expectProblem(await admin.get(`${groups}?all=1`), 'bad-request')
    expectProblem(await admin.get(`${groups}?__proto__=1`), 'bad-request')
    expectProblem(await admin.get(`${groups}?a[b]=1`), 'bad-request')
  })

  test('a parameter that cannot be right is an address at which there is nothing', async () => {
    expectProblem(await admin.patch(`${apiRoot}/people/abc`).send({ disabled: true }), 'not-found')
    expectProblem(await admin.patch(`${apiRoot}/people/-1`).send({ disabled: true }), 'not-found')
    expectProblem(await admin.get(`${groups}/Kiln%20Lab`), 'not-found')
    expectProblem(await t.people.signedOut().get(`${groups}/Kiln%20Lab`), 'not-signed-in')
  })

  test('the database away is 503, never an empty answer or a signed-out person', async () => {
    const away = await createTestApp()
    const agent = await away.people.signedIn(await away.people.person('Mara Onhold'))
    await away.database.pool.promise().end()
    const answer = await agent.get(`${apiRoot}/session`)
    expectProblem(answer, 'not-ready')
    expect(answer.headers['retry-after']).toBe('2')
    expect((await agent.get('/readyz')).status).toBe(503)
    expect((await agent.get('/healthz')).status).toBe(200)
    await away.close().catch(() => undefined)
  })
})

describe('a disk that is nearly full', () => {
  test('makes the process unready, in a word and without a figure; a tenth free is enough', async () => {
    expect(limits.ready.diskFree).toBe(0.1)
    const full = await createTestApp({
      config: { dataDirectory: '.' },
      // More than everything: no disk has so much free.
      limits: (given) => ({ ...given, ready: { ...given.ready, diskFree: 1 } }),
    })
    const agent = full.people.signedOut()
    const answer = await agent.get('/readyz')
    expect([answer.status, answer.text]).toEqual([503, 'not ready: disk\n'])
    expect((await agent.get('/healthz')).text).toBe('ok\n')
    await full.close()
    const elsewhere = await createTestApp({
      config: { dataDirectory: 'no/such/directory' },
      limits: (given) => ({ ...given, ready: { ...given.ready, diskFree: 1 } }),
    })
    expect((await elsewhere.people.signedOut().get('/readyz')).text).toBe('ok\n')
    await elsewhere.close()
  })
})

describe('headers', () => {
  const everywhere = async () => [
    await admin.get('/healthz'),
    await admin.get('/readyz'),
    await admin.get(groups),
    await admin.get(`${apiRoot}/nothing`),
    await admin.get('/nothing.js'),
    await admin.post(groups).send({}),
    await admin.post(groups).set('Origin', 'https://evil.example').send({}),
    await t.people.signedOut().get(groups),
    await admin.get(`${apiRoot}/groups/%E0%A4%A`),
  ]

  test('on every kind of answer', async () => {
    for (const { headers } of await everywhere()) {
      const policy = new Map(
        String(headers['content-security-policy'])
          .split('; ')
          .map((part) => [part.split(' ')[0], part.split(' ').slice(1).join(' ')]),
      )
      expect(policy.get('default-src')).toBe("'none'")
      expect(policy.get('script-src')).toBe("'self'")
      expect(policy.get('style-src')).toBe("'self'")
      expect(policy.get('style-src-attr')).toBe("'none'")
      expect(policy.get('frame-ancestors')).toBe("'none'")
      expect(policy.get('base-uri')).toBe("'none'")
      expect(policy.get('form-action')).toBe("'self'")
      expect(policy.get('object-src')).toBe("'none'")
      expect([...policy.values()].join(' ')).not.toMatch(/unsafe|\*|https?:/)
      expect(headers).toMatchObject({
        'x-content-type-options': 'nosniff',
        'x-frame-options': 'DENY',
        'referrer-policy': 'same-origin',
        'cross-origin-opener-policy': 'same-origin',
        'cross-origin-resource-policy': 'same-origin',
        'cache-control': 'no-store',
      })
      expect(headers['x-powered-by']).toBeUndefined()
      expect(headers.server).toBeUndefined()
      // Plain http on loopback: a browser must not be told to insist on https here.
      expect(headers['strict-transport-security']).toBeUndefined()
      expect(headers['x-request-id']).toMatch(/^[0-9a-f-]{36}$/)
    }
  })

  test('a request id of a stranger is not taken', async () => {
    const answer = await admin.get('/healthz').set('X-Request-Id', 'chosen-by-a-stranger')
    expect(answer.headers['x-request-id']).not.toBe('chosen-by-a-stranger')
  })

  test('behind an https proxy: HSTS, a cookie bound to the host, the proxy’s request id', async () => {
    const secure = {
      secure: true,
      loopback: false,
      trustProxy: 1,
      publicOrigin: 'https://l.example',
      origins: ['https://l.example'],
    }
    const https = await createTestApp({ config: secure })
    const person = await https.people.person('Hal Proxied')
    const proxied = { Origin: 'https://l.example', 'X-Forwarded-Proto': 'https', 'X-Request-Id': 'from-the-proxy-1' }
    const answer = await supertest(https.app)
      .post(`${apiRoot}/session`)
      .set(proxied)
      .send({ email: person.email, password: 'four otters mend clocks' })
    expect(answer.status).toBe(200)
    expect(String(answer.headers['set-cookie'])).toMatch(
      /^__Host-brinkbook=s%3A[^;]+; Path=\/; HttpOnly; Secure; SameSite=Lax$/,
    )
    expect(answer.headers['strict-transport-security']).toBe('max-age=31536000; includeSubDomains')
    expect(answer.headers['x-request-id']).toBe('from-the-proxy-1')
    await https.close()
  })

  test('forwarded headers of a stranger change nothing', async () => {
    const answer = await supertest(t.app)
      .get(`${apiRoot}/session`)
      .set({ 'X-Forwarded-For': '203.0.113.9', 'X-Forwarded-Proto': 'https', 'X-Forwarded-Host': 'evil.example' })
    expect(answer.status).toBe(200)
    expect(answer.headers['strict-transport-security']).toBeUndefined()
  })
})

describe('the server’s own log', () => {
  test('has the route template, person, status and id, but no address, secret, cookie or body', async () => {
    log.length = 0
    const token = 'T'.repeat(43)
    await admin.get(`${apiRoot}/invitations/${token}?x=1`)
    const answer = await t.people
      .signedOut()
      .post(`${apiRoot}/session`)
      .set('Origin', testOrigin)
      .send({ email: 'line\nbreak@example.org', password: 'never written down' })
    expect(answer.status).toBe(400)
    const lines = log.map((line): Record<string, unknown> => JSON.parse(line))
    expect(lines[0]).toMatchObject({ level: 'warn', method: 'GET', route: '/invitations/:token', status: 400 })
    expect(lines[0]?.person).toEqual(expect.any(Number))
    expect(lines[1]).toMatchObject({ route: '/session', status: 400, requestId: answer.headers['x-request-id'] })
    expect(log.join('')).not.toMatch(/TTTT|never written down|break@|brinkbook=|"headers"/)
    for (const line of log) expect(line.trimEnd()).not.toContain('\n')
  })
})
