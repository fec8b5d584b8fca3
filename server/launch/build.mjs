/** Builds the client when its sources have changed since the last build. */
import { createHash } from 'node:crypto'
import { existsSync, readdirSync, readFileSync, writeFileSync } from 'node:fs'
import { join } from 'node:path'
import { runQuietly } from './commands.mjs'

function* filesBelow(path) {
  for (const entry of readdirSync(path, { withFileTypes: true }).sort((a, b) => (a.name < b.name ? -1 : 1))) {
    const inside = join(path, entry.name)
    if (entry.isDirectory()) yield* filesBelow(inside)
    else yield inside
  }
}

export function buildClient(root) {
  const hash = createHash('sha256')
  for (const path of [...filesBelow(join(root, 'src')), ...filesBelow(join(root, 'shared'))])
    hash.update(path).update(readFileSync(path))
  for (const name of ['index.html', 'vite.config.ts', 'package-lock.json']) hash.update(readFileSync(join(root, name)))
  const digest = hash.digest('hex')
  const stamp = join(root, 'dist', '.sources')
  if (existsSync(stamp) && readFileSync(stamp, 'utf8') === digest) return
  console.log('Building the pages…')
  runQuietly(process.execPath, [join(root, 'node_modules', 'vite', 'bin', 'vite.js'), 'build', '--logLevel', 'warn'], {
    cwd: root,
    env: { ...process.env, NODE_ENV: 'production' },
  })
  writeFileSync(stamp, digest)
}
