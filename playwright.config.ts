/** Browser tests against a running product, in Debian's Chromium; `npm test` starts both. */
import { defineConfig } from '@playwright/test'

const quiet = [
  '--disable-gpu',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
  '--disable-quic',
  '--no-first-run',
]

export default defineConfig({
  testDir: 'tests/e2e',
  workers: 1,
  timeout: 120_000,
  expect: { timeout: 15_000 },
  reporter: [['list'], ['json']],
  outputDir: '.data/playwright',
  use: {
    baseURL: process.env['E2E_URL'] ?? 'http://localhost:4100',
    viewport: { width: 1440, height: 900 },
    launchOptions: {
      executablePath: process.env['CHROMIUM'] ?? '/usr/bin/chromium',
      // Chromium refuses its sandbox to root.
      args: process.getuid?.() === 0 ? ['--no-sandbox', ...quiet] : quiet,
    },
  },
})
