import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import os from 'node:os'
import path from 'node:path'
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

/** The text as the client unpacked it; the length on the wire stands in the header. */
const get = (file: string, encoding: string) =>
  supertest(app)
    .get(file)
    .set('Accept-Encoding', encoding)
    .buffer(true)
    .parse((response, done) => {
      let text = ''
      response.on('data', (part: Buffer) => {
        text += part.toString('utf8')
      })
      response.on('end', () => done(null, text))
    })

describe('built assets', () => {
  test.each([
    ['gzip, deflate, br', 'br'],
    ['gzip', 'gzip'],
  ])('where the browser takes %s they come as %s, kept for good', async (accepted, encoding) => {
    const answer = await get('/assets/main-a1b2.js', accepted)
    expect(answer.headers).toMatchObject({
      'content-encoding': encoding,
      'cache-control': 'public, max-age=31536000, immutable',
      vary: 'Accept-Encoding',
    })
    expect(answer.headers['content-type']).toMatch(/^text\/javascript/)
    expect(Number(answer.headers['content-length'])).toBeLessThan(script.length / 10)
    expect(answer.body).toBe(script)
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
    expect(answer.body).toBe('handed on')
  })
})
