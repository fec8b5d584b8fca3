/** The whole road in a browser with three people, then the same pages on a phone and in the dark. */
import { readFileSync } from 'node:fs'
import { expect, test } from '@playwright/test'
import { toCsv } from '../../sample-logs/simulator/simulate.ts'
import { holdsUp, personOf, signedIn } from './people.ts'
import { flatbedLog } from '../support/drives.ts'

const picture = 'tests/e2e/pictures/workbench.png'

const shortDrive = (): string => toCsv(flatbedLog(99, { seconds: 360 }))

test('A tuner uploads a log, accepts cells, a reviewer signs, the owner sees it, and the export reads back', async ({
  browser,
}) => {
  const { page, faults } = await signedIn(browser, 'tuner')
  await holdsUp(page)
  await page.getByRole('link', { name: 'Nursery flatbed' }).click()
  await expect(page.getByRole('heading', { level: 1 })).toHaveText(/Revision 1 is in the engine/)
  await holdsUp(page)

  await page.getByRole('link', { name: 'Logs', exact: true }).click()
  await page
    .locator('input[type=file]')
    .setInputFiles({ name: 'evening.csv', mimeType: 'text/csv', buffer: Buffer.from(shortDrive()) })
  await expect(page.getByText('It is here; the worker reads it.')).toBeVisible()
  await expect(page.getByRole('row', { name: /Log 5.*Ready/ })).toBeVisible({ timeout: 30_000 })
  await holdsUp(page)
  await page.getByRole('link', { name: 'Log 5' }).click()
  await expect(page.getByRole('img', { name: /Engine speed over time/ })).toBeVisible()
  await holdsUp(page)

  await page.getByRole('link', { name: 'Workbench' }).click()
  await page.getByRole('link', { name: 'Learn from other logs' }).click()
  await expect(page.getByRole('heading', { level: 1 })).toHaveText(/5 of 5 logs to learn from/)
  await page.getByRole('checkbox', { name: /Log 1,/ }).uncheck()
  await page.getByRole('checkbox', { name: /Log 4,/ }).uncheck()
  await holdsUp(page)
  await page.getByRole('button', { name: 'Learn from 3 logs' }).click()
  await expect(page.getByRole('heading', { level: 1 })).toHaveText(/cells left to decide/, { timeout: 60_000 })
  await page.screenshot({ path: picture, fullPage: true })
  await holdsUp(page)

  const cell = page.getByRole('gridcell', { name: /2000 rpm, 46 kPa/ })
  await cell.click()
  await page.keyboard.press('a')
  await expect(page.getByRole('gridcell', { name: /2000 rpm, 46 kPa.*accepted/ })).toBeVisible()
  await page.keyboard.press('Control+z')
  await expect(page.getByRole('gridcell', { name: /2000 rpm, 46 kPa.*open/ })).toBeVisible()
  await page.keyboard.press('h')
  await page.getByLabel('VE by hand').fill('61,5')
  await page.keyboard.press('Enter')
  await expect(page.getByRole('gridcell', { name: /2000 rpm, 46 kPa: 61.5.*by hand/ })).toBeVisible()
  await page.getByRole('button', { name: 'Decide by rule' }).click()
  await page.getByLabel('Evidence at least').fill('2')
  await page.getByRole('button', { name: /^Accept \d+ cells$/ }).click()
  await expect(page.getByText('Saved')).toBeVisible()
  await page.getByRole('button', { name: 'Make a revision' }).click()
  await page.getByLabel('Note to the reviewer').fill('The idle cells are the point of this one.')
  await holdsUp(page)
  await page.getByRole('button', { name: 'Make the revision' }).click()
  await expect(page.getByRole('heading', { level: 1 })).toHaveText(/cells change; look at these/)
  await expect(page.getByText('Draft, not signed')).toBeVisible()
  await holdsUp(page)
  await page.getByRole('button', { name: 'Send for sign-off' }).click()
  await page.getByRole('dialog').getByRole('button', { name: 'Send for sign-off' }).click()
  await expect(page.getByText('Submitted')).toBeVisible()
  const address = page.url()

  const reviewer = await signedIn(browser, 'reviewer')
  await reviewer.page.goto(address)
  const cautions = reviewer.page.getByRole('group', { name: 'Before you sign' })
  await expect(cautions).toBeVisible()
  for (const caution of await cautions.getByRole('checkbox').all()) await caution.check()
  await expect(reviewer.page.getByRole('button', { name: 'Sign revision 2' })).toBeDisabled()
  await reviewer.page.getByLabel('Type your name to sign').fill(personOf('reviewer').name)
  await holdsUp(reviewer.page)
  await reviewer.page.getByRole('button', { name: 'Sign revision 2' }).click()
  await expect(reviewer.page.getByRole('heading', { level: 1 })).toHaveText(/Revision 2 is signed/)
  await holdsUp(reviewer.page)

  const owner = await signedIn(browser, 'owner')
  await owner.page.goto(address)
  await expect(owner.page.getByRole('heading', { level: 1 })).toHaveText(/Revision 2 is signed/)
  await holdsUp(owner.page)
  const download = owner.page.waitForEvent('download')
  await owner.page.getByRole('link', { name: 'Table as CSV' }).click()
  const text = readFileSync(await (await download).path(), 'utf8')
  expect(text).toContain('Signed by Idris Vaughan')
  await owner.page.goto(address.replace(/revisions\/.*/, 'read-back'))
  await owner.page.getByLabel('Cells').fill(text)
  await owner.page.getByRole('button', { name: 'Compare' }).click()
  await expect(owner.page.getByRole('heading', { level: 1 })).toHaveText('It is revision 2, cell for cell')
  await holdsUp(owner.page)

  await page.goto('/demo/mails')
  await expect(page.getByRole('heading', { name: 'Revision 2 of Nursery flatbed waits for you' })).toBeVisible()
  await expect(page.getByRole('heading', { name: 'Revision 2 of Nursery flatbed is signed' })).toHaveCount(2)
  await holdsUp(page)
  expect([...faults, ...reviewer.faults, ...owner.faults]).toEqual([])
})

