/** The test server's address, and a database of its own for each test file. */
import { randomUUID } from 'node:crypto'
import { mkdtempSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import pg from 'pg'

export function adminUrl(): string {
  const url = process.env['TEST_DATABASE_URL']
  if (!url) throw new Error('TEST_DATABASE_URL is missing: run the tests by `npm test`, which starts a server')
  return url
}

export function urlOf(name: string): string {
  const url = new URL(adminUrl())
  url.pathname = `/${name}`
  return url.href
}

export const testEnvironment = (databaseUrl: string): Record<string, string> => ({
  DATABASE_URL: databaseUrl,
  SESSION_SECRET: 'a secret for tests only, long enough to be one',
  EVENBURN_DATA: mkdtempSync(join(tmpdir(), 'evenburn-test-')),
  EVENBURN_DEMO: '1',
  LOG_LEVEL: 'silent',
  TRY_LIMIT: '10',
  PUBLIC_URL: 'http://evenburn.test',
})

/** A fresh copy of the migrated template. */
export async function cloneDatabase(): Promise<{ url: string; drop: () => Promise<void> }> {
  const name = `evenburn_test_${randomUUID().replaceAll('-', '')}`
  const run = async (sql: string) => {
    const client = new pg.Client({ connectionString: adminUrl() })
    await client.connect()
    await client.query(sql)
    await client.end()
  }
  await run(`create database "${name}" template evenburn_test_template`)
  return { url: urlOf(name), drop: () => run(`drop database "${name}" with (force)`) }
}
