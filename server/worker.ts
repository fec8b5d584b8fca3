/** The worker process: takes jobs until it is told to stop; any number of them on as many machines as reach the database. */
import { readConfig } from './config.ts'
import { buildDeps, closeDeps } from './deps.ts'
import { jobs } from './jobs.ts'
import { startWorker } from './platform/queue/run.ts'

const deps = buildDeps(readConfig(process.env))
const worker = await startWorker(deps, jobs)
deps.log.info('worker process is waiting for jobs')

let stopping = false
function stop(): void {
  if (stopping) return
  stopping = true
  void worker
    .stop()
    .then(() => closeDeps(deps))
    .then(() => process.exit(0))
}
process.on('SIGTERM', stop)
process.on('SIGINT', stop)
