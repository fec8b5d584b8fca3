/** The job loop of a worker process: take jobs, keep a pulse, and free the jobs of workers whose pulse stopped. */
import { sql } from 'drizzle-orm'
import { run, runOnce, runMigrations, type Runner, type TaskList } from 'graphile-worker'
import { Logger as WorkerLogger } from 'graphile-worker'
import type { Deps } from '../../deps.ts'
import { workerBeats } from '../db/schema/queue.ts'

export interface JobDefinition {
  readonly name: string
  /** Loads what it needs from ids and survives running twice. */
  readonly handle: (deps: Deps, payload: unknown, signal: AbortSignal) => Promise<void>
}

const beatMs = 2_000
/** Three beats missed: the worker is gone and its jobs are free. */
const silentMs = 3 * beatMs

const quiet = (deps: Deps) =>
  new WorkerLogger(() => (level, message) => {
    if (level === 'error' || level === 'warning') deps.log.warn({ queue: message })
  })

const taskList = (deps: Deps, jobs: readonly JobDefinition[], signal: AbortSignal): TaskList =>
  Object.fromEntries(jobs.map((job) => [job.name, async (payload) => job.handle(deps, payload, signal)]))

export async function migrateQueue(deps: Pick<Deps, 'pool'>): Promise<void> {
  await runMigrations({ pgPool: deps.pool })
}

/** Takes back the jobs of pools that were not heard of for three beats; a job just taken may precede the first beat. */
export async function sweep(deps: Deps): Promise<void> {
  const limit = new Date(deps.clock.now().getTime() - silentMs)
  const dead = await deps.db.execute<{ locked_by: string }>(sql`
    select distinct jobs.locked_by from graphile_worker.jobs as jobs
    left join worker_beats on worker_beats.pool_id = jobs.locked_by
    where jobs.locked_at < ${limit.toISOString()}
      and (worker_beats.seen_at is null or worker_beats.seen_at < ${limit.toISOString()})
  `)
  const ids = dead.rows.map((row) => row.locked_by)
  if (ids.length === 0) return
  deps.log.warn({ workers: ids }, 'jobs of silent workers are taken up again')
  await deps.db.execute(sql`select graphile_worker.force_unlock_workers(${sql.param(ids)}::text[])`)
}

async function beat(deps: Deps, poolId: string): Promise<void> {
  await deps.db
    .insert(workerBeats)
    .values({ poolId, seenAt: deps.clock.now() })
    .onConflictDoUpdate({ target: workerBeats.poolId, set: { seenAt: deps.clock.now() } })
}

export interface WorkerLoop {
  readonly stop: () => Promise<void>
}

export async function startWorker(deps: Deps, jobs: readonly JobDefinition[], concurrency = 2): Promise<WorkerLoop> {
  const abort = new AbortController()
  const { EventEmitter } = await import('node:events')
  const events = new EventEmitter()
  let poolId: string | null = null
  events.on('pool:create', (event: { workerPool: { id: string } }) => {
    poolId = event.workerPool.id
  })
  const runner: Runner = await run({
    pgPool: deps.pool,
    taskList: taskList(deps, jobs, abort.signal),
    concurrency,
    noHandleSignals: true,
    pollInterval: 500,
    logger: quiet(deps),
    events,
  })
  const pulse = async () => {
    if (poolId) await beat(deps, poolId)
    await sweep(deps)
  }
  const failed = (error: unknown) => deps.log.warn({ err: error }, 'the pulse failed')
  await pulse().catch(failed)
  const timer = setInterval(() => void pulse().catch(failed), beatMs)
  return {
    async stop() {
      clearInterval(timer)
      abort.abort()
      await runner.stop()
      if (poolId) await deps.db.execute(sql`delete from worker_beats where pool_id = ${poolId}`)
    },
  }
}

/** Runs every waiting job once, in this process; for tests and the seeder. */
export async function drainQueue(deps: Deps, jobs: readonly JobDefinition[]): Promise<void> {
  await runOnce({
    pgPool: deps.pool,
    taskList: taskList(deps, jobs, new AbortController().signal),
    noHandleSignals: true,
    logger: quiet(deps),
  })
}
