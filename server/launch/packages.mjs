/** Brings node_modules to what the lock file says, and installs Debian packages where they are missing and may be. */
import { createHash } from 'node:crypto'
import { existsSync, readFileSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { isRoot, runQuietly, succeeds } from './commands.mjs'

const stampPath = (root) => join(root, 'node_modules', '.evenburn-lock')

export function installPackages(root) {
  const hash = createHash('sha256')
    .update(readFileSync(join(root, 'package-lock.json')))
    .digest('hex')
  const stamp = stampPath(root)
  if (existsSync(stamp) && readFileSync(stamp, 'utf8') === hash) return
  console.log('Installing packages…')
  const npm = process.env['npm_execpath']
  const env = { ...process.env }
  // In production mode npm would leave the build tools out.
  delete env['NODE_ENV']
  const args = ['ci', '--include=dev', '--no-audit', '--no-fund']
  if (npm) runQuietly(process.execPath, [npm, ...args], { cwd: root, env })
  else runQuietly('npm', args, { cwd: root, env })
  writeFileSync(stamp, hash)
}

/** @param mend  the one line a person types when this cannot be done for them. */
export function installDebian(packages, why, mend) {
  const sudo = isRoot ? [] : succeeds('sudo', ['-n', 'true']) ? ['sudo', '-n'] : null
  if (sudo === null) throw new Error(`${why}. Install it once with:\n  ${mend}`)
  console.log(`Installing ${packages.join(', ')}…`)
  const [command, ...before] = [...sudo, 'apt-get']
  const env = { ...process.env, DEBIAN_FRONTEND: 'noninteractive' }
  const install = [...before, 'install', '-y', '--no-install-recommends', ...packages]
  if (succeeds(command, install, { env })) return
  runQuietly(command, [...before, 'update'], { env })
  runQuietly(command, install, { env })
}

export function ensureChromium() {
  for (const path of ['/usr/bin/chromium', '/usr/bin/chromium-browser']) if (existsSync(path)) return path
  installDebian(['chromium', 'fonts-liberation'], 'The browser tests need Chromium', 'sudo apt-get install -y chromium')
  return '/usr/bin/chromium'
}