for (const [name, options] of [
  ['a phone', { viewport: { width: 390, height: 844 } }],
  ['the dark', { colorScheme: 'dark' }],
] as const) {
  test(`Every page holds up on ${name}`, async ({ browser }) => {
    const { page, faults } = await signedIn(browser, 'tuner', options)
    const vehicles = (await (await page.request.get('/api/vehicles')).json()) as { vehicles: { id: string }[] }
    const base = `/vehicles/${vehicles.vehicles[0]!.id}`
    const { logs } = (await (await page.request.get(`/api${base}/logs`)).json()) as { logs: { id: string }[] }
    const { revisions } = (await (await page.request.get(`/api${base}/revisions`)).json()) as {
      revisions: { id: string }[]
    }
    const pages = [
      '/',
      '/vehicles',
      '/vehicles/new',
      '/people',
      '/audit',
      '/account',
      base,
      `${base}/engine-sheet`,
      `${base}/tables`,
      `${base}/logs`,
      `${base}/logs/${logs[0]!.id}`,
      `${base}/workbench`,
      `${base}/workbench/new`,
      `${base}/revisions`,
      `${base}/revisions/${revisions[0]!.id}`,
      `${base}/read-back`,
      '/notices',
      `${base}/revisions/compare?from=${revisions[0]!.id}&to=${revisions[0]!.id}`,
    ]
    for (const address of pages) {
      await test.step(address, async () => {
        await page.goto(address)
        await expect(page.getByRole('heading', { level: 1 })).toBeVisible()
        await holdsUp(page)
      })
    }
    expect(faults).toEqual([])
  })
}

test('A new person joins by invitation, adds a vehicle with a pasted table, and is told what is wrong with a bad one', async ({
  browser,
}) => {
  const { page } = await signedIn(browser, 'tuner')
  await page.goto('/people')
  await page.getByLabel('E-mail').fill('nora@larkfield.example')
  await page.getByRole('group', { name: 'Roles', exact: true }).getByLabel('owner').uncheck()
  await page.getByRole('group', { name: 'Roles', exact: true }).getByLabel('tuner').check()
  await page.getByRole('button', { name: 'Send the invitation' }).click()
  await expect(page.getByText('The invitation is on its way.')).toBeVisible()

  const guest = await (await browser.newContext()).newPage()
  await guest.goto('/demo/mails')
  await guest.getByRole('link', { name: /\/invitation\// }).click()
  await holdsUp(guest)
  await guest.getByLabel('Your name').fill('Nora Field')
  await guest.getByLabel('Choose a password').fill('a garden of words')
  await guest.getByRole('button', { name: 'Join Larkfield Workshop' }).click()
  await guest.getByRole('link', { name: 'Add a vehicle' }).click()
  await guest.getByLabel('Name').fill('Field tractor')
  await guest.getByRole('button', { name: 'Add the vehicle' }).click()
  await expect(guest.getByText('A number is needed here, with a point or a comma.').first()).toBeVisible()
  await guest.getByLabel('Displacement').fill('2,1')
  await guest.getByLabel('Cylinders').fill('4')
  await guest.getByLabel('Rev limit').fill('4200')
  await guest.getByLabel('Injector flow').fill('190')
  await guest.getByRole('button', { name: 'Add the vehicle' }).click()
  await expect(guest.getByRole('heading', { level: 1 })).toHaveText('Bring the table that is in the controller now')
  await guest
    .getByLabel('Paste the fuel table')
    .fill('\t800\t2000\t4000\n30\t45\tx\t50\n60\t55\t66\t64\n100\t70\t80\t78\n')
  await expect(guest.getByText(/Row 2, column 3: “x” is not a number/)).toBeVisible()
  await guest
    .getByLabel('Paste the fuel table')
    .fill('\t800\t2000\t4000\n30\t45\t52,5\t50\n60\t55\t66\t64\n100\t70\t80\t78\n')
  await expect(guest.getByText(/3 by 3 cells/)).toBeVisible()
  await holdsUp(guest)
  await guest.getByRole('button', { name: 'Store the fuel table' }).click()
  await expect(guest.getByText('revision 1, in the engine')).toBeVisible()
})
