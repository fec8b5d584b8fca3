/** Brings a database to the present schema; two processes doing so at once wait for each other. */
import { migrate } from 'drizzle-orm/node-postgres/migrator'
import type { Deps } from '../../deps.ts'
import { migrateQueue } from '../queue/run.ts'

const lockKey = 4_817_331

export async function migrateAll(deps: Pick<Deps, 'db' | 'pool'>): Promise<void> {
  const client = await deps.pool.connect()
  try {
    await client.query('select pg_advisory_lock($1)', [lockKey])
    await migrate(deps.db, { migrationsFolder: 'drizzle' })
    await migrateQueue(deps)
    await client.query('select pg_advisory_unlock($1)', [lockKey])
  } finally {
    client.release()
  }
}
