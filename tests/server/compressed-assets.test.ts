import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import os from 'node:os'
import path from 'node:path'
import { brotliDecompressSync, gunzipSync } from 'node:zlib'
import express from 'express'
import supertest from 'supertest'
import { afterAll, beforeAll, describe, expect, test } from 'vitest'
import { compressedAssets } from '#server/http/compressed-assets.ts'

const script = 'export const edge = 58.04 // m/s\n'.repeat(500)
const folder = mkdtempSync(path.join(os.tmpdir(), 'brinkbook-assets-'))
const app = express()

beforeAll(() => {
  mkdirSync(path.join(folder, 'assets'))
  writeFileSync(path.join(folder, 'assets/main-a1b2.js'), script)
  writeFileSync(path.join(folder, 'assets/face-c3d4.woff2'), Buffer.from([1, 2, 3]))
  writeFileSync(path.join(folder, 'secret.js'), 'not an asset')
  app.use('/assets', compressedAssets(path.join(folder, 'assets')))
  app.use((_request, response) => void response.send('handed on'))
})
afterAll(() => rmSync(folder, { recursive: true }))

const get = (file: string, encoding: string) =>
  supertest(app)
    .get(file)
    .set('Accept-Encoding', encoding)
    .buffer(true)
    .parse((response, done) => {
      const parts: Buffer[] = []
      // The bytes as they came: the client would unpack gzip by itself.
      response.on('data', (part: Buffer) => parts.push(part))
      response.on('end', () => done(null, Buffer.concat(parts)))
    })

describe('built assets', () => {
  test('come in the best encoding the browser takes, kept for good', async () => {
    const answer = await get('/assets/main-a1b2.js', 'gzip, deflate, br')
    expect(answer.headers).toMatchObject({
      'content-encoding': 'br',
      'cache-control': 'public, max-age=31536000, immutable',
      vary: 'Accept-Encoding',
    })
    expect(answer.headers['content-type']).toMatch(/^text\/javascript/)
    const body: unknown = answer.body
    if (!Buffer.isBuffer(body)) throw new Error('no bytes')
    expect(body.length).toBeLessThan(script.length / 10)
    expect(brotliDecompressSync(body).toString('utf8')).toBe(script)
  })

  test('come as gzip where that is all the browser takes', async () => {
    const answer = await get('/assets/main-a1b2.js', 'gzip')
    expect(answer.headers['content-encoding']).toBe('gzip')
    const body: unknown = answer.body
    if (!Buffer.isBuffer(body)) throw new Error('no bytes')
    // superagent unpacks gzip before it hands the bytes on; either way the text is the same.
    const unpacked = body[0] === 0x1f && body[1] === 0x8b ? gunzipSync(body) : body
    expect(unpacked.toString('utf8')).toBe(script)
  })

  test.each([
    ['/assets/main-a1b2.js', 'identity'],
    ['/assets/face-c3d4.woff2', 'br'],
    ['/assets/none-0000.js', 'br'],
    ['/assets/..%2fsecret.js', 'br'],
    ['/assets/%2e%2e/secret.js', 'br'],
  ])('%s with %s is left to the next handler', async (file, encoding) => {
    const answer = await get(file, encoding)
    expect(answer.headers['content-encoding']).toBeUndefined()
    expect(String(answer.body)).toBe('handed on')
  })
})
