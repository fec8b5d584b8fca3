/** The workbench with the keyboard alone, and what stays when the connection or the tab goes. */
import { expect, test, type Page } from '@playwright/test'
import { holdsUp, signedIn } from './people.ts'

async function openWorkbench(page: Page): Promise<void> {
  const { vehicles } = (await (await page.request.get('/api/vehicles')).json()) as { vehicles: { id: string }[] }
  await page.goto(`/vehicles/${vehicles[0]!.id}/workbench`)
  await expect(page.getByRole('grid').first()).toBeVisible()
}

/** Tab until the focus is in the grid: there is one stop for all cells. */
async function tabToGrid(page: Page): Promise<void> {
  for (let i = 0; i < 60; i += 1) {
    if (await page.evaluate(() => document.activeElement?.getAttribute('role') === 'gridcell')) return
    await page.keyboard.press('Tab')
  }
  throw new Error('the grid cannot be reached by Tab')
}

const focused = (page: Page) => page.evaluate(() => document.activeElement?.getAttribute('aria-label') ?? '')
const selected = (page: Page) => page.locator('[role=gridcell][aria-selected=true]')

test('By keyboard alone: a range is edited, undone, calculated on, copied, and cells are decided by rule', async ({
  browser,
}) => {
  const { page, faults } = await signedIn(browser, 'tuner', { permissions: ['clipboard-read', 'clipboard-write'] })
  await openWorkbench(page)
  await tabToGrid(page)
  await page.keyboard.press('Control+Home')
  expect(await focused(page)).toContain('600 rpm, 103 kPa')
  await page.keyboard.press('Control+End')
  expect(await focused(page)).toContain('5600 rpm, 25 kPa')
  for (let i = 0; i < 3; i += 1) await page.keyboard.press('ArrowUp')
  await page.keyboard.press('Shift+ArrowLeft')
  await page.keyboard.press('Shift+ArrowUp')
  await expect(selected(page)).toHaveCount(4)
  const before = await page.getByRole('gridcell', { name: /5600 rpm, 46 kPa/ }).getAttribute('aria-label')

  await page.keyboard.type('61,5')
  await page.keyboard.press('Enter')
  await expect(page.getByRole('gridcell', { name: /5600 rpm, 46 kPa: 61.5.*by hand/ })).toBeVisible()
  await expect(page.getByRole('gridcell', { name: /5000 rpm, 53 kPa: 61.5.*by hand/ })).toBeVisible()

  await page.keyboard.press('=')
  await page.keyboard.press('Tab')
  await page.keyboard.type('10')
  await expect(page.getByText('4 cells become 67.7.')).toBeVisible()
  await page.keyboard.press('Enter')
  await expect(page.getByRole('gridcell', { name: /5600 rpm, 46 kPa: 67.7.*by hand/ })).toBeVisible()

  await page.keyboard.press('Control+c')
  expect(await page.evaluate(() => navigator.clipboard.readText())).toBe('67.7\t67.7\n67.7\t67.7')
  await page.keyboard.press('Control+z')
  await expect(page.getByRole('gridcell', { name: /5600 rpm, 46 kPa: 61.5/ })).toBeVisible()
  await page.keyboard.press('Control+v')
  await expect(page.getByRole('gridcell', { name: /5600 rpm, 46 kPa: 67.7/ })).toBeVisible()
  await page.keyboard.press('Control+z')
  await page.keyboard.press('Control+z')
  expect(await page.getByRole('gridcell', { name: /5600 rpm, 46 kPa/ }).getAttribute('aria-label')).toBe(before)
  await expect(page.getByText('Saved')).toBeVisible()

  await page.getByRole('button', { name: 'Decide by rule' }).focus()
  await page.keyboard.press('Enter')
  await page.keyboard.press('Tab')
  await page.keyboard.type('20')
  await expect(page.getByText(/cells meet this, outlined on the grid/)).toBeVisible()
  const marked = await page.locator('.cell.preview').count()
  expect(marked).toBeGreaterThan(1)
  await holdsUp(page)
  await page.keyboard.press('Enter')
  await expect(page.getByRole('gridcell', { name: /, accepted$/ })).toHaveCount(marked)
  await tabToGrid(page)
  await page.keyboard.press('Control+z')
  await expect(page.getByRole('gridcell', { name: /, accepted$/ })).toHaveCount(0)
  await expect(page.getByText('Saved')).toBeVisible()
  expect(faults).toEqual([])
})

