/** People of the demo in a browser: signing in, and what every page must hold to. */
import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import AxeBuilder from '@axe-core/playwright'
import { expect, type Browser, type Page } from '@playwright/test'

interface SignIn {
  readonly role: string
  readonly name: string
  readonly email: string
  readonly password: string
}

const demo = JSON.parse(readFileSync(join(process.env['EVENBURN_DATA'] ?? '.data', 'demo.json'), 'utf8')) as SignIn[]

export const personOf = (role: string): SignIn => {
  const found = demo.find((each) => each.role === role)
  if (!found) throw new Error(`the demo has no ${role}`)
  return found
}

/** A browser of their own, signed in; a console error fails the test that opened it. */
export async function signedIn(browser: Browser, role: string, options: Parameters<Browser['newContext']>[0] = {}) {
  const page = await (await browser.newContext(options)).newPage()
  const faults: string[] = []
  page.on('console', (message) => {
    if (message.type() === 'error' && !message.text().includes('401')) faults.push(message.text())
  })
  page.on('pageerror', (error) => faults.push(error.message))
  const { email, password } = personOf(role)
  await page.goto('/sign-in')
  await page.getByLabel('E-mail').fill(email)
  await page.getByLabel('Password').fill(password)
  await page.getByRole('button', { name: 'Sign in' }).click()
  await expect(page.getByRole('heading', { name: 'Vehicles' })).toBeVisible()
  return { page, faults }
}

/** Nothing for axe to find, and nothing that makes the page scroll sideways. */
export async function holdsUp(page: Page): Promise<void> {
  await page.waitForLoadState('networkidle')
  const { violations } = await new AxeBuilder({ page }).analyze()
  expect(
    violations.map(({ id, nodes }) => `${id}: ${nodes.map((node) => node.html.slice(0, 160)).join(' | ')}`),
  ).toEqual([])
  const wider = await page.evaluate(() => document.documentElement.scrollWidth - window.innerWidth)
  expect(wider, 'the page scrolls sideways').toBeLessThanOrEqual(0)
}
