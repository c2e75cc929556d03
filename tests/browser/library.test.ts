import type { Page } from 'playwright-core'
import { beforeAll, describe, expect, test } from 'vitest'
import {
  browserLibrary,
  desktop,
  expectAccessible,
  expectNoSidewaysScroll,
  phone,
  signIn,
} from '#tests/support/browser.ts'
import { password, type TestGroup, type TestPerson } from '#tests/support/users.ts'

const library = browserLibrary()
let tove: TestPerson
let ines: TestPerson
let orla: TestPerson
let maud: TestPerson
let rail: TestGroup

beforeAll(async () => {
  const { people } = library
  orla = await people.person('Orla Tindlemoor', { administrator: true })
  ines = await people.person('Ines Hathersedge-Vold')
  tove = await people.person('Tove Marrowby')
  maud = await people.person('Maud Perricane')
  rail = await people.group('Fellside Rail', 'RUN', [
    [ines, 'maintainer'],
    [tove, 'contributor'],
    [maud, 'reader'],
  ])
})

/** Presses Tab until the element named has the focus; fails after `most` presses. */
async function tabTo(page: Page, role: 'button' | 'textbox' | 'link', name: string | RegExp, most = 40): Promise<void> {
  for (let presses = 0; presses < most; presses++) {
    await page.keyboard.press('Tab')
    const focused = page.locator(':focus')
    if ((await focused.count()) === 0) continue
    const target = page.getByRole(role, { name })
    if (await target.evaluateAll((elements) => elements.some((element) => element === document.activeElement))) return
  }
  throw new Error(`Tab does not reach ${role} ${String(name)}`)
}

const model = {
  format: 'brinkbook-model',
  version: 1,
  title: 'Wheelset, straight track',
  equations: 'dx/dt = mu*x - w*y - x*(x^2 + y^2)\ndy/dt = w*x + mu*y - y*(x^2 + y^2)',
  parameters: [
    { symbol: 'mu', value: -0.5, low: -1, high: 1, meaning: 'net growth rate' },
    { symbol: 'w', value: 2, meaning: 'turning rate' },
  ],
  states: [
    { symbol: 'x', low: -2, high: 2, start: 0.1 },
    { symbol: 'y', low: -2, high: 2, start: 0 },
  ],
  control: 'mu',
  observed: 'x',
}

describe('signing in', () => {
  test('one message for a wrong password and an unknown address; the right ones lead on', async () => {
    const page = await library.tab({ expected: [/status of 401/] })
    await page.goto('/sign-in?next=/groups')
    for (const [email, given] of [
      [tove.email, 'not the password at all'],
      ['nobody@example.org', password],
    ] as const) {
      await page.getByLabel('E-mail').fill(email)
      await page.getByLabel('Password', { exact: true }).fill(given)
      await page.getByRole('button', { name: 'Sign in', exact: true }).click()
      await page.getByText('E-mail or password not right').first().waitFor()
      // The way back is where the mistake was made.
      // Said of the second try as of the first, the words may be those of the first still.
      const secret = page.getByLabel('Password', { exact: true })
      await expect.poll(() => secret.evaluate((field) => field === document.activeElement)).toBe(true)
    }
    await page.getByLabel('E-mail').fill(tove.email)
    await page.getByLabel('Password', { exact: true }).fill(password)
    await page.getByRole('button', { name: 'Sign in', exact: true }).click()
    await page.waitForURL('**/groups')
    await page.getByRole('link', { name: 'Fellside Rail' }).waitFor()
  })

  test('another site in next is never followed', async () => {
    const page = await library.tab()
    await signIn(page, tove.email, password, '//elsewhere.example/')
    expect(new URL(page.url()).origin).toBe(library.origin)
    expect(new URL(page.url()).pathname).toBe('/')
  })

  test('without the demonstration library no accounts are offered', async () => {
    const page = await library.tab()
    await page.goto('/sign-in')
    await page.getByRole('button', { name: 'Sign in', exact: true }).waitFor()
    expect(await page.getByText('Demonstration accounts').count()).toBe(0)
    await expectAccessible(page)
  })

  test('by keyboard alone, to the library and out again', async () => {
    const page = await library.tab()
    await page.goto('/sign-in')
    await page.getByLabel('E-mail').waitFor()
    await tabTo(page, 'textbox', 'E-mail')
    await page.keyboard.type(tove.email)
    await page.keyboard.press('Tab')
    await page.keyboard.type(password)
    await page.keyboard.press('Enter')
    await page.getByRole('heading', { name: 'Library' }).first().waitFor()
    await tabTo(page, 'button', `Menu of ${tove.name}`)
    await page.keyboard.press('Enter')
    await page.getByRole('menuitem', { name: 'Sign out' }).waitFor()
    const out = page.getByRole('menuitem', { name: 'Sign out' })
    for (let presses = 0; presses < 8; presses++) {
      if (await out.evaluate((element) => element === document.activeElement)) break
      await page.keyboard.press('ArrowDown')
    }
    await page.keyboard.press('Enter')
    await page.waitForURL('**/sign-in')
    // What only members see is gone with the session.
    await page.goto('/groups')
    await page.waitForURL('**/sign-in?next=%2Fgroups')
  })
})

