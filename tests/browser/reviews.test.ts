import type { Page } from 'playwright-core'
import { beforeAll, describe, expect, test } from 'vitest'
import { findPageByCode } from '#server/queries/pages.ts'
import type { ModelDocument } from '#shared/model/document.ts'
import {
  browserLibrary,
  expectAccessible,
  expectNoSidewaysScroll,
  phone,
  signIn,
  type TabOptions,
} from '#tests/support/browser.ts'
import { oscillator } from '#tests/support/pages.ts'
import { password, type TestPerson } from '#tests/support/users.ts'

/** A review as those see it who check: changes led through by keys, remarks kept, nothing approved on a phone. */
const library = browserLibrary()
const code = 'KIL-01'
let juno: TestPerson
let bram: TestPerson
let kezia: TestPerson

beforeAll(async () => {
  const { people } = library
  juno = await people.person('Juno Skarlett-Pym')
  bram = await people.person('Bram Quillfeather')
  kezia = await people.person('Kezia Bolderwick')
  await people.group('Kiln Rig', 'KIL', [
    [juno, 'contributor'],
    [bram, 'maintainer'],
    [kezia, 'maintainer'],
  ])
})

async function open(who: TestPerson, at: string, options?: TabOptions): Promise<Page> {
  const tab = await library.tab(options)
  await signIn(tab, who.email, password, at)
  return tab
}

/** One request in the tab's own session. */
async function ask(tab: Page, method: 'POST' | 'PATCH', path: string, data: unknown, etag?: string): Promise<void> {
  const headers = {
    Origin: library.origin,
    'Idempotency-Key': `key-of-a-test-${Math.random()}`,
    ...(etag ? { 'If-Match': etag } : {}),
  }
  const answer = await tab.context().request.fetch(`/api/v1${path}`, { method, data, headers })
  if (!answer.ok()) throw new Error(`${method} ${path}: ${answer.status()} ${await answer.text()}`)
}

const makePage = (tab: Page, document: ModelDocument) =>
  ask(tab, 'POST', '/groups/kiln-rig/pages', { prefix: 'KIL', title: document.title, document })

async function send(tab: Page, page: string, summary: string): Promise<void> {
  const row = await findPageByCode(library.db, page)
  await ask(tab, 'POST', `/pages/${page}/revisions`, { summary, generation: row?.generation })
}

const focused = (tab: Page) => tab.evaluate(() => document.activeElement?.textContent ?? '')

