/** Loaded into each process of a start: ends it when the launcher is gone, so that a killed launcher leaves no orphans. */
import { isMainThread } from 'node:worker_threads'

const lookEveryMs = 500

// Threads are loaded with it too; they end with their process.
if (isMainThread) {
  const launcher = process.ppid
  setInterval(() => {
    if (process.ppid !== launcher) process.kill(process.pid, 'SIGTERM')
  }, lookEveryMs).unref()
}
