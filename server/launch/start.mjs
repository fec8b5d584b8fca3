/** `npm start` and `npm run dev`: everything from an empty clone to an address that works; Ctrl-C ends all of it. */
import { existsSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { buildClient } from './build.mjs'
import { keepRunning, waitUntilReady } from './children.mjs'
import { runQuietly, sleep } from './commands.mjs'
import { withLock } from './lock.mjs'
import { isFree } from './ports.mjs'
import { dataDir, ensureDatabase, prepare, root } from './setup.mjs'

const dev = process.argv.includes('--dev')
const port = process.env['PORT'] ?? '4100'
const webPort = dev ? String(Number(port) + 1) : port
let stopAll = async () => {}
let stopping = false

async function stop(code) {
  if (stopping) return
  stopping = true
  await stopAll()
  process.exit(code)
}
process.on('SIGINT', () => void stop(0))
process.on('SIGTERM', () => void stop(0))
process.on('SIGHUP', () => void stop(0))

function printSignIns() {
  const path = join(dataDir, 'demo.json')
  if (!existsSync(path)) return
  console.log('\nDemo sign-ins:')
  for (const { role, email, password } of JSON.parse(readFileSync(path, 'utf8')))
    console.log(`  ${role.padEnd(9)} ${email.padEnd(24)} ${password}`)
}

/** The processes of a launcher killed a moment ago need a few seconds to end. */
async function becomesFree(each) {
  for (let waited = 0; waited < 5000; waited += 250) {
    if (await isFree(each, process.env['HOST'] ?? '127.0.0.1')) return true
    await sleep(250)
  }
  return false
}

/** Else another program's answer would be taken for ours, while our own web process dies and is begun again. */
async function portsMustBeFree() {
  for (const each of new Set([port, webPort])) {
    if (await becomesFree(Number(each))) continue
    throw new Error(
      `Port ${each} is taken: by another program, or by Evenburn already running. To choose another: PORT=4200 npm start`,
    )
  }
}

function programs() {
  const tsx = ['--import', 'tsx']
  const watch = dev ? [...tsx, '--watch'] : tsx
  const list = [
    { name: 'web', args: [...watch, 'server/main.ts'] },
    { name: 'worker', args: [...watch, 'server/worker.ts'] },
  ]
  if (dev) list.push({ name: 'vite', args: ['node_modules/vite/bin/vite.js', '--port', port, '--strictPort'] })
  return list
}

function bringUpToDate(env, demo) {
  const tsx = ['--import', 'tsx']
  runQuietly(process.execPath, [...tsx, 'server/migrate.ts'], { cwd: root, env })
  if (demo === '1') {
    if (!existsSync(join(dataDir, 'demo.json'))) console.log('Making the demo workshop…')
    runQuietly(process.execPath, [...tsx, 'server/seed.ts'], { cwd: root, env })
  }
  if (!dev) buildClient(root)
}

async function main() {
  await portsMustBeFree()
  const outside = process.env['DATABASE_URL']
  const { server, sessionSecret } = await prepare(outside)
  stopAll = () => server.stop()
  const url = outside ? server.url : await ensureDatabase(server.url, 'evenburn')
  const demo = process.env['EVENBURN_DEMO'] ?? (outside ? '0' : '1')
  const address = `http://localhost:${port}`
  const env = {
    ...process.env,
    NODE_ENV: dev ? 'development' : 'production',
    DATABASE_URL: url,
    EVENBURN_DATA: dataDir,
    SESSION_SECRET: sessionSecret,
    EVENBURN_DEMO: demo,
    PORT: webPort,
    PUBLIC_URL: process.env['PUBLIC_URL'] ?? address,
    LOG_LEVEL: process.env['LOG_LEVEL'] ?? 'warn',
  }
  // Held until the port is ours, so that a second start sees that it is taken.
  await withLock(join(dataDir, 'start.lock'), async () => {
    bringUpToDate(env, demo)
    await portsMustBeFree()
    const children = keepRunning(programs(), {
      cwd: root,
      env: dev ? { ...env, EVENBURN_API: `http://127.0.0.1:${webPort}` } : env,
    })
    stopAll = async () => {
      await children.stop()
      await server.stop()
    }
    await waitUntilReady(`http://127.0.0.1:${webPort}/api/health`)
  })
  console.log(`\nEvenburn is ready: ${address}`)
  if (demo === '1') printSignIns()
  else console.log('The first visit makes the workshop and its admin.')
  console.log('\nCtrl-C ends it.')
}

main().catch((error) => {
  console.error(error.message)
  void stop(1)
})
