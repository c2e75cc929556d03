import type { Page } from 'playwright-core'
import { beforeAll, expect, test } from 'vitest'
import { browserLibrary, signIn, type TabOptions } from '#tests/support/browser.ts'
import { committed, makePage, smallDraft } from '#tests/support/collab-pages.ts'
import { equationBlock, equationLines, saved } from '#tests/support/draft-page.ts'
import { newSeed, randomFrom } from '#tests/support/random.ts'
import { password, type TestPerson } from '#tests/support/users.ts'

/**
 * The server is ended by SIGKILL while two people type in one block. What a tab called saved has to be in the database at
 * that moment, before any tab sends it again; and both tabs have to come back by themselves.
 */
const library = browserLibrary()
const kills = 10
const code = 'TS-001'
/** Has a fault on purpose: no card is computed, neither here nor there, and the machine's time goes into typing and saving. */
const before = 'dx/dt = unknown*x\ndy/dt = x'
let pageId: number
let tove: TestPerson
let bram: TestPerson

beforeAll(async () => {
  const { people, db } = library
  tove = await people.person('Tove Marrowby')
  bram = await people.person('Bram Quillfeather')
  const group = await people.group('Test Stand', 'TS', [
    [tove, 'contributor'],
    [bram, 'maintainer'],
  ])
  pageId = await makePage(db, group.id, { ...smallDraft, equations: `${before}\n# a: \n# b: ` })
})

/** The browser says by itself that the server is away. */
const away: NonNullable<TabOptions['expected']> = [/WebSocket connection to/, /net::ERR_/, /status of 503/]

/** Somebody who types numbered words at the end of a line of their own, and notes what the page called saved. */
class Typist {
  readonly tab: Page
  readonly letter: string
  typed = 0
  /** Words 0 to `seenSaved` - 1 stood in the block when the page said Saved. */
  seenSaved = 0
  private readonly random: () => number
  private typing: Promise<void> | null = null
  private stopping = false

  constructor(tab: Page, letter: string, random: () => number) {
    this.tab = tab
    this.letter = letter
    this.random = random
  }

  word(index: number): string {
    return `${this.letter}${index}.`
  }

  async placeCaret(line: number): Promise<void> {
    await equationBlock(this.tab).click()
    await this.tab.keyboard.press('Control+Home')
    for (let steps = 1; steps < line; steps++) await this.tab.keyboard.press('ArrowDown')
    await this.tab.keyboard.press('End')
  }

  begin(): void {
    this.stopping = false
    this.typing = this.type()
  }

  async end(): Promise<void> {
    this.stopping = true
    await this.typing
  }

  private async type(): Promise<void> {
    while (!this.stopping) {
      await this.tab.keyboard.type(this.word(this.typed), { delay: 15 + 20 * this.random() })
      this.typed++
      if (await this.saysSaved()) this.seenSaved = this.typed
    }
  }

  /** What the page says once it has drawn what was just typed. */
  private saysSaved(): Promise<boolean> {
    return this.tab.evaluate(
      () =>
        new Promise<boolean>((resolve) => {
          const look = () =>
            resolve([...document.querySelectorAll('main *, header *')].some((one) => one.textContent === 'Saved'))
          requestAnimationFrame(() => requestAnimationFrame(look))
        }),
    )
  }
}

const count = (text: string, word: string): number => text.split(word).length - 1

test('killed ten times while two type: nothing saved is lost, and both come back by themselves', async () => {
  const seed = newSeed()
  const random = randomFrom(seed)
  console.log(`SEED=${seed}`)
  const typists: Typist[] = []
  for (const [who, letter, line] of [
    [tove, 'a', 3],
    [bram, 'b', 4],
  ] as const) {
    const tab = await library.tab({ expected: away })
    await signIn(tab, who.email, password, '/')
    await tab.goto(`/m/${code}/edit`)
    await equationBlock(tab).waitFor()
    await saved(tab)
    const typist = new Typist(tab, letter, random)
    await typist.placeCaret(line)
    typists.push(typist)
  }

  for (let round = 1; round <= kills; round++) {
    const savedBefore = typists.map(({ seenSaved }) => seenSaved)
    for (const typist of typists) typist.begin()
    await expect
      .poll(() => typists.every(({ seenSaved }, i) => seenSaved > (savedBefore[i] ?? 0)), {
        timeout: 60_000,
        interval: 20,
      })
      .toBe(true)
    await new Promise((resolve) => setTimeout(resolve, random() * 400))
    await library.server.end('SIGKILL')
    // Read from the database alone: no tab can have sent anything again.
    const promised = typists.map(({ seenSaved }) => seenSaved)
    const left = (await committed(library.db, pageId)).equations
    for (const [i, typist] of typists.entries())
      for (let index = 0; index < (promised[i] ?? 0); index++)
        expect(count(left, typist.word(index)), `round ${round}: ${typist.word(index)} after the kill`).toBe(1)

    // Both go on typing while there is no server.
    const offline = typists.map(({ typed }) => typed)
    await expect
      .poll(() => typists.every(({ typed }, i) => typed > (offline[i] ?? 0) + 1), { timeout: 60_000 })
      .toBe(true)
    for (const typist of typists) await typist.end()
    await library.server.start()
    for (const { tab } of typists) await tab.getByText('Saved', { exact: true }).waitFor({ timeout: 60_000 })
    const whole = (await committed(library.db, pageId)).equations
    for (const { tab } of typists) {
      await expect.poll(async () => (await equationLines(tab)).join('\n'), { timeout: 60_000 }).toBe(whole)
    }
    const words = (typist: Typist) => Array.from({ length: typist.typed }, (_, index) => typist.word(index)).join('')
    const [a, b] = typists.map(words)
    expect(whole, `round ${round}`).toBe(`${before}\n# a: ${a}\n# b: ${b}`)
  }
}, 600_000)
