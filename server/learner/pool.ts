/** The door to the worker threads. A crash or a cap on memory ends the task, never the process. */
import { MessageChannel } from 'node:worker_threads'
import { Piscina } from 'piscina'
import type { LogReading } from '../core/csv/read-log.ts'
import type { LearnInput, LearnProgress, LearnResult } from '../core/learn.ts'

export interface Crunch {
  readonly hashPassword: (password: string) => Promise<string>
  readonly checkPassword: (password: string, against: string) => Promise<boolean>
  readonly readLogFile: (path: string, gzip: boolean, signal: AbortSignal) => Promise<LogReading>
  readonly learn: (input: LearnInput, onProgress: LearnProgress, signal: AbortSignal) => Promise<LearnResult>
  readonly close: () => Promise<void>
}

export function openCrunch(): Crunch {
  const pool = new Piscina({
    filename: new URL('./thread-entry.mjs', import.meta.url).href,
    minThreads: 0,
    maxThreads: 2,
    idleTimeout: 30_000,
    resourceLimits: { maxOldGenerationSizeMb: 1024 },
  })
  return {
    hashPassword: (password) => pool.run({ password }, { name: 'hashPassword' }) as Promise<string>,
    checkPassword: (password, against) =>
      pool.run({ password, against }, { name: 'checkPassword' }) as Promise<boolean>,
    readLogFile: (path, gzip, signal) =>
      pool.run({ path, gzip }, { name: 'readLogFile', signal }) as Promise<LogReading>,
    async learn(input, onProgress, signal) {
      const { port1, port2 } = new MessageChannel()
      port1.on('message', ({ step, done, total }: { step: string; done: number; total: number }) =>
        onProgress(step, done, total),
      )
      try {
        return (await pool.run(
          { input, progress: port2 },
          { name: 'learnTable', signal, transferList: [port2] },
        )) as LearnResult
      } finally {
        port1.close()
      }
    },
    close: () => pool.destroy(),
  }
}
