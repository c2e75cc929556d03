import type { Page } from 'playwright-core'
import { beforeEach, describe, expect, test } from 'vitest'
import { browserLibrary, expectAccessible, expectNoSidewaysScroll, phone, signIn } from '#tests/support/browser.ts'
import { equationBlock, equationLines, expectVerdict, openDraft, saved } from '#tests/support/draft-page.ts'
import { password, type TestGroup, type TestPerson } from '#tests/support/users.ts'

/** What the co-edit view does beside the straight path: faults, undo, lost lines, phones. Each test has a page of its own. */
const library = browserLibrary()
let group: TestGroup
let cora: TestPerson
let mara: TestPerson
let made = 0
let code: string

beforeEach(async () => {
  if (made++ === 0) {
    cora = await library.people.person('Cora Vane')
    mara = await library.people.person('Mara Kettle')
    group = await library.people.group('Kiln Lab', 'KLN', [
      [cora, 'contributor'],
      [mara, 'maintainer'],
    ])
  }
})

/** A page made through the API of the person's own tab; it begins with a small model that has a soft onset. */
async function open(who: TestPerson, options?: Parameters<typeof library.tab>[0]): Promise<Page> {
  const tab = await library.tab(options)
  await signIn(tab, who.email, password)
  code = await tab.evaluate(async ({ slug, prefix }) => {
    const answer = await fetch(`/api/v1/groups/${slug}/pages`, {
      method: 'POST',
      headers: { 'Content-Type': 'application/json', 'Idempotency-Key': crypto.randomUUID() },
      body: JSON.stringify({ prefix, title: 'Kiln fan' }),
    })
    return String((await answer.json()).code)
  }, group)
  await openDraft(tab, code)
  return tab
}

const typeAtEnd = async (tab: Page, text: string) => {
  await equationBlock(tab).click()
  await tab.keyboard.press('Control+End')
  await tab.keyboard.type(text)
}
const whatIsLost = /WebSocket|ERR_CONNECTION_REFUSED|ERR_EMPTY_RESPONSE|ERR_CONNECTION_RESET|Failed to load resource/

describe('leaving the draft', () => {
  test('waits for edits that are not saved, asks, and keeps what was left behind as lines', async () => {
    const tab = await open(cora, { expected: [whatIsLost] })
    await library.server.end('SIGKILL')
    await tab.getByText('Working without the others').waitFor()
    await typeAtEnd(tab, '\n# while nobody listened')
    await tab.getByRole('link', { name: 'Library', exact: true }).click()
    const dialog = tab.getByRole('dialog', { name: /not saved$/ })
    await dialog.waitFor()
    await expectAccessible(tab)
    await dialog.getByRole('button', { name: 'Stay' }).click()
    expect((await equationLines(tab)).at(-1)).toBe('# while nobody listened')

    await tab.getByRole('link', { name: 'Library', exact: true }).click()
    await dialog.getByRole('button', { name: /^Leave without/ }).click()
    await library.server.start()
    await tab.waitForURL((url) => url.pathname === '/')
    // Through the app, as a person goes: what was left is kept in this tab.
    const row = tab.getByRole('link', { name: /Kiln fan/ }).first()
    const again = tab.getByRole('button', { name: 'Try again now' })
    await row.or(again).first().waitFor()
    if (await again.isVisible()) await again.click()
    await row.click()
    // Nothing of the page is in force: it opens at its draft.
    await tab.waitForURL(`**/m/${code}/edit`)
    const kept = tab.getByRole('region', { name: 'Lines that were not saved' })
    await kept.waitFor()
    expect(await kept.getByRole('textbox').inputValue()).toBe('# while nobody listened')
    expect((await equationLines(tab)).at(-1)).not.toBe('# while nobody listened')
    await kept.getByRole('button', { name: 'Dismiss' }).click()
    await kept.waitFor({ state: 'detached' })
  })

  test('goes on by itself once the library has every edit', async () => {
    const tab = await open(cora)
    await typeAtEnd(tab, '\n# on the way out')
    await tab.getByRole('link', { name: 'Library', exact: true }).click()
    await tab.waitForURL((url) => url.pathname === '/')
    await openDraft(tab, code)
    expect((await equationLines(tab)).at(-1)).toBe('# on the way out')
  })
})

