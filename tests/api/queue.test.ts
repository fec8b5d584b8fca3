/** The queue: a silent worker's job is taken up again, a stale reading changes nothing, mails go out once. */
import { spawn } from 'node:child_process'
import { sql } from 'drizzle-orm'
import { afterAll, beforeAll, expect, test } from 'vitest'
import { listDemoMails, askPasswordReset } from '../../shared/contract/accounts.ts'
import { getLog, readLogAgain } from '../../shared/contract/logs.ts'
import { updateAttempt } from '../../server/features/logs/store.ts'
import { startWorker, sweep } from '../../server/platform/queue/run.ts'
import { aWorkshop, startServer, type Crew, type TestServer } from '../support/server.ts'
import { aVehicle } from '../support/vehicle.ts'

let server: TestServer
let crew: Crew
beforeAll(async () => {
  server = await startServer()
  crew = await aWorkshop(server, 'queue')
})
afterAll(() => server.close())

const until = async (holds: () => Promise<boolean>, withinMs = 30_000) => {
  for (let waited = 0; waited < withinMs; waited += 100) {
    if (await holds()) return
    await new Promise((resolve) => setTimeout(resolve, 100))
  }
  throw new Error(`it did not happen within ${withinMs} ms`)
}

test('when a worker process is killed in the middle of a job, then another takes the job up within seconds', async () => {
  const script = `
    import { run } from 'graphile-worker'
    await run({ connectionString: process.env.DATABASE_URL, concurrency: 1, noHandleSignals: true, taskList: { 'test.once': () => new Promise(() => setTimeout(() => {}, 60_000)) } })
  `
  const child = spawn(process.execPath, ['--input-type=module', '-e', script], {
    env: { ...process.env, DATABASE_URL: server.deps.config.databaseUrl },
    stdio: 'ignore',
  })
  await server.deps.db.execute(sql`select graphile_worker.add_job('test.once', '{}'::json)`)
  const locked = async () =>
    (
      await server.deps.db.execute<{ n: string }>(
        sql`select count(*) as n from graphile_worker.jobs where task_identifier = 'test.once' and locked_by is not null`,
      )
    ).rows[0]?.n === '1'
  await until(locked)
  child.kill('SIGKILL')

  let done = false
  const worker = await startWorker(server.deps, [
    {
      name: 'test.once',
      handle: () => {
        done = true
        return Promise.resolve()
      },
    },
  ])
  await until(() => Promise.resolve(done))
  await worker.stop()
})

test('when a worker is alive, then the sweep leaves its jobs alone', async () => {
  let finish = () => {}
  let begun = () => {}
  const started = new Promise<void>((resolve) => {
    begun = resolve
  })
  const worker = await startWorker(server.deps, [
    {
      name: 'test.long',
      handle: () => {
        begun()
        return new Promise<void>((end) => {
          finish = end
        })
      },
    },
  ])
  await server.deps.db.execute(sql`select graphile_worker.add_job('test.long', '{}'::json)`)
  await started
  await sweep(server.deps)
  const rows = await server.deps.db.execute(
    sql`select locked_by from graphile_worker.jobs where task_identifier = 'test.long' and locked_by is not null`,
  )
  expect(rows.rows).toHaveLength(1)
  finish()
  await worker.stop()
})

test('when a reading was begun anew, then a stale worker’s last word changes nothing', async () => {
  const { log } = await aVehicle(server, crew, { log: true })
  await crew.tuner.call(readLogAgain, { params: { logId: log!.id } })
  expect(await updateAttempt(server.deps.db, log!.id, 0, { state: 'failed' })).toBe(false)
  await server.drain()
  expect((await crew.tuner.call(getLog, { params: { logId: log!.id } })).body.state).toBe('ready')
})

test('when the transaction of a fact fails, then neither the fact nor its mail exists', async () => {
  await server.caller({})(askPasswordReset, { body: { email: crew.tuner.email } })
  const before = await server.deps.db.execute(sql`select id from graphile_worker.jobs`)
  await expect(
    server.deps.db.transaction(async (tx) => {
      await tx.execute(sql`select graphile_worker.add_job('mail.send', '{}'::json)`)
      throw new Error('undone')
    }),
  ).rejects.toThrow('undone')
  expect((await server.deps.db.execute(sql`select id from graphile_worker.jobs`)).rows).toHaveLength(before.rows.length)
  await server.drain()
  const mails = (await server.caller({})(listDemoMails)).body.mails.filter((mail) => mail.to.includes(crew.tuner.email))
  expect(mails).toHaveLength(1)
})