describe('a review', () => {
  test('n and p lead through the changes, m to the remark, and typing is left alone', async () => {
    const writer = await open(juno, '/')
    await makePage(writer, oscillator({ citations: [{ id: 'rig', title: 'Rig report' }] }))
    await send(writer, code, 'First issue')
    const tab = await open(bram, `/reviews/${code}/1.0.0`)
    await tab.getByRole('heading', { name: 'Approving this puts the first revision in force' }).waitFor()
    await tab.keyboard.press('n')
    expect(await focused(tab)).toContain('net growth rate')
    await tab.keyboard.press('n')
    expect(await focused(tab)).toContain('pitch')
    await tab.keyboard.press('p')
    expect(await focused(tab)).toContain('net growth rate')
    await tab.keyboard.press('m')
    await tab.keyboard.type('not monotone: n, p, m')
    expect(await tab.getByLabel('Remark 1').inputValue()).toBe('not monotone: n, p, m')
    await tab.getByText('You have written a remark').waitFor()
    await expectAccessible(tab)
  }, 60_000)

  test('a session that ends costs no remark: it is there again for the same person', async () => {
    const tab = await open(bram, `/reviews/${code}/1.0.0`, { expected: [/status of 401/] })
    await tab.getByLabel('Remark 1').fill('Where is the unit from?')
    await tab.context().clearCookies()
    await tab.getByRole('button', { name: 'Return with remarks' }).click()
    await tab.getByText('You were signed out').first().waitFor()
    await tab.waitForURL('**/sign-in?next=**')
    await tab.getByLabel('E-mail').fill(bram.email)
    await tab.getByLabel('Password', { exact: true }).fill(password)
    await tab.getByRole('button', { name: 'Sign in', exact: true }).click()
    await tab.waitForURL(`**/reviews/${code}/1.0.0`)
    expect(await tab.getByLabel('Remark 1').inputValue()).toBe('Where is the unit from?')
  }, 60_000)

  test('on a phone it can be remarked on, not approved', async () => {
    const tab = await open(kezia, `/reviews/${code}/1.0.0`, { size: phone })
    await tab.getByText('Approving needs the equations in full, on a wider screen.').waitFor()
    expect(await tab.getByRole('button', { name: 'Approve' }).count()).toBe(0)
    await tab.getByLabel('Remark 1').fill('Seen on the way')
    expect(await tab.getByRole('button', { name: 'Return with remarks' }).getAttribute('aria-disabled')).toBeNull()
    await expectNoSidewaysScroll(tab)
    await expectAccessible(tab)
  }, 60_000)

  test('settled by somebody else: nothing is signed, it says so, and a written remark is still there', async () => {
    const [slow, quick] = await Promise.all([
      open(bram, `/reviews/${code}/1.0.0`, { expected: [/status of 40[39]/] }),
      open(kezia, `/reviews/${code}/1.0.0`),
    ])
    await slow.getByLabel('Remark 1').fill('Too late')
    await quick.getByLabel('Equations, numbers and units read against their sources').check()
    await quick.getByLabel('Verdict and its consequence read').check()
    await quick.getByLabel('Your password, to sign as approved').fill(password)
    await quick.getByRole('button', { name: 'Approve' }).click()
    await quick.waitForURL(`**/m/${code}`)
    const title = quick.getByRole('banner').or(quick.locator('main header')).filter({ hasText: 'Checked' }).first()
    expect(await title.textContent()).toMatch(/CheckedK\. BolderwickApprovedK\. Bolderwick, \d+ \w+ \d{4} UTC/)

    await slow.getByRole('button', { name: 'Return with remarks' }).click()
    await slow.getByText('Nothing is returned. It may have been settled meanwhile.').waitFor()
    await slow.getByRole('button', { name: 'Read it again' }).click()
    await slow.getByRole('heading', { name: 'Your remarks, not sent' }).waitFor()
    await slow.getByText('Too late').waitFor()
  }, 60_000)
})

describe('what a maintainer finds elsewhere', () => {
  test('a page that never had a revision sent can be removed, after a question', async () => {
    const writer = await open(juno, '/')
    await makePage(writer, oscillator({ title: 'Made by mistake' }))
    const tab = await open(bram, '/m/KIL-02/record', { expected: [/status of 404/] })
    await tab.getByRole('button', { name: 'Remove this page' }).click()
    const dialog = tab.getByRole('dialog', { name: 'Remove KIL-02' })
    await expectAccessible(tab)
    await dialog.getByRole('button', { name: 'Keep it' }).click()
    await dialog.waitFor({ state: 'hidden' })
    expect((await findPageByCode(library.db, 'KIL-02'))?.removedAt).toBeNull()
    await tab.getByRole('button', { name: 'Remove this page' }).click()
    await dialog.getByRole('button', { name: 'Remove', exact: true }).click()
    await tab.waitForURL((url) => url.pathname === '/')
    expect((await findPageByCode(library.db, 'KIL-02'))?.removedAt).not.toBeNull()
    // Its writer is no maintainer: nothing is offered to her on a page of hers.
    await makePage(writer, oscillator({ title: 'Kept' }))
    await writer.goto('/m/KIL-03/record')
    await writer.getByText('No revision yet').waitFor()
    expect(await writer.getByRole('button', { name: 'Remove this page' }).count()).toBe(0)
  }, 60_000)

  test('a reader whose language writes a comma reads one, and copies a point', async () => {
    const tab = await open(bram, `/m/${code}`, { locale: 'de-DE' })
    const card = tab.getByRole('region', { name: 'Stability card' })
    await card.getByRole('heading').first().waitFor()
    // The page runs at -0.5.
    await card.getByText('running at −0,5000').first().waitFor()
    await card.getByText('Table', { exact: true }).first().click()
    const table = card.getByRole('table', { name: /Steady states along/ })
    await table.waitFor()
    expect(await table.getByRole('cell').allTextContents()).not.toContainEqual(expect.stringMatching(/,\d|−/))
  }, 60_000)
})