describe('in the draft', () => {
  test('a fault without a line leads to its field, and the draft is not sent before it is settled', async () => {
    const tab = await open(cora)
    const second = tab.getByLabel('Second control', { exact: true })
    const control = await tab.getByLabel('Control parameter', { exact: true }).inputValue()
    await second.selectOption(control)
    const list = tab.getByRole('list', { name: 'Faults of the model' })
    await list.getByRole('button').click()
    expect(await second.evaluate((field) => field === document.activeElement)).toBe(true)
    await expectAccessible(tab)
    await tab.keyboard.press('Control+Shift+Enter')
    await second.selectOption('')
    await list.waitFor({ state: 'detached' })
    await saved(tab)
    // What was asked for too early does not open by itself now.
    expect(await tab.getByRole('dialog', { name: 'Send for review' }).count()).toBe(0)
    await tab.keyboard.press('Control+Shift+Enter')
    await tab.getByRole('dialog', { name: 'Send for review' }).waitFor()
  })

  test('an uncertainty is a cell of its row', async () => {
    const tab = await open(cora)
    const cell = tab.getByLabel(/^Uncertainty of/).first()
    await cell.fill('about 3')
    await tab.getByText('Write the uncertainty as').first().waitFor()
    await cell.fill('normal 0.02')
    await expect.poll(() => tab.getByText('Write the uncertainty as').count()).toBe(0)
    await saved(tab)
  })

  test('Ctrl+Z takes back text and cells in the order they were made', async () => {
    const tab = await open(cora)
    const cell = tab.getByLabel(/^Meaning of/).first()
    const before = await cell.inputValue()
    const lines = await equationLines(tab)
    await cell.fill('fan speed')
    await typeAtEnd(tab, ' # loud')
    await tab.keyboard.press('Control+z')
    await expect.poll(() => equationLines(tab)).toEqual(lines)
    expect(await cell.inputValue()).toBe('fan speed')
    await tab.keyboard.press('Control+z')
    await expect.poll(() => cell.inputValue()).toBe(before)
    await cell.focus()
    await tab.keyboard.press('Control+y')
    await expect.poll(() => cell.inputValue()).toBe('fan speed')
  })

  test('Ctrl+Enter runs the analysis again and puts nothing into the block', async () => {
    const tab = await open(cora)
    const lines = await equationLines(tab)
    await equationBlock(tab).click()
    const runs = () => tab.evaluate(() => performance.getEntriesByName('card-update').at(-1)?.startTime ?? 0)
    const first = await runs()
    await tab.keyboard.press('Control+Enter')
    await expect.poll(runs, { timeout: 30_000 }).toBeGreaterThan(first)
    expect(await equationLines(tab)).toEqual(lines)
    await expectVerdict(tab, 'Soft onset')
  })

  test('lines changed since the revision in force bear its triangle, and are named to those who do not see it', async () => {
    const tab = await open(cora)
    const answer = await tab.evaluate(async (at) => {
      const post = (path: string, body: object, headers = {}) =>
        fetch(`/api/v1/pages/${at}/revisions${path}`, {
          method: 'POST',
          headers: { 'Content-Type': 'application/json', 'Idempotency-Key': crypto.randomUUID(), ...headers },
          body: JSON.stringify(body),
        })
      return (await post('', { summary: 'First go', generation: 1 })).status
    }, code)
    expect(answer).toBe(201)
    const other = await library.tab()
    await signIn(other, mara.email, password)
    const approved = await other.evaluate(
      async ({ at, secret }) => {
        const address = `/api/v1/pages/${at}/revisions/1.0.0`
        const { revision } = await (await fetch(address)).json()
        const headers = { 'Content-Type': 'application/json', 'If-Match': `"${revision.etag}"` }
        const body = JSON.stringify({ password: secret, equationsRead: true, verdictRead: true })
        return (await fetch(`${address}/approve`, { method: 'POST', headers, body })).status
      },
      { at: code, secret: password },
    )
    expect(approved).toBe(200)
    await openDraft(tab, code)
    const lines = await equationLines(tab)
    expect(await tab.locator('.cm-change-marks svg').count()).toBe(0)
    await typeAtEnd(tab, ' # measured again')
    const mark = tab.locator('.cm-change-marks svg')
    await mark.waitFor()
    expect(await mark.getAttribute('aria-label')).toBe(`Line ${lines.length} changed since revision 1.0.0`)
    const described = await equationBlock(tab).getAttribute('aria-describedby')
    expect(await tab.locator(`[id="${described}"]`).textContent()).toBe(
      `Changed since revision 1.0.0: line ${lines.length}.`,
    )
    await expectAccessible(tab)
  })

  test('on a phone the equations are read only, and it says why', async () => {
    const tab = await open(cora, { size: phone })
    await tab.getByText('Equations are read only in a window this narrow').waitFor()
    expect(await equationBlock(tab).getAttribute('contenteditable')).toBe('false')
    await tab
      .getByLabel(/^Meaning of/)
      .first()
      .fill('fan speed')
    await saved(tab)
    await expectAccessible(tab)
    await expectNoSidewaysScroll(tab)
  })
})
