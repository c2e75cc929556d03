import { mkdtempSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs'
import os from 'node:os'
import path from 'node:path'
import { afterAll, describe, expect, test } from 'vitest'
import { ConfigError, readConfig } from '#server/config.ts'

const folder = mkdtempSync(path.join(os.tmpdir(), 'brinkbook-config-'))
afterAll(() => rmSync(folder, { recursive: true }))

const secret = 'Zr4-kq81_mWx02cPfT6yhVb9LnSd3GjA'
const good = { DATABASE_URL: 'mysql://u:p@127.0.0.1:3307/library', SESSION_SECRET: secret }
const refusal = (environment: Record<string, string>) => {
  try {
    readConfig(environment)
  } catch (error) {
    if (error instanceof ConfigError) return error.message
    throw error
  }
  return 'accepted'
}

describe('a good configuration', () => {
  test('serves on loopback, port 4180, unless told otherwise', () => {
    const config = readConfig(good)
    expect(config).toMatchObject({
      mode: 'production',
      port: 4180,
      host: '127.0.0.1',
      publicOrigin: 'http://127.0.0.1:4180',
      loopback: true,
      secure: false,
      trustProxy: 0,
      sessionSecrets: [secret],
    })
    expect(config.origins).toEqual(['http://127.0.0.1:4180', 'http://localhost:4180', 'http://[::1]:4180'])
  })

  test('believes one proxy where people come by https, and only their origin', () => {
    const config = readConfig({
      ...good,
      BRINKBOOK_PUBLIC_URL: 'https://library.example.org',
      BRINKBOOK_HOST: '0.0.0.0',
    })
    expect(config).toMatchObject({ secure: true, loopback: false, trustProxy: 1, host: '0.0.0.0' })
    expect(config.origins).toEqual(['https://library.example.org'])
  })

  test('takes several secrets, the first to sign with', () => {
    const older = [...secret].reverse().join('')
    expect(readConfig({ ...good, SESSION_SECRET: `${secret}, ${older}` }).sessionSecrets).toEqual([secret, older])
  })

  test('reads secrets from files', () => {
    const file = path.join(folder, 'url')
    writeFileSync(file, 'mysql://u:q@127.0.0.1/library\n')
    expect(readConfig({ DATABASE_URL_FILE: file, SESSION_SECRET: secret }).databaseUrl).toBe(
      'mysql://u:q@127.0.0.1/library',
    )
  })

  test('makes a secret of its own beside the data, once, for this user only', () => {
    const data = path.join(folder, 'data')
    const environment = { DATABASE_URL: good.DATABASE_URL, BRINKBOOK_DATA: data }
    const [first] = readConfig(environment).sessionSecrets
    expect(Buffer.from(first, 'base64url')).toHaveLength(48)
    expect(readConfig(environment).sessionSecrets).toEqual([first])
    const file = path.join(data, 'session-secret')
    expect(readFileSync(file, 'utf8').trim()).toBe(first)
    expect(statSync(file).mode & 0o777).toBe(0o600)
  })
})

describe('a bad configuration is refused by name', () => {
  test.each([
    ['DATABASE_URL', { SESSION_SECRET: secret }],
    ['DATABASE_URL', { ...good, DATABASE_URL: 'postgres://u@h/x' }],
    ['DATABASE_URL', { ...good, DATABASE_URL: 'mysql://u@h/' }],
    ['DATABASE_URL_FILE', { SESSION_SECRET: secret, DATABASE_URL_FILE: path.join(folder, 'absent') }],
    ['DATABASE_URL and DATABASE_URL_FILE', { ...good, DATABASE_URL_FILE: path.join(folder, 'absent') }],
    ['SESSION_SECRET', { ...good, SESSION_SECRET: 'short' }],
    ['SESSION_SECRET', { ...good, SESSION_SECRET: 'a'.repeat(64) }],
    ['SESSION_SECRET', { ...good, SESSION_SECRET: `${secret},short` }],
    ['PORT', { ...good, PORT: '0' }],
    ['PORT', { ...good, PORT: '65536' }],
    ['PORT', { ...good, PORT: '4180x' }],
    ['NODE_ENV', { ...good, NODE_ENV: 'staging' }],
    ['BRINKBOOK_LOG_LEVEL', { ...good, BRINKBOOK_LOG_LEVEL: 'loud' }],
    ['BRINKBOOK_PUBLIC_URL', { ...good, BRINKBOOK_PUBLIC_URL: 'library' }],
    ['BRINKBOOK_PUBLIC_URL', { ...good, BRINKBOOK_PUBLIC_URL: 'https://library.example.org/x' }],
    ['BRINKBOOK_TRUST_PROXY', { ...good, BRINKBOOK_TRUST_PROXY: 'yes' }],
  ])('%s', (name, environment) => {
    expect(refusal(environment)).toContain(name)
  })

  test('plain http anywhere but on loopback', () => {
    expect(refusal({ ...good, BRINKBOOK_PUBLIC_URL: 'http://library.example.org' })).toContain('BRINKBOOK_PUBLIC_URL')
    expect(refusal({ ...good, BRINKBOOK_HOST: '0.0.0.0' })).toContain('BRINKBOOK_HOST')
    expect(refusal({ ...good, BRINKBOOK_HOST: '192.0.2.7' })).toContain('BRINKBOOK_HOST')
    // 127.example.org is no loopback address.
    expect(refusal({ ...good, BRINKBOOK_PUBLIC_URL: 'http://127.0.0.1.example.org' })).toContain('BRINKBOOK_PUBLIC_URL')
  })

  test('https without a proxy to end it', () => {
    const https = { ...good, BRINKBOOK_PUBLIC_URL: 'https://library.example.org', BRINKBOOK_TRUST_PROXY: '0' }
    expect(refusal(https)).toContain('BRINKBOOK_TRUST_PROXY')
  })
})
