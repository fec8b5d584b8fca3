/** `npm test`: sets up, runs every check there is, and ends with one line that counts them. */
import { existsSync, readFileSync, rmSync } from 'node:fs'
import { join } from 'node:path'
import { endPrograms, runShown } from './commands.mjs'
import { ensureChromium } from './packages.mjs'
import { dataDir, prepare, root } from './setup.mjs'
import { startTrial } from './trial.mjs'

const bin = (name) => join(root, 'node_modules', '.bin', name)
const totals = { passed: 0, failed: 0 }
const count = (passed, failed) => {
  totals.passed += passed
  totals.failed += failed
}

async function check(name, command, args) {
  console.log(`\n== ${name}`)
  const code = await runShown(command, args, { cwd: root })
  count(code === 0 ? 1 : 0, code === 0 ? 0 : 1)
}

function readReport(path) {
  if (!existsSync(path)) return null
  return JSON.parse(readFileSync(path, 'utf8'))
}

async function vitest(env) {
  console.log('\n== Unit, API and page tests')
  const report = join(dataDir, 'vitest.json')
  rmSync(report, { force: true })
  const code = await runShown(
    bin('vitest'),
    ['run', '--reporter=dot', '--reporter=json', `--outputFile.json=${report}`],
    { cwd: root, env },
  )
  const found = readReport(report)
  if (!found || found.numTotalTests === 0) return count(0, 1)
  count(found.numPassedTests, found.numFailedTests)
  // A file that could not even be loaded has no failed test of its own.
  if (code !== 0 && found.numFailedTests === 0) count(0, 1)
}

async function browser(adminUrl, baseEnv) {
  console.log('\n== Browser tests')
  const chromium = ensureChromium()
  const product = await startTrial(adminUrl, 'e2e', { ...baseEnv, TRY_LIMIT: '100' })
  const report = join(dataDir, 'playwright.json')
  rmSync(report, { force: true })
  let code = 1
  try {
    code = await runShown(bin('playwright'), ['test'], {
      cwd: root,
      env: { ...product.env, CHROMIUM: chromium, E2E_URL: product.url, PLAYWRIGHT_JSON_OUTPUT_NAME: report },
    })
  } finally {
    await product.stop()
  }
  const stats = readReport(report)?.stats
  if (!stats || stats.expected + stats.unexpected === 0) return count(0, 1)
  count(stats.expected + stats.flaky, stats.unexpected + stats.skipped)
  if (code !== 0 && stats.unexpected + stats.skipped === 0) count(0, 1)
}

/** What a shell has set for a product in use must not reach the tests: no server, mail or folder of it. */
function testEnvironment(adminUrl) {
  const env = { ...process.env, TEST_DATABASE_URL: adminUrl }
  for (const name of ['NODE_ENV', 'DATABASE_URL', 'SMTP_URL', 'HOST', 'QUOTA_MB', 'UPLOAD_MAX_MB']) delete env[name]
  return env
}

let leave = async () => {}
let stopped = false

async function main() {
  const { server } = await prepare()
  leave = () => server.stop()
  const env = testEnvironment(server.url)
  try {
    await check('Lint', bin('oxlint'), ['--type-aware', '--deny-warnings'])
    await check('Format', bin('prettier'), ['--check', '--log-level', 'warn', '.'])
    await check('Types', bin('tsc'), ['--noEmit'])
    await check('Types of shared, without Node or DOM', bin('tsc'), ['--noEmit', '-p', 'shared'])
    await check('Types of the core, without Node or DOM', bin('tsc'), ['--noEmit', '-p', 'server/core'])
    await vitest(env)
    if (process.env['SKIP_E2E'] === '1') console.log('\nBrowser tests were left out: SKIP_E2E=1')
    else await browser(server.url, env)
  } finally {
    if (!stopped) await leave()
  }
}

/** Interrupted: what we began ends with us (each program follows its launcher), and the verdict is a failure. */
async function interrupted() {
  if (stopped) return
  stopped = true
  await endPrograms()
  await leave()
  console.log(`\nInterrupted.\n\n${totals.passed} passed, ${totals.failed + 1} failed`)
  process.exit(1)
}
for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP']) process.on(signal, () => void interrupted())

await main().catch((error) => {
  console.error(error.message)
  count(0, 1)
})
if (!stopped) {
  console.log(`\n${totals.passed} passed, ${totals.failed} failed`)
  process.exit(totals.failed > 0 || totals.passed === 0 ? 1 : 0)
}
