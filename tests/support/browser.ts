import { type ChildProcess, spawn } from 'node:child_process'
import { once } from 'node:events'
import { existsSync, mkdtempSync, rmSync } from 'node:fs'
import { createServer } from 'node:net'
import os from 'node:os'
import path from 'node:path'
import { setTimeout as sleep } from 'node:timers/promises'
import { AxeBuilder } from '@axe-core/playwright'
import express from 'express'
import { type Browser, type BrowserContext, chromium, type Page } from 'playwright-core'
import { afterAll, afterEach, beforeAll, expect } from 'vitest'
import { z } from 'zod'
import { freshDatabase } from './database.ts'
import { createPeople } from './users.ts'

const root = path.resolve(import.meta.dirname, '../..')

export const desktop = { width: 1440, height: 900 }
export const phone = { width: 390, height: 844 }

export interface TabOptions {
  size?: { width: number; height: number }
  scheme?: 'light' | 'dark'
  /** The browser's language; default British English. */
  locale?: string
  /**
   * Console errors this test brings about on purpose, such as /status of 401/ for a wrong password (the browser itself
   * logs every answer from 400 on). Anything else in the console, an uncaught error or a violation of the page's policy
   * fails the test.
   */
  expected?: RegExp[]
}

const argumentsOfChromium = [
  '--no-sandbox',
  '--disable-gpu',
  '--disable-quic',
  '--no-first-run',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
  // Nothing but this machine is ever reached.
  '--host-resolver-rules=MAP * ~NOTFOUND, EXCLUDE 127.0.0.1',
]

/**
 * The whole product for a file of browser tests: the built client and the real server in a process of its own, on a
 * fresh database, and Debian's Chromium. Call it once at the top of the file.
 */
export function browserLibrary(options: { environment?: Record<string, string> } = {}) {
  let started: Awaited<ReturnType<typeof startLibrary>> | undefined
  let browser: Browser | undefined
  const contexts = new Set<BrowserContext>()
  let faults: string[] = []

  const running = () => {
    if (!started || !browser) throw new Error('The library is not started yet: use it inside a test')
    return { library: started, browser }
  }

  beforeAll(async () => {
    started = await startLibrary(options.environment ?? {})
    const executablePath = process.env.CHROMIUM ?? '/usr/bin/chromium'
    browser = await chromium.launch({ executablePath, args: argumentsOfChromium })
  })
  afterEach(async () => {
    const seen = faults
    faults = []
    for (const context of contexts) await context.close()
    contexts.clear()
    expect(seen).toEqual([])
  })
  afterAll(async () => {
    await browser?.close()
    await started?.close()
  })

  /** A browser window of its own, with its own cookies; whatever goes wrong in it fails the test. */
  async function tab({
    size = desktop,
    scheme = 'light',
    locale = 'en-GB',
    expected = [],
  }: TabOptions = {}): Promise<Page> {
    const { library, browser: chrome } = running()
    const context = await chrome.newContext({
      viewport: size,
      colorScheme: scheme,
      reducedMotion: 'reduce',
      baseURL: library.origin,
      locale,
    })
    contexts.add(context)
    await context.exposeBinding(
      'reportViolation',
      (_source, text: unknown) => void faults.push(`policy: ${String(text)}`),
    )
    await context.addInitScript(() => {
      document.addEventListener('securitypolicyviolation', (event) => {
        const report: unknown = Reflect.get(window, 'reportViolation')
        if (typeof report === 'function') report(`${event.violatedDirective} ${event.blockedURI}`)
      })
    })
    context.on('console', (message) => {
      const text = message.text()
      if (message.type() === 'error' && !expected.some((pattern) => pattern.test(text))) faults.push(`console: ${text}`)
    })
    context.on('weberror', (error) => void faults.push(`uncaught: ${error.error().message}`))
    return context.newPage()
  }

  return {
    tab,
    get origin() {
      return running().library.origin
    },
    get db() {
      return running().library.db
    },
    /** Makes people and groups straight in the database; everybody's password is `password` of support/users.ts. */
    get people() {
      return running().library.people
    },
    get server() {
      return running().library
    },
  }
}

const portOf = z.object({ port: z.number() })
async function freePort(): Promise<number> {
  const probe = createServer().listen(0, '127.0.0.1')
  await once(probe, 'listening')
  const { port } = portOf.parse(probe.address())
  probe.close()
  await once(probe, 'close')
  return port
}

async function startLibrary(environment: Record<string, string>) {
  if (!existsSync(path.join(root, 'dist/index.html'))) throw new Error('Build the client first: npm run build')
  const database = await freshDatabase()
  const data = mkdtempSync(path.join(os.tmpdir(), 'brinkbook-browser-'))
  const port = await freePort()
  const origin = `http://127.0.0.1:${port}`
  const env = {
    PATH: process.env.PATH,
    NODE_ENV: 'production',
    PORT: String(port),
    DATABASE_URL: database.url,
    BRINKBOOK_DATA: data,
    BRINKBOOK_LOG_LEVEL: 'warn',
    ...environment,
  }
  let child: ChildProcess
  let output = ''

  const start = async () => {
    child = spawn(process.execPath, ['--import', 'tsx', 'server/index.ts'], { cwd: root, env, stdio: 'pipe' })
    for (const stream of [child.stdout, child.stderr]) {
      stream?.on('data', (chunk: Buffer) => {
        output += chunk.toString('utf8')
      })
    }
    for (let tries = 0; tries < 600; tries++) {
      if (child.exitCode !== null) throw new Error(`The server ended (${child.exitCode}).\n${output}`)
      const answer = await fetch(`${origin}/readyz`).catch(() => null)
      if (answer?.ok) return
      await sleep(100)
    }
    throw new Error(`The server did not become ready.\n${output}`)
  }
  const end = async (signal: 'SIGTERM' | 'SIGKILL') => {
    if (child.exitCode !== null || child.signalCode !== null) return
    const ended = once(child, 'exit')
    child.kill(signal)
    await ended
  }

  await start()
  return {
    origin,
    db: database.db,
    people: createPeople(express(), database.db),
    /** What the server logged (warnings and errors) and printed. */
    output: () => output,
    /** The same address again, after `end`. */
    start,
    end,
    close: async () => {
      await end('SIGTERM')
      await database.close()
      rmSync(data, { recursive: true, force: true })
    },
  }
}

/** Signs in through the form, as a person would, and waits for the screen that follows. */
export async function signIn(page: Page, email: string, password: string, next = '/'): Promise<void> {
  await page.goto(`/sign-in?next=${encodeURIComponent(next)}`)
  await page.getByLabel('E-mail').fill(email)
  await page.getByLabel('Password', { exact: true }).fill(password)
  await page.getByRole('button', { name: 'Sign in', exact: true }).click()
  await page.waitForURL((url) => !url.pathname.startsWith('/sign-in'))
}

/** Fails where axe finds anything serious or critical by WCAG 2.2 A and AA; the message names rule and element. */
export async function expectAccessible(page: Page): Promise<void> {
  const { violations } = await new AxeBuilder({ page })
    .withTags(['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa'])
    .analyze()
  const serious = violations
    .filter((violation) => violation.impact === 'serious' || violation.impact === 'critical')
    .flatMap((violation) => violation.nodes.map((node) => `${violation.id}: ${node.html}`))
  expect(serious).toEqual([])
}

/** Fails where the page scrolls sideways. */
export async function expectNoSidewaysScroll(page: Page): Promise<void> {
  const beyond = await page.evaluate(() => document.documentElement.scrollWidth - window.innerWidth)
  expect(beyond).toBeLessThanOrEqual(0)
}
