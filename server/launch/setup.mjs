/** What every command needs first: packages, the data folder, secrets, a database server. */
import { randomBytes } from 'node:crypto'
import { existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs'
import { dirname, join, resolve } from 'node:path'
import { fileURLToPath } from 'node:url'
import { withLock } from './lock.mjs'
import { installPackages } from './packages.mjs'
import { ensurePostgres, newPassword } from './postgres.mjs'

export const root = resolve(dirname(fileURLToPath(import.meta.url)), '..', '..')
export const dataDir = resolve(process.env['EVENBURN_DATA'] ?? join(root, '.data'))

/** Made at the first start, kept readable by their owner alone. Call it under a lock: two first starts must agree. */
function secrets() {
  const path = join(dataDir, 'secrets.json')
  if (existsSync(path)) return JSON.parse(readFileSync(path, 'utf8'))
  const made = { session: randomBytes(48).toString('base64url'), postgres: newPassword() }
  writeFileSync(path, JSON.stringify(made), { mode: 0o600 })
  return made
}

/**
 * @param outside  URL of a server elsewhere; without one the private cluster is used.
 * @returns the server's admin URL, how to leave it, and the secret that our processes share.
 */
export async function prepare(outside) {
  const [major, minor] = process.versions.node.split('.').map(Number)
  if (major < 20 || (major === 20 && minor < 19))
    throw new Error(`Node.js 20.19 or newer is needed; this is ${process.versions.node}.`)
  mkdirSync(dataDir, { recursive: true, mode: 0o755 })
  const { session, postgres } = await withLock(join(dataDir, 'packages.lock'), () => {
    installPackages(root)
    return secrets()
  })
  const server = outside ? { url: outside, stop: async () => {} } : await ensurePostgres(dataDir, postgres)
  return { server, sessionSecret: process.env['SESSION_SECRET'] ?? session }
}

/** The same server's URL with another database. */
export function databaseUrl(adminUrl, name) {
  const url = new URL(adminUrl)
  url.pathname = `/${name}`
  return url.href
}

/** Makes a database where it is missing; afresh, dropping what was there, when asked. */
export async function ensureDatabase(adminUrl, name, { fresh = false } = {}) {
  const { default: pg } = await import('pg')
  const client = new pg.Client({ connectionString: adminUrl })
  await client.connect()
  try {
    if (fresh) await client.query(`drop database if exists "${name}" with (force)`)
    const { rowCount } = await client.query('select 1 from pg_database where datname = $1', [name])
    if (rowCount === 0)
      await client.query(`create database "${name}"`).catch((error) => {
        if (error.code !== '42P04' && error.code !== '23505') throw error
      })
  } finally {
    await client.end()
  }
  return databaseUrl(adminUrl, name)
}
