/** The log page in a browser: a dead sensor leads, a finding leads to its stretch and its cells. */
import { expect, test } from '@playwright/test'
import { flatbed } from '../../sample-logs/simulator/demo.ts'
import { toCsv } from '../../sample-logs/simulator/simulate.ts'
import { holdsUp, signedIn } from './people.ts'
import { flatbedLog } from '../support/drives.ts'

/** Coolant at what an open circuit reads, and lean under load. */
function deadCoolantDrive(): string {
  const log = flatbedLog(41, { seconds: 200, rateHz: 10 })
  const map = log['MAP (kPa)']!
  return toCsv({
    ...log,
    'ECT (°C)': map.map(() => -40),
    Lambda: log['Lambda']!.map((lambda, i) => (map[i]! > 86 ? 1.1 : lambda)),
  })
}

for (const [name, options] of [
  ['at a desk', {}],
  ['on a phone in the dark', { viewport: { width: 390, height: 844 }, colorScheme: 'dark' }],
] as const) {
  test(`A log with a dead coolant sensor leads with that, ${name}`, async ({ browser }) => {
    const { page, faults } = await signedIn(browser, 'tuner', options)
    const listed = (await (await page.request.get('/api/vehicles')).json()) as {
      vehicles: { id: string; name: string }[]
    }
    const vehicle = listed.vehicles.find((each) => each.name === flatbed.name)!
    await page.goto(`/vehicles/${vehicle.id}/logs`)
    // The same file twice would be refused, so each has its own number of blank lines.
    await page.locator('input[type=file]').setInputFiles({
      name: `dead coolant ${name}.csv`,
      mimeType: 'text/csv',
      buffer: Buffer.from(deadCoolantDrive() + '\n'.repeat(name.length)),
    })
    const row = page.getByRole('row', { name: `dead coolant ${name}` })
    await expect(row.getByText('Dead')).toBeVisible({ timeout: 30_000 })
    await row.getByRole('link').click()
    await expect(page.getByRole('heading', { level: 1 })).toHaveText('Coolant temperature (ECT) is dead in this log')
    const first = page.getByRole('table', { name: 'Health of each channel' }).getByRole('row').nth(1)
    await expect(first).toContainText('Coolant temperature')
    await expect(first).toContainText('open circuit')

    const findings = page.getByRole('region', { name: 'Findings' })
    await expect(findings.getByRole('heading', { level: 3 }).first()).toContainText('Lean under high load')
    const whole = await page.getByText(/^0:00 to /).textContent()
    await findings.getByRole('button', { name: /^At / }).first().click()
    await expect(page.getByText(whole!, { exact: true })).toHaveCount(0)
    await findings
      .getByRole('button', { name: /on the table$/ })
      .first()
      .click()
    await expect(page.getByRole('gridcell', { name: /part of the finding/ }).first()).toBeVisible()

    const cursor = page.getByRole('slider', { name: /Cursor/ })
    await cursor.focus()
    await page.keyboard.press('ArrowRight')
    await expect(page.getByText(/^Engine speed: \d/)).toBeVisible()
    await page.keyboard.press('0')
    await expect(page.getByText(whole!, { exact: true })).toBeVisible()
    await page.getByRole('button', { name: 'Show the values as a table' }).click()
    await expect(page.getByRole('table', { name: 'Readings of the stretch shown' })).toBeVisible()
    await holdsUp(page)
    expect(faults).toEqual([])
  })
}
