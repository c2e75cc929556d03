import { eq } from 'drizzle-orm'
import { describe, expect, test } from 'vitest'
import { settings } from '#drizzle/schema/index.ts'
import { makeSetupLink } from '#server/services/links.ts'
import { browserLibrary, expectAccessible, expectNoSidewaysScroll, phone } from '#tests/support/browser.ts'
import { password } from '#tests/support/users.ts'

const library = browserLibrary()

describe('an empty library', () => {
  test('its set-up link makes the first administrator and leads on to the groups', async () => {
    const link = await makeSetupLink(library.db, new Date())
    if (!link) throw new Error('There is an administrator already')
    const page = await library.tab({ expected: [/status of 400/, /status of 410/] })
    await page.goto(link.path)
    await page.getByRole('heading', { name: 'First administrator' }).waitFor()
    await expectAccessible(page)
    await page.getByRole('button', { name: 'Set up and go on to groups' }).click()
    // Nothing is sent before every field holds: each says what it lacks.
    await page.getByText('Must not be empty').waitFor()
    await page.getByText('This is not an e-mail address').waitFor()
    await page.getByText('At least 15 characters').waitFor()

    await page.getByLabel('Name, as it stands under signatures').fill('Orla Tindlemoor')
    await page.getByLabel('E-mail').fill('orla@example.org')
    await page.getByLabel('Password', { exact: true }).fill('orla tindlemoor orla')
    await page.getByRole('button', { name: 'Set up and go on to groups' }).click()
    // The server refuses what is easy to guess, beside the field it speaks of.
    await page.getByText('Too easy to guess').waitFor()
    await page.getByLabel('Password', { exact: true }).fill('twelve wet slates lean')
    await page.getByRole('button', { name: 'Set up and go on to groups' }).click()
    await page.waitForURL('**/admin/groups')
    await page.getByRole('heading', { name: 'Which groups keep models here?' }).waitFor()
    await expectAccessible(page)

    await page.goto(link.path)
    await page.getByText('This link is used up').waitFor()
  })
})

describe('the demonstration accounts', () => {
  test('are offered where the demonstration library was loaded, and fill the form', async () => {
    const kezia = await library.people.person('Kezia Bolderwick')
    const offered = { password, people: [{ name: kezia.name, email: kezia.email, role: 'contributor' }] }
    await library.db.insert(settings).values({ name: 'demonstration', value: offered })
    const page = await library.tab({ size: phone })
    await page.goto('/sign-in')
    const fill = page.getByRole('button', { name: `Fill in ${kezia.name}, contributor` }).filter({ visible: true })
    await fill.waitFor()
    await page.getByText('exist only because the demonstration library was loaded').filter({ visible: true }).waitFor()
    await expectAccessible(page)
    await expectNoSidewaysScroll(page)
    await fill.click()
    expect(await page.getByLabel('E-mail').inputValue()).toBe(kezia.email)
    // The focus is on the act that follows.
    await page.keyboard.press('Enter')
    await page.getByRole('heading', { name: 'Library' }).filter({ visible: true }).waitFor()
    await library.db.delete(settings).where(eq(settings.name, 'demonstration'))
  })
})
