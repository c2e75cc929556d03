import { once } from 'node:events'
import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { connect } from 'node:net'
import os from 'node:os'
import path from 'node:path'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { z } from 'zod'
import { createTestApp, type TestApp } from '#tests/support/app.ts'
import { expectProblem, tab } from '#tests/support/http.ts'

// A built client in small: what vite writes is a page with a placeholder for the nonce and assets with a hash.
const directory = mkdtempSync(path.join(os.tmpdir(), 'brinkbook-client-'))
const page = '<!doctype html><meta name="csp-nonce" content="%CSP_NONCE%"><style nonce="%CSP_NONCE%"></style>'
let t: TestApp
beforeAll(async () => {
  mkdirSync(path.join(directory, 'assets'))
  writeFileSync(path.join(directory, 'index.html'), page)
  writeFileSync(path.join(directory, 'theme.js'), '1')
  writeFileSync(path.join(directory, '.secret'), 'x')
  writeFileSync(path.join(directory, 'assets', 'main-abc123.js'), '2')
  t = await createTestApp({ client: { kind: 'built', directory } })
})
afterAll(async () => {
  await t.close()
  rmSync(directory, { recursive: true })
})

/** The head of an answer to exactly this target, which no client has tidied up. */
async function rawGet(target: string): Promise<string> {
  const server = t.app.listen(0, '127.0.0.1')
  await once(server, 'listening')
  const { port } = z.object({ port: z.number() }).parse(server.address())
  const socket = connect(port, '127.0.0.1')
  socket.write(`GET ${target} HTTP/1.1\r\nHost: 127.0.0.1\r\nConnection: close\r\n\r\n`)
  let text = ''
  for await (const chunk of socket) text += String(chunk)
  server.close()
  return text.split('\r\n\r\n')[0] ?? ''
}

const nonceIn = (policy: unknown) => /style-src 'self' 'nonce-([A-Za-z0-9+/]{22}==)';/.exec(String(policy))?.[1]

describe('the page', () => {
  test.each(['/', '/m/RD-017', '/m/RD-017/rev/2.1.0', '/m/RD-017/edit', '/sign-in', `/invitations/${'x'.repeat(43)}`])(
    'answers %s, never kept, with a nonce of its own that the policy names',
    async (address) => {
      const first = await tab(t.app).get(address)
      expect(first.status).toBe(200)
      expect(first.headers['content-type']).toBe('text/html; charset=utf-8')
      expect(first.headers['cache-control']).toBe('no-store')
      const nonce = nonceIn(first.headers['content-security-policy'])
      expect(nonce).toBeDefined()
      expect(first.text).toBe(page.replaceAll('%CSP_NONCE%', nonce ?? ''))
      const second = nonceIn((await tab(t.app).get(address)).headers['content-security-policy'])
      expect(second).not.toBe(nonce)
    },
  )

  test('index.html by its own name is not handed out with the placeholder', async () => {
    expectProblem(await tab(t.app).get('/index.html'), 'not-found')
  })

  test('may not be posted to', async () => {
    expectProblem(await tab(t.app).post('/'), 'not-found')
  })
})

describe('assets', () => {
  test('with a hash in their name are kept for good', async () => {
    const answer = await tab(t.app).get('/assets/main-abc123.js')
    expect(answer.status).toBe(200)
    expect(answer.headers['cache-control']).toBe('public, max-age=31536000, immutable')
    expect(answer.headers['x-content-type-options']).toBe('nosniff')
    expect(nonceIn(answer.headers['content-security-policy'])).toBeUndefined()
  })

  test('without one are asked for each time', async () => {
    expect((await tab(t.app).get('/theme.js')).headers['cache-control']).toBe('public, max-age=0')
  })

  test.each([
    '/assets/absent.js',
    '/assets/',
    '/.secret',
    '/.git/config',
    '/assets/../.secret',
    '/%2e%2e%2f%2e%2e%2fpackage.json',
    '/..%2f..%2fpackage.json',
    '/absent.png',
    '/src/main.tsx',
    '/package.json',
  ])('%s is nothing', async (address) => {
    expectProblem(await tab(t.app).get(address), 'not-found')
  })
})

describe('redirects', () => {
  // There are none: whatever an address holds, nobody is ever sent elsewhere by the server.
  test.each([
    '//evil.example',
    '//evil.example/%2e%2e',
    '///evil.example',
    '/\\evil.example',
    '/%5cevil.example',
    '/%2f%2fevil.example/',
    '/assets',
    '/assets//evil.example',
    '/assets/..//evil.example',
    '/m/RD-017/',
    '/sign-in?next=//evil.example',
    '/sign-in?next=https://evil.example',
    '/sign-in?next=%2f%2fevil.example',
    '/sign-in?next=javascript:alert(1)',
    '/sign-in?next=/%5Cevil.example',
    '/http://evil.example',
    '/https:evil.example',
    '/%0d%0aLocation:%20https://evil.example',
    '/.%2e//evil.example',
    '/api/v1//evil.example',
  ])('%s', async (address) => {
    const answer = await rawGet(address)
    expect(answer).toMatch(/^HTTP\/1\.1 (200|400|404) /)
    expect(answer).not.toMatch(/^location:/im)
  })
})

describe('in development', () => {
  test('the bundler’s page comes without a policy', async () => {
    const html = path.join(directory, 'index.html')
    const development = await createTestApp({
      config: { mode: 'development' },
      client: {
        kind: 'bundler',
        middleware: (_request, _response, next) => next(),
        transform: async (url, text) => `${text}<!-- ${url} -->`,
        html,
      },
    })
    const answer = await tab(development.app).get('/new?x=1')
    expect(answer.headers['content-security-policy']).toBeUndefined()
    expect(answer.headers['x-content-type-options']).toBe('nosniff')
    expect(answer.text).toMatch(/content="[A-Za-z0-9+/]{22}=="/)
    expect(answer.text).toContain('<!-- /new?x=1 -->')
    await development.close()
  })
})
