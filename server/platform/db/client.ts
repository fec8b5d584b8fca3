/** The door to PostgreSQL: one pool, drizzle over it, and the transaction every use case runs in. */
import { drizzle, type NodePgDatabase } from 'drizzle-orm/node-postgres'
import pg from 'pg'
import * as schema from './schema/all.ts'

export type Db = NodePgDatabase<typeof schema>
export type Tx = Parameters<Parameters<Db['transaction']>[0]>[0]
/** What a read needs: the pool or a transaction. */
export type Reader = Db | Tx

export function openPool(url: string, onError: (error: Error) => void): pg.Pool {
  const pool = new pg.Pool({ connectionString: url, max: 10 })
  // Without a listener a restart of the server would end the process.
  pool.on('error', onError)
  pool.on('connect', (client) => client.on('error', onError))
  return pool
}

export const openDb = (connection: pg.Pool | pg.PoolClient): Db => drizzle(connection, { schema, casing: 'snake_case' })

/** True for the SQLSTATE of a unique violation, on the named constraint where one is given. */
export function isUniqueViolation(error: unknown, constraint?: string): boolean {
  const cause = error instanceof Error && error.cause ? error.cause : error
  return (
    cause instanceof pg.DatabaseError &&
    cause.code === '23505' &&
    (constraint === undefined || cause.constraint === constraint)
  )
}
