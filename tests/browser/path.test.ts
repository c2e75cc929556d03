import type { Page } from 'playwright-core'
import { beforeAll, beforeEach, describe, expect, onTestFailed, test } from 'vitest'
import * as Y from 'yjs'
import { writeUpdate } from '#collab/frames.ts'
import { loadDocument } from '#collab/persistence.ts'
import { findPageByCode } from '#server/queries/pages.ts'
import { equationsOf } from '#shared/ydoc/shape.ts'
import {
  browserLibrary,
  desktop,
  expectAccessible,
  expectNoSidewaysScroll,
  phone,
  signIn,
} from '#tests/support/browser.ts'
import { committed } from '#tests/support/collab-pages.ts'
import {
  card,
  cardHeading,
  editable,
  equationBlock,
  equationLines,
  expectVerdict,
  fillRow,
  lineOfBlock,
  openDraft,
  saved,
  typeEquations,
} from '#tests/support/draft-page.ts'
import { password, type TestPerson } from '#tests/support/users.ts'

/**
 * The whole path through the product as people walk it, in one library: a page is made and typed, two write in it at
 * once, it is sent, somebody else approves, everybody reads it. Each test goes on where the one before ended.
 */
const library = browserLibrary()
const code = 'CLD-01'
let tove: TestPerson
let ines: TestPerson
let bram: TestPerson
let maud: TestPerson

beforeAll(async () => {
  const { people } = library
  tove = await people.person('Tove Marrowby')
  ines = await people.person('Ines Hathersedge-Vold')
  bram = await people.person('Bram Quillfeather')
  maud = await people.person('Maud Perricane')
  await people.group('Cloud Room', 'CLD', [
    [bram, 'maintainer'],
    [ines, 'maintainer'],
    [tove, 'contributor'],
    [maud, 'reader'],
  ])
})

/**
 * Convection in three modes (E. N. Lorenz, Deterministic nonperiodic flow, J. Atmos. Sci. 20 (1963) 130-141, equations
 * 25 to 27). There the steady convection becomes unstable at r = s (s + b + 3)/(s - b - 1), for s = 10 and b = 8/3 at
 * 470/19 = 24.7368...; the onset is hard (J. E. Marsden, M. McCracken, The Hopf Bifurcation and Its Applications, 1976).
 */
const lorenz = ['dx/dt = s*(y - x)', 'dy/dt = r*x - y - x*z', 'dz/dt = x*y - b*z']

const page = async (): Promise<NonNullable<Awaited<ReturnType<typeof findPageByCode>>>> => {
  const row = await findPageByCode(library.db, code)
  if (!row) throw new Error(`${code} is not there`)
  return row
}
const savedDraft = async () => {
  const { id, generation } = await page()
  return committed(library.db, id, generation)
}

async function open(who: TestPerson, at: string, options?: Parameters<typeof library.tab>[0]): Promise<Page> {
  const tab = await library.tab(options)
  tab.setDefaultTimeout(20_000)
  await signIn(tab, who.email, password, at)
  return tab
}

let broken = false
beforeEach(() => {
  if (broken) throw new Error('The path broke off in a test before this one.')
  onTestFailed(() => {
    broken = true
  })
})