describe('the library', () => {
  test('a contributor brings in a model, finds it, and narrows by what it is', async () => {
    const page = await library.tab()
    await signIn(page, tove.email, password)
    await page.getByRole('heading', { name: 'No models yet' }).waitFor()
    await expectAccessible(page)

    await page.getByRole('link', { name: 'New model' }).first().click()
    await page.waitForURL('**/new')
    await expectAccessible(page)
    await page.getByLabel('Or paste it').fill(JSON.stringify(model))
    expect(await page.getByLabel('Name').last().inputValue()).toBe(model.title)
    await page.getByRole('button', { name: 'Bring it in' }).click()
    await page.waitForURL('**/m/RUN-*/edit')

    await page.goto('/')
    const row = page.getByRole('link', { name: model.title })
    await row.waitFor()
    await page.getByLabel('Find by name, symbol, parameter or source').fill('turning rate')
    await page.waitForURL('**/?q=turning+rate')
    await row.waitFor()
    await page.getByLabel('Find by name, symbol, parameter or source').fill('no such thing')
    await page.getByRole('heading', { name: 'No model matches' }).waitFor()
    await page.getByRole('button', { name: 'Clear search and filters' }).click()
    await row.waitFor()
    // The tick follows the address, a moment after the press.
    await page.getByRole('checkbox', { name: /Draft/ }).click()
    await page.waitForURL('**/?state=draft')
    await row.waitFor()
    await page.reload()
    expect(await page.getByRole('checkbox', { name: /Draft/ }).isChecked()).toBe(true)
    await expectAccessible(page)
  })

  test('a document that makes no model is refused with every fault in its place', async () => {
    const page = await library.tab({ expected: [/status of 422/] })
    await signIn(page, tove.email, password, '/new')
    const broken = { ...model, equations: 'dx/dt = mu*x - q*y\ndy/dt = w*x +', states: model.states }
    await page.getByLabel('Or paste it').fill(JSON.stringify(broken))
    await page.getByRole('button', { name: 'Bring it in' }).click()
    const refusal = page.getByRole('alert').filter({ hasText: 'line' })
    await refusal.waitFor()
    expect(await refusal.getByText(/line 1/).count()).toBe(1)
    expect(await refusal.getByText(/line 2/).count()).toBe(1)
    await page.getByLabel('Or paste it').fill('{ not json')
    await page.getByText(/This is not JSON/).waitFor()
  })

  test('a reader is offered no new model and cannot reach its screen', async () => {
    const page = await library.tab()
    await signIn(page, maud.email, password)
    await page.getByRole('heading', { name: 'Library' }).first().waitFor()
    expect(await page.getByRole('link', { name: 'New model' }).count()).toBe(0)
    await page.goto('/new')
    await page.getByText('Only contributors and maintainers begin pages').waitFor()
  })

  test('keys: / finds, 0 then 3 leads to the groups, ? lists them; none of it while typing or switched off', async () => {
    const page = await library.tab()
    await signIn(page, tove.email, password)
    const find = page.getByLabel('Find by name, symbol, parameter or source')
    await find.waitFor()
    await page.keyboard.press('/')
    expect(await find.evaluate((element) => element === document.activeElement)).toBe(true)
    await page.keyboard.type('03?')
    expect(await find.inputValue()).toBe('03?')
    expect(await page.getByRole('dialog').count()).toBe(0)
    await find.fill('')
    await find.blur()
    await page.keyboard.press('?')
    await page.getByRole('dialog', { name: 'Keys' }).waitFor()
    await page.keyboard.press('Escape')
    await page.keyboard.press('0')
    await page.keyboard.press('3')
    await page.waitForURL('**/groups')

    await page.goto('/preferences')
    await page.getByRole('checkbox', { name: 'on while not typing' }).uncheck()
    await page.getByText('Kept').first().waitFor()
    await page.getByRole('heading', { name: 'Preferences' }).click()
    await page.keyboard.press('?')
    expect(await page.getByRole('dialog').count()).toBe(0)
  })

  test('a signed-out visitor sees the library without the pages of groups, and no fault', async () => {
    const page = await library.tab()
    await page.goto('/')
    await page.getByRole('heading', { name: 'No models yet' }).waitFor()
    await page.getByRole('link', { name: 'Sign in' }).first().waitFor()
    await page.goto('/no/such/place')
    await page.getByRole('heading', { name: 'Nothing stands here' }).waitFor()
  })
})

