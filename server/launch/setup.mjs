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

/** Made at the first start, kept readable by their owner alone. */
function secrets() {
  const path = join(dataDir, 'secrets.json')
  if (existsSync(path)) return JSON.parse(readFileSync(path, 'utf8'))
  const made = { session: randomBytes(48).toString('base64url'), postgres: newPassword() }
  try {
    writeFileSync(path, JSON.stringify(made), { mode: 0o600, flag: 'wx' })
    return made
  } catch (error) {
    // Another first start was quicker: its secrets are the secrets.
    if (error.code === 'EEXIST') return JSON.parse(readFileSync(path, 'utf8'))
    throw error
  }
}

/** @returns the server's admin URL and the environment that our processes share. */
export async function prepare() {
  const [major, minor] = process.versions.node.split('.').map(Number)
  if (major < 20 || (major === 20 && minor < 19))
    throw new Error(`Node.js 20.19 or newer is needed; this is ${process.versions.node}.`)
  mkdirSync(dataDir, { recursive: true, mode: 0o755 })
  await withLock(join(dataDir, 'packages.lock'), async () => installPackages(root))
  const { session, postgres } = secrets()
  const outside = process.env['DATABASE_URL']
  const server = outside ? { url: outside, startedHere: false, stop() {} } : await ensurePostgres(dataDir, postgres)
  return { server, outside: outside !== undefined, sessionSecret: process.env['SESSION_SECRET'] ?? session }
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
