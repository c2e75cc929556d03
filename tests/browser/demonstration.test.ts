import { beforeAll, describe, expect, test } from 'vitest'
import { emailOf, people } from '#drizzle/seed/demonstration.ts'
import { createCompute } from '#server/compute/compute.ts'
import { limits } from '#server/limits.ts'
import { prepareLibrary } from '#server/services/prepare-library.ts'
import { browserLibrary, desktop, expectAccessible, expectNoSidewaysScroll, phone } from '#tests/support/browser.ts'
import { expectVerdict } from '#tests/support/draft-page.ts'

/** What somebody sees who has just typed npm start. */
const library = browserLibrary()
beforeAll(async () => {
  const prepared = await prepareLibrary(library.db, {
    empty: false,
    loopback: true,
    now: new Date(),
    say: () => {},
    startCompute: () => createCompute({ ...limits.compute, cardDeadline: 60_000 }),
  })
  expect(prepared.library).toBe('loaded')
})

describe('the demonstration library', () => {
  test('is met through the accounts that the sign-in page offers', async () => {
    const page = await library.tab()
    await page.goto('/sign-in')
    await page.getByText('slow ramp to the brink').first().waitFor()
    const accounts = page.getByRole('region', { name: 'Demonstration accounts' })
    for (const { name } of people) await accounts.getByRole('button', { name }).waitFor()
    await expectAccessible(page)
    await accounts.getByRole('button', { name: 'Bram Quillfeather' }).click()
    expect(await page.getByLabel('E-mail').inputValue()).toBe(emailOf('bram'))
    await page.getByRole('button', { name: 'Sign in', exact: true }).click()
    await page.getByRole('link', { name: 'Wing section with a worn pitch bearing' }).waitFor()
    await expectAccessible(page)
  })

  test.each([
    ['light', desktop],
    ['dark', desktop],
    ['dark', phone],
  ] as const)(
    'its superseded revision, the comparison and the review read without serious faults, %s, %o',
    async (scheme, size) => {
      const page = await library.tab({ scheme, size })
      await page.goto('/sign-in?next=/m/WNG-01')
      await page.getByLabel('E-mail').fill(emailOf('bram'))
      await page.getByLabel('Password', { exact: true }).fill('slow ramp to the brink')
      await page.getByRole('button', { name: 'Sign in', exact: true }).click()
      await page.waitForURL('**/m/WNG-01')
      await expectVerdict(page, 'Hard onset at 7.108 m/s')

      await page.goto('/m/WNG-01/rev/1.0.0')
      await expectVerdict(page, 'Soft onset at 7.108 m/s')
      await page
        .getByText(/Superseded/)
        .first()
        .waitFor()
      await expectAccessible(page)
      await expectNoSidewaysScroll(page)

      await page.goto('/m/WNG-01/record')
      await page.getByRole('heading', { name: 'Wing section with a worn pitch bearing' }).first().waitFor()
      for (const mark of ['1.0.0', '2.0.0']) {
        await page
          .getByRole('checkbox', { name: new RegExp(mark.replaceAll('.', '\\.')) })
          .first()
          .check()
      }
      await page.getByRole('link', { name: 'Show differences' }).click()
      await page.waitForURL('**/m/WNG-01/rev/2.0.0?with=1.0.0')
      await page.getByText(/k3/).first().waitFor()
      await expectAccessible(page)
      await expectNoSidewaysScroll(page)

      await page.goto('/reviews/RCT-02/2.0.0')
      await page
        .getByRole('heading', { name: /Hard onset/ })
        .first()
        .waitFor()
      await expectAccessible(page)
      await expectNoSidewaysScroll(page)
    },
  )
})
