/** One database is migrated once; each test file clones it, so that files run side by side on a real server. */
import pg from 'pg'
import { readConfig } from '../../server/config.ts'
import { buildDeps, closeDeps } from '../../server/deps.ts'
import { migrateAll } from '../../server/platform/db/migrate.ts'
import { adminUrl, testEnvironment, urlOf } from './database.ts'

export const template = 'evenburn_test_template'

export default async function setup(): Promise<void> {
  const client = new pg.Client({ connectionString: adminUrl() })
  await client.connect()
  const old = await client.query<{ datname: string }>(
    "select datname from pg_database where datname like 'evenburn_test_%'",
  )
  for (const { datname } of old.rows) await client.query(`drop database "${datname}" with (force)`)
  await client.query(`create database "${template}"`)
  const deps = buildDeps(readConfig(testEnvironment(urlOf(template))))
  await migrateAll(deps)
  await closeDeps(deps)
  await client.end()
}
