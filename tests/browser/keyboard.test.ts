import type { Page } from 'playwright-core'
import { beforeAll, describe, expect, test } from 'vitest'
import { findPageByCode } from '#server/queries/pages.ts'
import { browserLibrary } from '#tests/support/browser.ts'
import { committed } from '#tests/support/collab-pages.ts'
import { editable, equationBlock, expectVerdict, saved } from '#tests/support/draft-page.ts'
import { password, type TestPerson } from '#tests/support/users.ts'

/** The same path by keyboard alone: nothing below clicks, fills or focuses anything. */
const library = browserLibrary()
const code = 'KEY-01'
let juno: TestPerson
let bram: TestPerson

beforeAll(async () => {
  const { people } = library
  juno = await people.person('Juno Skarlett-Pym')
  bram = await people.person('Bram Quillfeather')
  await people.group('Key Room', 'KEY', [
    [bram, 'maintainer'],
    [juno, 'contributor'],
  ])
})

/** Presses Tab (or Shift+Tab) until what has the focus is named so; fails after `most` presses. */
async function tabTo(
  page: Page,
  name: string | RegExp,
  options: { most?: number; back?: boolean } = {},
): Promise<void> {
  const seen: string[] = []
  for (let presses = 0; presses < (options.most ?? 60); presses++) {
    await page.keyboard.press(options.back ? 'Shift+Tab' : 'Tab')
    const focused = await page
      .locator(':focus')
      .first()
      .ariaSnapshot()
      .catch(() => '')
    const label = /"((?:[^"\\]|\\.)*)"/.exec(focused)?.[1] ?? focused
    seen.push(label)
    if (typeof name === 'string' ? label === name : name.test(label)) return
  }
  throw new Error(`Tab does not reach ${String(name)}; it went over ${seen.join(' | ')}`)
}

/** Replaces what stands in the field that has the focus. */
async function retype(page: Page, text: string): Promise<void> {
  await page.keyboard.press('Control+a')
  if (text === '') await page.keyboard.press('Delete')
  else await page.keyboard.type(text)
}

async function signInByKeys(page: Page, who: TestPerson): Promise<void> {
  await page.goto('/sign-in')
  await page.getByLabel('E-mail').waitFor()
  await tabTo(page, 'E-mail')
  await page.keyboard.type(who.email)
  await tabTo(page, 'Password')
  await page.keyboard.type(password)
  await page.keyboard.press('Enter')
  await page.getByRole('heading', { name: 'Library' }).first().waitFor()
}

describe('by keyboard alone', () => {
  test('a model is made, typed, run, moved along its control and sent for review', async () => {
    const page = await library.tab()
    page.setDefaultTimeout(20_000)
    await signInByKeys(page, juno)
    await tabTo(page, 'New model')
    await page.keyboard.press('Enter')
    await page.waitForURL('**/new')
    await page.getByLabel('Name', { exact: true }).first().waitFor()
    await tabTo(page, 'Name')
    await page.keyboard.type('Growth against cubic damping')
    await page.keyboard.press('Enter')
    await page.waitForURL(`**/m/${code}/edit`)
    await saved(page)
    await editable(page)

    // r' = (m - r^2) r, turning at 1: the steady state at the origin is lost at m = 0, softly (normal form by hand).
    await tabTo(page, 'Equation block')
    await page.keyboard.press('Control+a')
    await page.keyboard.type('q = x^2 + v^2\ndx/dt = (g - q)*x - v\ndv/dt = x + (g - q)*v')
    // In the block Tab indents; after Escape it leads out (WCAG 2.1.2). The first Escape closes the list of names.
    await page.keyboard.press('Escape')
    await page.keyboard.press('Escape')
    await tabTo(page, 'Value of g')
    await retype(page, '-0.5')
    await tabTo(page, 'Low of g', { most: 3 })
    await retype(page, '-1')
    await tabTo(page, 'High of g', { most: 2 })
    await retype(page, '1')
    for (const name of ['d', 'k', 'w']) {
      await tabTo(page, `Remove ${name}`)
      await page.keyboard.press('Enter')
      await page.getByRole('button', { name: `Remove ${name}` }).waitFor({ state: 'detached' })
    }
    for (const name of ['Unit of x', 'Unit of v']) {
      await tabTo(page, name)
      await retype(page, '')
    }
    await expectVerdict(page, 'Soft onset at 0')
    await saved(page)

    await tabTo(page, /^Running point/)
    await page.keyboard.press('ArrowRight')
    await expect.poll(() => new URL(page.url()).searchParams.get('at')).not.toBeNull()
    await tabTo(page, /Set as the page.s value/)
    await page.keyboard.press('Enter')
    await expect.poll(() => new URL(page.url()).searchParams.get('at')).toBeNull()
    await expect.poll(() => page.getByLabel('Value of g', { exact: true }).inputValue()).not.toBe('-0.5')
    await saved(page)

    await page.keyboard.press('Control+Shift+Enter')
    await page.getByRole('dialog', { name: 'Send for review' }).waitFor()
    await tabTo(page, 'What changed, and why', { most: 4 })
    await page.keyboard.type('First model')
    await tabTo(page, 'Send for review', { most: 3 })
    await page.keyboard.press('Enter')
    await page.waitForURL(`**/m/${code}/rev/1.0.0`)
    await expectVerdict(page, 'Soft onset at 0')

    const row = await findPageByCode(library.db, code)
    const draft = await committed(library.db, row?.id ?? 0)
    expect(draft.parameters.map(({ symbol, low, high }) => [symbol, low, high])).toEqual([['g', '-1', '1']])
    expect(draft.equations).toBe('q = x^2 + v^2\ndx/dt = (g - q)*x - v\ndv/dt = x + (g - q)*v')
  }, 180_000)

  test('a maintainer finds the review, approves it, and a reader leaves the dialog of keys again', async () => {
    const page = await library.tab()
    page.setDefaultTimeout(20_000)
    await signInByKeys(page, bram)
    await tabTo(page, /^Reviews/)
    await page.keyboard.press('Enter')
    await page.waitForURL('**/reviews')
    await page
      .getByRole('link', { name: /Growth against cubic damping|KEY-01/ })
      .first()
      .waitFor()
    await tabTo(page, /Growth against cubic damping|KEY-01/)
    await page.keyboard.press('Enter')
    await page.waitForURL(`**/reviews/${code}/1.0.0`)
    await page.getByRole('button', { name: 'Approve' }).waitFor()
    await tabTo(page, /^Equations, numbers and units read/, { most: 80 })
    await page.keyboard.press('Space')
    await tabTo(page, /^Verdict and its consequence read/, { most: 2 })
    await page.keyboard.press('Space')
    await tabTo(page, 'Your password, to sign as approved', { most: 2 })
    await page.keyboard.type(password)
    await tabTo(page, 'Approve', { most: 3 })
    await page.keyboard.press('Enter')
    await page.waitForURL(`**/m/${code}`)
    await expectVerdict(page, 'Soft onset at 0')
    expect((await findPageByCode(library.db, code))?.everPublic).toBe(1)

    await page.keyboard.press('?')
    await page.getByRole('dialog').waitFor()
    await page.keyboard.press('Escape')
    await page.getByRole('dialog').waitFor({ state: 'hidden' })
    await page.keyboard.press('e')
    await page.waitForURL(`**/m/${code}/edit`)
    await equationBlock(page).waitFor()
  }, 120_000)
})
