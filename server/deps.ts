/** What use cases are given: built once by each process, passed as an argument. */
import { mkdirSync } from 'node:fs'
import type pg from 'pg'
import type { Config } from './config.ts'
import { openCrunch, type Crunch } from './learner/pool.ts'
import { systemClock, type Clock } from './platform/clock.ts'
import { openDb, openPool, type Db } from './platform/db/client.ts'
import { openLog, type Logger } from './platform/log.ts'

export interface Deps {
  readonly config: Config
  readonly pool: pg.Pool
  readonly db: Db
  readonly clock: Clock
  readonly crunch: Crunch
  readonly log: Logger
}

export function buildDeps(config: Config, clock: Clock = systemClock): Deps {
  mkdirSync(config.uploadDir, { recursive: true })
  const log = openLog(config.logLevel)
  const pool = openPool(config.databaseUrl, (error) => log.warn({ err: error }, 'a database connection was lost'))
  return { config, pool, db: openDb(pool), clock, crunch: openCrunch(), log }
}

export async function closeDeps(deps: Deps): Promise<void> {
  await deps.crunch.close()
  await deps.pool.end()
}