describe('people', () => {
  test('a maintainer invites; the invited person joins by the link, which is good once', async () => {
    const page = await library.tab()
    await signIn(page, ines.email, password, `/groups/${rail.slug}/people`)
    await page.getByRole('button', { name: 'Invite someone' }).click()
    await page.getByLabel('E-mail').fill('anselm@example.org')
    await page.getByLabel('As', { exact: true }).selectOption('contributor')
    await expectAccessible(page)
    await page.getByRole('button', { name: 'Make the invitation link' }).click()
    const link = await page.getByLabel('Invitation link').inputValue()
    expect(new URL(link).origin).toBe(library.origin)

    const guest = await library.tab({ expected: [/status of 410/] })
    await guest.goto(link)
    await guest.getByRole('heading', { name: 'Join Fellside Rail' }).waitFor()
    await expectAccessible(guest)
    await guest.getByLabel('Name, as it stands under signatures').fill('Anselm Dreycott')
    await guest.getByLabel('New password', { exact: true }).fill('short')
    await guest.getByRole('button', { name: 'Accept and sign in' }).click()
    await guest.getByText('At least 15 characters').waitFor()
    await guest.getByLabel('New password', { exact: true }).fill('seven rivets hold it')
    await guest.getByRole('button', { name: 'Accept and sign in' }).click()
    await guest.getByRole('heading', { name: 'Library' }).first().waitFor()
    await guest.goto(link)
    await guest.getByText('This link is used up').waitFor()

    await page.reload()
    await page.getByText('Anselm Dreycott').first().waitFor()
  })

  test('the consequence stands before a change of role; the last maintainer stays', async () => {
    const page = await library.tab({ expected: [/status of 409/] })
    await signIn(page, ines.email, password, `/groups/${rail.slug}/people`)
    await page.getByLabel(`Role of ${ines.name}`).selectOption('reader')
    const sheet = page.getByRole('dialog', { name: `Changing ${ines.name}` })
    await sheet.getByText('reads every page of the group').waitFor()
    await expectAccessible(page)
    await sheet.getByRole('button', { name: 'Make reader' }).click()
    await sheet.getByText('Nobody else would be a maintainer').waitFor()
    await sheet.getByRole('button', { name: 'Leave as is' }).click()
    expect(await page.getByLabel(`Role of ${ines.name}`).inputValue()).toBe('maintainer')

    await page.getByLabel(`Role of ${maud.name}`).selectOption('contributor')
    await page.getByRole('dialog').getByRole('button', { name: 'Make contributor' }).click()
    await page.getByRole('dialog').waitFor({ state: 'hidden' })
    expect(await page.getByLabel(`Role of ${maud.name}`).inputValue()).toBe('contributor')
    await page.getByLabel(`Role of ${maud.name}`).selectOption('reader')
    await page.getByRole('dialog').getByRole('button', { name: 'Make reader' }).click()
    await page.getByRole('dialog').waitFor({ state: 'hidden' })
  })

  test('an administrator lays a group, hands out a password link and disables an account', async () => {
    const page = await library.tab({ expected: [/status of 409/] })
    await signIn(page, orla.email, password, '/admin/groups')
    await page.getByRole('button', { name: 'New group' }).first().click()
    await page.getByLabel('Name', { exact: true }).fill('Whorl Shop')
    await page.getByLabel('Letters for page codes').fill('run, rot')
    await page.getByLabel('First maintainer, e-mail').fill('bram@example.org')
    await page.getByRole('button', { name: 'Lay the group' }).click()
    await page.getByText('RUN belongs to another group').waitFor()
    await page.getByLabel('Letters for page codes').fill('rot')
    await page.getByRole('button', { name: 'Lay the group' }).click()
    expect(await page.getByLabel('Invitation link of the maintainer').inputValue()).toMatch(/\/invitations\/[\w-]{43}$/)
    await page.getByRole('button', { name: 'Done' }).click()
    await page.getByRole('link', { name: 'Whorl Shop' }).waitFor()

    await page.getByRole('link', { name: 'People', exact: true }).click()
    await page.getByRole('button', { name: `Change ${maud.name}` }).click()
    await page.getByRole('menuitem', { name: 'New-password link' }).click()
    await page.getByRole('button', { name: 'Make the link' }).click()
    const link = await page.getByLabel('New-password link').inputValue()
    await page.getByRole('button', { name: 'Done' }).click()

    const own = await library.tab()
    await own.goto(link)
    await own.getByLabel('New password', { exact: true }).fill('nine gulls on a rail')
    await expectAccessible(own)
    await own.getByRole('button', { name: 'Change and sign in' }).click()
    await own.getByRole('heading', { name: 'Library' }).first().waitFor()

    await page.getByRole('button', { name: `Change ${maud.name}` }).click()
    await page.getByRole('menuitem', { name: 'Disable the account' }).click()
    await page.getByRole('dialog').getByRole('button', { name: 'Disable the account' }).click()
    await page.getByText('disabled', { exact: true }).waitFor()
    // Signed out at once, in the window that was just in use.
    await own.goto('/preferences')
    await own.waitForURL('**/sign-in?next=%2Fpreferences')
  })

  test('administration is not there for others', async () => {
    const page = await library.tab()
    await signIn(page, tove.email, password)
    await page.goto('/admin/people')
    await page.getByText('Nothing here for you to read').waitFor()
  })
})

