/** A product of its own for browser tests and measurements: fresh database, seeded demo, web and worker processes. */
import { rmSync } from 'node:fs'
import { join } from 'node:path'
import { buildClient } from './build.mjs'
import { keepRunning, waitUntilReady } from './children.mjs'
import { runQuietly } from './commands.mjs'
import { kernelPort } from './ports.mjs'
import { dataDir, ensureDatabase, root } from './setup.mjs'

export async function startTrial(adminUrl, name, baseEnv) {
  buildClient(root)
  const port = await kernelPort()
  const home = join(dataDir, name)
  rmSync(home, { recursive: true, force: true })
  const env = {
    ...baseEnv,
    NODE_ENV: 'production',
    DATABASE_URL: await ensureDatabase(adminUrl, `evenburn_${name}`, { fresh: true }),
    EVENBURN_DATA: home,
    SESSION_SECRET: 'a secret for trials only, long enough for them',
    EVENBURN_DEMO: '1',
    PORT: String(port),
    PUBLIC_URL: `http://localhost:${port}`,
    LOG_LEVEL: 'warn',
  }
  const tsx = ['--import', 'tsx']
  runQuietly(process.execPath, [...tsx, 'server/migrate.ts'], { cwd: root, env })
  runQuietly(process.execPath, [...tsx, 'server/seed.ts'], { cwd: root, env })
  const children = keepRunning(
    [
      { name: 'web', args: [...tsx, 'server/main.ts'] },
      { name: 'worker', args: [...tsx, 'server/worker.ts'] },
    ],
    { cwd: root, env },
  )
  const stop = () => children.stop()
  try {
    await waitUntilReady(`http://127.0.0.1:${port}/api/health`)
  } catch (error) {
    await stop()
    throw error
  }
  return { url: env.PUBLIC_URL, home, env, stop }
}