describe('from an empty library to a revision in force', () => {
  test('a contributor makes a page, types the Lorenz equations and reads 24.73, hard, off the card', async () => {
    const tab = await open(tove, '/new')
    await tab.getByLabel('Name', { exact: true }).first().fill('Convection in three modes')
    await tab.getByRole('button', { name: 'Start writing' }).click()
    await tab.waitForURL(`**/m/${code}/edit`)
    await saved(tab)
    // A new page begins with a small model that has its card at once.
    await expectVerdict(tab, 'Soft onset')

    await typeEquations(tab, lorenz)
    await fillRow(tab, 'g', { Symbol: 'r', Value: '20', Low: '0', High: '30', Unit: '', Meaning: 'heating' })
    await fillRow(tab, 'd', { Symbol: 's', Value: '10', Low: '5', High: '20', Unit: '', Meaning: '' })
    await fillRow(tab, 'k', { Symbol: 'b', Value: String(8 / 3), Low: '1', High: '4', Unit: '', Meaning: '' })
    await tab.getByRole('button', { name: 'Remove w' }).click()
    await fillRow(tab, 'x', { From: '-25', To: '25', Start: '5', Unit: '', Meaning: 'turning' })
    await fillRow(tab, 'v', { Symbol: 'y', From: '-25', To: '25', Start: '5', Unit: '', Meaning: '' })
    await tab.getByRole('button', { name: 'Add a state' }).click()
    await fillRow(tab, 'state 3', { Symbol: 'z', From: '-5', To: '50', Start: '15' })
    await tab.getByLabel('Control parameter', { exact: true }).selectOption('r')
    await tab.getByLabel('Observed quantity', { exact: true }).selectOption('x')
    await tab.getByLabel('Time unit', { exact: true }).fill('')

    await expectVerdict(tab, 'Hard onset at 24.73')
    await saved(tab)
    expect((await savedDraft()).equations).toBe(lorenz.join('\n'))
  })

  test('one sign changed, and the card tells another story; put back, the first one again', async () => {
    const tab = await open(tove, '/')
    await openDraft(tab, code)
    await expectVerdict(tab, 'Hard onset at 24.73')
    const flip = async (to: string) => {
      // The fourth sign from the end of the second line is the one before x z.
      await editable(tab)
      await lineOfBlock(tab, 2).click()
      await tab.keyboard.press('End')
      await tab.keyboard.press('End')
      for (let steps = 0; steps < 4; steps++) await tab.keyboard.press('ArrowLeft')
      await tab.keyboard.press('Backspace')
      await tab.keyboard.type(to)
    }
    await flip('+')
    expect((await equationLines(tab))[1]).toBe('dy/dt = r*x - y + x*z')
    // With + x z a steady state off the origin needs x^2 = b (1 - r) < 0: at r = 20 there is only the origin, whose
    // part in x and y has the determinant s (1 - r) < 0: a saddle.
    await expect.poll(() => cardHeading(tab).textContent(), { timeout: 30_000 }).not.toMatch(/24\.73/)
    const table = card(tab).getByRole('table', { name: 'Steady states at the running point' })
    await expect.poll(() => table.getByRole('row').count(), { timeout: 30_000 }).toBe(2)
    expect(await table.getByRole('cell', { name: 'saddle', exact: true }).count()).toBe(1)
    await flip('-')
    await expectVerdict(tab, 'Hard onset at 24.73')
    await expect.poll(() => table.getByRole('row').count(), { timeout: 30_000 }).toBe(4)
    await saved(tab)
  })

  test('a slip is told under its line, and the card keeps the last run that worked', async () => {
    const tab = await open(tove, '/')
    await openDraft(tab, code)
    await editable(tab)
    await lineOfBlock(tab, 1).click()
    await tab.keyboard.press('Control+End')
    await tab.keyboard.type(' + qq')
    const fault = tab.locator('.cm-content, .equation-editor').getByText(/qq/).nth(1)
    await fault.waitFor()
    await expectVerdict(tab, 'Hard onset at 24.73')
    await expect
      .poll(() => tab.getByRole('button', { name: 'Send for review' }).getAttribute('title'))
      .toMatch(/faults/)
    for (let presses = 0; presses < 5; presses++) await tab.keyboard.press('Backspace')
    await expect.poll(() => tab.getByRole('button', { name: 'Send for review' }).getAttribute('title')).toBeNull()
    await saved(tab)
    expect((await savedDraft()).equations).toBe(lorenz.join('\n'))
  })

  test('two write in one block at once and see the same; each sees the other by name', async () => {
    const [one, other] = await Promise.all([open(tove, '/'), open(ines, '/')])
    await Promise.all([openDraft(one, code), openDraft(other, code)])
    await one.getByRole('img', { name: /Here now:.*Ines Hathersedge-Vold/ }).waitFor()
    await other.getByRole('img', { name: /Here now:.*Tove Marrowby/ }).waitFor()
    const writeAtEndOf = async (tab: Page, line: number, text: string) => {
      await editable(tab)
      await lineOfBlock(tab, line).click()
      // The first press goes to the end of the row on the screen, the second to the end of a line that is wrapped.
      await tab.keyboard.press('End')
      await tab.keyboard.press('End')
      await tab.keyboard.type(text, { delay: 15 })
    }
    await Promise.all([
      writeAtEndOf(one, 3, '  # heat carried upwards'),
      writeAtEndOf(other, 1, '  # turning of the fluid'),
    ])
    await writeAtEndOf(one, 2, '  # ')
    await expect.poll(async () => (await equationLines(other))[1]).toBe(`${lorenz[1]}  # `)
    await Promise.all([writeAtEndOf(one, 2, 'A'.repeat(24)), writeAtEndOf(other, 2, 'B'.repeat(24))])
    await Promise.all([saved(one), saved(other)])
    await expect
      .poll(async () => (await equationLines(one)).join('\n') === (await equationLines(other)).join('\n'))
      .toBe(true)
    const lines = await equationLines(one)
    expect(lines[0]).toBe(`${lorenz[0]}  # turning of the fluid`)
    expect(lines[2]).toBe(`${lorenz[2]}  # heat carried upwards`)
    // Nothing of either is lost, whatever the order in which the keys arrived.
    const [text, mixed = ''] = (lines[1] ?? '').split('  # ')
    expect(text).toBe(lorenz[1])
    expect([...mixed].sort().join('')).toBe('A'.repeat(24) + 'B'.repeat(24))
    await expect.poll(async () => (await savedDraft()).equations).toBe(lines.join('\n'))
  })

  test('a source is cited by the page and by a parameter, with its place', async () => {
    const tab = await open(tove, `/m/${code}/sources`)
    await tab.getByText('Paste BibTeX or CSL-JSON').click()
    await tab.getByLabel(/BibTeX or CSL-JSON, one or more/).fill(`@article{lorenz1963,
      author = {Lorenz, Edward N.}, title = {Deterministic nonperiodic flow}, journal = {J. Atmos. Sci.},
      volume = {20}, pages = {130--141}, year = {1963}, doi = {10.1175/1520-0469(1963)020<0130:DNF>2.0.CO;2}}`)
    await tab.getByRole('button', { name: /^Add/ }).click()
    const source = tab.getByRole('listitem').filter({ hasText: 'Deterministic nonperiodic flow' }).first()
    await source.getByRole('button', { name: 'Attach to a symbol or line' }).click()
    await source.getByLabel('Stands behind').selectOption('symbol r')
    await source.getByLabel('Where in the source').selectOption('page')
    await source.getByLabel('Number').fill('136')
    await expectAccessible(tab)
    await source.getByRole('button', { name: 'Attach', exact: true }).click()
    await source.getByText(/136/).waitFor()
    await expectAccessible(tab)
  })

  test('a reader sees every edit and writes nothing, not by messages made by hand either', async () => {
    const [reader, writer] = await Promise.all([open(maud, '/'), open(tove, '/')])
    await Promise.all([openDraft(reader, code), openDraft(writer, code)])
    await reader.getByText('You read this draft').waitFor()
    expect(await equationBlock(reader).getAttribute('contenteditable')).toBe('false')
    expect(await reader.getByRole('button', { name: 'Send for review' }).count()).toBe(0)
    await lineOfBlock(reader, 1).click()
    await reader.keyboard.type('mine')
    await reader.getByLabel('Value of r', { exact: true }).click()
    await reader.keyboard.type('99')
    expect(await reader.getByLabel('Value of r', { exact: true }).inputValue()).toBe('20')

    // What the editor would have sent, over a socket of the reader's own session.
    const { id, generation } = await page()
    const before = await savedDraft()
    const doc = await loadDocument(library.db, id, generation)
    const known = Y.encodeStateVector(doc)
    equationsOf(doc).insert(0, '# written by a reader\n')
    const update = writeUpdate(Y.encodeStateAsUpdate(doc, known))
    const closed = await reader.evaluate(
      async ({ pageId, bytes }) => {
        const socket = new WebSocket(`/collab/${pageId}`)
        socket.binaryType = 'arraybuffer'
        await new Promise((resolve) => socket.addEventListener('open', resolve))
        const end = new Promise<number>((resolve) => socket.addEventListener('close', ({ code }) => resolve(code)))
        socket.send(new Uint8Array(bytes))
        return Promise.race([end, new Promise<number>((resolve) => setTimeout(resolve, 2000, 0))])
      },
      { pageId: id, bytes: [...update] },
    )
    expect([0, 4403]).toContain(closed)
    // The writer's next edit arrives at the reader and in the library; the reader's is in neither.
    await writer.getByLabel('Meaning of s', { exact: true }).fill('ratio of the two diffusions')
    await saved(writer)
    await expect
      .poll(() => reader.getByLabel('Meaning of s', { exact: true }).inputValue())
      .toBe('ratio of the two diffusions')
    const after = await savedDraft()
    expect(after.equations).toBe(before.equations)
    expect(after.parameters.map((row) => row.meaning)).toContain('ratio of the two diffusions')
    expect((await equationLines(writer)).join('\n')).toBe(before.equations)
  })

  test('the running point is the viewer’s own until it is set as the page’s value', async () => {
    const [tab, other] = await Promise.all([open(tove, `/m/${code}/edit?at=26`), open(ines, `/m/${code}/edit`)])
    const point = tab.getByRole('slider', { name: /^Running point/ })
    await point.waitFor()
    expect(await point.getAttribute('aria-valuenow')).toBe('26')
    await point.focus()
    await tab.keyboard.press('ArrowLeft')
    await expect.poll(() => new URL(tab.url()).searchParams.get('at')).not.toBe('26')
    const moved = Number(new URL(tab.url()).searchParams.get('at'))
    expect(moved).toBeLessThan(26)
    expect(await other.getByRole('slider', { name: /^Running point/ }).getAttribute('aria-valuenow')).toBe('20')
    expect((await savedDraft()).parameters.find((row) => row.symbol === 'r')?.value).toBe('20')
    await tab.getByRole('button', { name: /Set as the page.s value/ }).click()
    await expect.poll(() => other.getByLabel('Value of r', { exact: true }).inputValue()).toBe(String(moved))
    expect(new URL(tab.url()).searchParams.has('at')).toBe(false)
    await tab.getByLabel('Value of r', { exact: true }).fill('20')
    await saved(tab)
    await expectVerdict(tab, 'Hard onset at 24.73')
  })

  test('sent for review it is frozen, and who wrote in it cannot approve it', async () => {
    const [tab, other] = await Promise.all([
      open(tove, `/m/${code}/edit`),
      open(ines, `/m/${code}/edit`, { expected: [/status of 403/] }),
    ])
    await Promise.all([saved(tab), saved(other)])
    await tab.getByRole('button', { name: 'Send for review' }).click()
    const dialog = tab.getByRole('dialog', { name: 'Send for review' })
    await expectAccessible(tab)
    await dialog.getByLabel('What changed, and why').fill('First model of the layer, as published in 1963')
    await dialog.getByRole('button', { name: 'Send for review' }).click()
    await tab.waitForURL(`**/m/${code}/rev/1.0.0`)
    await expectVerdict(tab, 'Hard onset at 24.73')
    // The other window, in which nobody pressed anything, is locked as well.
    await other.getByText('In review', { exact: true }).first().waitFor()
    await expect.poll(() => equationBlock(other).getAttribute('contenteditable')).toBe('false')

    await other.goto(`/reviews/${code}/1.0.0`)
    const approve = other.getByRole('button', { name: 'Approve' })
    await approve.waitFor()
    await other.getByText('You wrote in it.').first().waitFor()
    expect(await approve.getAttribute('aria-disabled')).toBe('true')
    await expectAccessible(other)
    const refused = await other.evaluate(
      async ({ address, secret }) => {
        const { revision } = await (await fetch(address)).json()
        const body = JSON.stringify({ password: secret, equationsRead: true, verdictRead: true })
        const headers = { 'Content-Type': 'application/json', 'If-Match': `"${revision.etag}"` }
        const answer = await fetch(`${address}/approve`, { method: 'POST', headers, body })
        return { status: answer.status, body: await answer.text() }
      },
      { address: `/api/v1/pages/${code}/revisions/1.0.0`, secret: password },
    )
    expect(refused.status).toBe(403)
    expect(refused.body).toContain('somebody else has to check and approve it')
  }, 120_000)

  test('a maintainer who did not write in it approves, after a wrong password that signs nothing, and opens the page', async () => {
    const tab = await open(bram, '/reviews', { expected: [/status of 401/] })
    await tab
      .getByRole('link', { name: /Convection in three modes|CLD-01/ })
      .first()
      .click()
    await tab.waitForURL(`**/reviews/${code}/1.0.0`)
    await tab.getByLabel('Equations, numbers and units read against their sources').check()
    await tab.getByLabel('Verdict and its consequence read').check()
    const secret = tab.getByLabel('Your password, to sign as approved')
    await secret.fill('not the password at all')
    await tab.getByRole('button', { name: 'Approve' }).click()
    await tab.getByText('The password is wrong').waitFor()
    expect((await page()).inForceId).toBeNull()
    await secret.fill(password)
    await tab.getByRole('button', { name: 'Approve' }).click()
    await tab.waitForURL(`**/m/${code}`)
    await expectVerdict(tab, 'Hard onset at 24.73')
    await tab.getByLabel('Read access').selectOption('open')
    await expect.poll(async () => (await page()).access).toBe('open')
    expect((await page()).inReviewId).toBeNull()
  })

  test('somebody signed out reads the revision in force, at a point of their own, and loads no editor', async () => {
    const tab = await library.tab()
    const scripts: string[] = []
    tab.on('request', (request) => void scripts.push(new URL(request.url()).pathname))
    await tab.goto(`/m/${code}`)
    await expectVerdict(tab, 'Hard onset at 24.73')
    const point = tab.getByRole('slider', { name: /^Running point/ })
    expect(await point.getAttribute('aria-valuenow')).toBe('20')
    await tab.goto(`/m/${code}?at=27`)
    await expect.poll(() => point.getAttribute('aria-valuenow')).toBe('27')
    expect(await point.getAttribute('aria-valuetext')).toMatch(/unstable|2\.26\d* (above|beyond|past)/)
    await point.focus()
    await tab.keyboard.press('ArrowLeft')
    await expect.poll(() => new URL(tab.url()).searchParams.get('at')).not.toBe('27')
    expect(scripts.filter((script) => /model-edit|stability\.worker|collab/.test(script))).toEqual([])
    expect(await tab.getByRole('link', { name: /draft/ }).count()).toBe(0)
    await tab.goto(`/m/${code}/record`)
    const row = tab.getByRole('row').filter({ hasText: '1.0.0' })
    await row.getByText('In force').waitFor()
    await row.getByText(/Marrowby/).waitFor()
    await row
      .getByText(/Quillfeather/)
      .first()
      .waitFor()
    await tab.goto(`/m/${code}/edit`)
    await tab.waitForURL('**/sign-in?next=*')
  })
})

describe('every screen of a page', () => {
  test.each([
    ['light', desktop],
    ['dark', desktop],
    ['light', phone],
  ] as const)('reads without serious faults, %s, %o', async (scheme, size) => {
    const tab = await open(bram, '/', { scheme, size })
    const places = [
      [`/m/${code}`, /^Hard onset at 24\.73/],
      [`/m/${code}/model`, /Convection in three modes/],
      [`/m/${code}/sources`, /Sources of the draft/],
      [`/m/${code}/record`, /Convection in three modes/],
      [`/m/${code}/rev/1.0.0`, /^Hard onset at 24\.73/],
      [`/m/${code}/edit`, /^Hard onset at 24\.73/],
      ['/reviews', /Reviews/],
    ] as const
    for (const [place, heading] of places) {
      await tab.goto(place)
      await tab.getByRole('heading', { name: heading }).filter({ visible: true }).first().waitFor()
      await expectAccessible(tab)
      await expectNoSidewaysScroll(tab)
    }
  })
})