describe('every screen', () => {
  test('reads without serious faults, light and dark, wide and on a phone, without scrolling sideways', async () => {
    const places = ['/', '/groups', `/groups/${rail.slug}`, `/groups/${rail.slug}/people`, '/preferences', '/new']
    for (const [size, scheme] of [
      [desktop, 'dark'],
      [phone, 'light'],
    ] as const) {
      const page = await library.tab({ size, scheme })
      await signIn(page, ines.email, password)
      for (const place of places) {
        await page.goto(place)
        await page.getByRole('heading', { level: 1 }).filter({ visible: true }).first().waitFor()
        await expectAccessible(page)
        await expectNoSidewaysScroll(page)
      }
    }
    const admin = await library.tab({ size: phone, scheme: 'dark' })
    await signIn(admin, orla.email, password)
    for (const place of ['/admin/people', '/admin/groups']) {
      await admin.goto(place)
      await admin.getByRole('link', { name: 'Fellside Rail' }).first().waitFor()
      await expectAccessible(admin)
      await expectNoSidewaysScroll(admin)
    }
  })

  test('the chosen appearance holds before the first paint and through signing out', async () => {
    const page = await library.tab()
    await signIn(page, tove.email, password, '/preferences')
    await page.getByRole('radio', { name: 'dark' }).check()
    const ground = () => page.evaluate(() => getComputedStyle(document.documentElement).backgroundColor)
    // film: #0b1416 in the dark, #e6eceb in the light.
    await expect.poll(ground).toBe('rgb(11, 20, 22)')
    await page.reload({ waitUntil: 'commit' })
    await page.waitForFunction(() => document.documentElement.dataset.theme === 'dark')
    await page.getByRole('button', { name: `Menu of ${tove.name}` }).click()
    await page.getByRole('menuitem', { name: 'Sign out' }).click()
    await page.waitForURL('**/sign-in')
    await page.reload()
    expect(await ground()).toBe('rgb(11, 20, 22)')
  })

  test('a changed password ends the other session and not this one', async () => {
    const here = await library.tab()
    const there = await library.tab()
    await signIn(here, tove.email, password, '/preferences')
    await signIn(there, tove.email, password, '/preferences')
    await here.getByRole('button', { name: 'Change password' }).click()
    await here.getByLabel('Present password', { exact: true }).fill(password)
    await here.getByLabel('New password', { exact: true }).fill('two kites over a weir')
    await here.getByRole('dialog').getByRole('button', { name: 'Change password' }).click()
    await here.getByRole('dialog').waitFor({ state: 'hidden' })
    await there.goto('/preferences')
    await there.waitForURL('**/sign-in?next=%2Fpreferences')
    await here.goto('/preferences')
    await here.getByRole('button', { name: 'Sign out everywhere' }).click()
    await here.waitForURL('**/sign-in')
  })
})