test('What is decided without a connection is kept, also when the tab closes, and stored when the connection returns', async ({
  browser,
}) => {
  const { page } = await signedIn(browser, 'tuner')
  await openWorkbench(page)
  const cell = page.getByRole('gridcell', { name: /2500 rpm, 39 kPa/ })
  await cell.click()
  // The network itself is taken away: the browser knows that it is offline.
  await page.context().setOffline(true)
  await page.waitForFunction(() => !navigator.onLine)
  await page.keyboard.press('k')
  await expect(page.getByText('No connection', { exact: true })).toBeVisible()
  await expect(page.getByRole('gridcell', { name: /2500 rpm, 39 kPa.*kept/ })).toBeVisible()
  const address = page.url()
  const later = await page.context().newPage()
  await page.close()
  await later.context().setOffline(false)
  await later.goto(address)
  await expect(later.getByRole('gridcell', { name: /2500 rpm, 39 kPa.*kept/ })).toBeVisible()
  await expect(later.getByText('Saved')).toBeVisible()
  await later.reload()
  await expect(later.getByRole('gridcell', { name: /2500 rpm, 39 kPa.*kept/ })).toBeVisible()
  await later.getByRole('gridcell', { name: /2500 rpm, 39 kPa/ }).click()
  await later.getByRole('button', { name: 'Open it again' }).click()
  await expect(later.getByRole('gridcell', { name: /2500 rpm, 39 kPa.*open/ })).toBeVisible()
  await expect(later.getByText('Saved')).toBeVisible()
})

test('Two people decide at once: the later one is told, keeps what was decided, and can decide it again', async ({
  browser,
}) => {
  const first = await signedIn(browser, 'tuner')
  const second = await signedIn(browser, 'tuner')
  await openWorkbench(first.page)
  await openWorkbench(second.page)
  const cell = (page: Page, state: string) =>
    page.getByRole('gridcell', { name: new RegExp(`2500 rpm, 32 kPa.*${state}`) })
  await cell(first.page, '').click()
  await first.page.keyboard.press('k')
  await expect(first.page.getByText('Saved')).toBeVisible()
  // A value nobody set before: a decision that already stands needs no second try.
  const value = (60 + (Date.now() % 200) / 10).toFixed(1)
  await second.page.getByRole('gridcell', { name: /3000 rpm, 32 kPa/ }).click()
  await second.page.keyboard.type(value)
  await second.page.keyboard.press('Enter')
  await expect(second.page.getByText(/1 decision of yours is kept here and not stored/)).toBeVisible()
  await expect(cell(second.page, 'kept')).toBeVisible()
  await holdsUp(second.page)
  await second.page.getByRole('button', { name: 'Decide them again, on top' }).click()
  await expect(
    second.page.getByRole('gridcell', { name: new RegExp(`3000 rpm, 32 kPa: ${value}.*by hand`) }),
  ).toBeVisible()
  await expect(second.page.getByText('Saved')).toBeVisible()
  await second.page.getByRole('button', { name: 'Undo' }).click()
  await expect(second.page.getByText('Saved')).toBeVisible()
})

test('The cell card shows who spoke and leads to the trace; a replay follows the decisions', async ({ browser }) => {
  const { page, faults } = await signedIn(browser, 'tuner')
  await openWorkbench(page)
  await page.getByRole('gridcell', { name: /2000 rpm, 60 kPa/ }).click()
  const card = page.getByRole('complementary', { name: 'Cell 2000 rpm, 60 kPa' })
  await expect(
    card.getByRole('list', { name: 'Logs that spoke for this cell' }).getByRole('listitem').first(),
  ).toHaveText(/Log \d+.* s, \d+ %/)
  await page.getByRole('button', { name: 'Show the samples behind it' }).click()
  await expect(card.getByRole('img', { name: /Lambda error, Over position, rpm: \d+ readings/ })).toBeVisible()
  await page.getByRole('button', { name: 'Show what it would have read' }).click()
  const figure = page.getByText(/Within 3 % of the target over the whole drive/)
  await expect(figure).toBeVisible()
  const before = await figure.textContent()
  await holdsUp(page)
  await page.getByRole('button', { name: 'Decide by rule' }).click()
  await page.getByRole('button', { name: /^Accept \d+ cells$/ }).click()
  await expect(figure).not.toHaveText(before!)
  await page.getByRole('button', { name: 'Undo' }).click()
  await expect(figure).toHaveText(before!)
  await page.getByRole('button', { name: 'Put it away' }).click()
  await card
    .getByRole('link', { name: /Log \d+, \d+:\d\d/ })
    .first()
    .click()
  await expect(page.getByRole('button', { name: 'Whole drive' })).toBeEnabled()
  expect(faults).toEqual([])
})
