import type { Locator, Page } from 'playwright-core'
import { expect } from 'vitest'

/** What a person does on the co-edit view, by the names that they see there. */
export const equationBlock = (page: Page): Locator => page.getByRole('textbox', { name: 'Equation block' })

/** One line of it, counted from 1. */
export const lineOfBlock = (page: Page, line: number): Locator =>
  equationBlock(page)
    .locator('.cm-line')
    .nth(line - 1)

/** Opens the draft of a page and waits until it is there with its card. */
export async function openDraft(page: Page, code: string): Promise<void> {
  await page.goto(`/m/${code}/edit`)
  await equationBlock(page).waitFor()
  await saved(page)
  await cardHeading(page).waitFor()
}

/** Waits until the library has every edit of this tab. */
export const saved = (page: Page): Promise<void> => page.getByText('Saved', { exact: true }).waitFor()

export const card = (page: Page): Locator => page.getByRole('region', { name: 'Stability card' })

/** The verdict's headline. */
export const cardHeading = (page: Page): Locator => card(page).getByRole('heading').first()

/** Waits until the equation block takes keys. */
export const editable = (page: Page): Promise<void> =>
  page.locator('[aria-label="Equation block"][contenteditable="true"]').waitFor()

/** Puts a text in the place of the whole equation block, key by key. */
export async function typeEquations(page: Page, lines: readonly string[]): Promise<void> {
  await editable(page)
  await lineOfBlock(page, 1).click()
  await page.keyboard.press('Control+a')
  await page.keyboard.type(lines.join('\n'))
}

/** The equation block as it stands, one string a line. The widgets that show values and remote carets are not text. */
export const equationLines = (page: Page): Promise<string[]> =>
  equationBlock(page).evaluate((block) =>
    [...block.querySelectorAll('.cm-line')].map((line) => {
      const copy = line.cloneNode(true)
      if (copy instanceof Element)
        for (const widget of copy.querySelectorAll('[contenteditable="false"], .cm-widgetBuffer')) widget.remove()
      return copy.textContent ?? ''
    }),
  )

/** Fills the cells of one table row; keys are the words of the column heads. */
export async function fillRow(page: Page, name: string, cells: Readonly<Record<string, string>>): Promise<void> {
  const { Symbol: symbol, ...others } = cells
  if (symbol !== undefined) await page.getByLabel(`Symbol of ${name}`, { exact: true }).fill(symbol)
  for (const [column, value] of Object.entries(others)) {
    await page.getByLabel(`${column} of ${symbol ?? name}`, { exact: true }).fill(value)
  }
}

/** Waits for a headline that begins like this. */
export async function expectVerdict(page: Page, begin: string | RegExp): Promise<void> {
  const pattern = typeof begin === 'string' ? new RegExp(`^${begin.replace(/[.*+?^${}()|[\]\\]/g, '\\$&')}`) : begin
  await expect.poll(() => cardHeading(page).textContent(), { timeout: 30_000, interval: 100 }).toMatch(pattern)
}
