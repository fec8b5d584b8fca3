/** The door to the worker threads. A crash or a cap on memory ends the task, never the process. */
import { MessageChannel } from 'node:worker_threads'
import { Piscina } from 'piscina'
import type { LogReading } from '../core/csv/read-log.ts'
import type { CellSample } from '../core/cell-samples.ts'
import type { InspectionInput } from '../core/findings/inspect.ts'
import type { Inspection } from '../../shared/contract/logs.ts'
import type { Ground, LearnResult } from '../core/learn.ts'
import type { MixturePath } from '../core/model/path.ts'
import type { Replay, ReplayInput } from '../core/replay.ts'
import type { LogGround, PackedMemory } from './thread.ts'

export interface Crunch {
  readonly hashPassword: (password: string) => Promise<string>
  readonly checkPassword: (password: string, against: string) => Promise<boolean>
  readonly readLogFile: (path: string, gzip: boolean, signal: AbortSignal) => Promise<LogReading>
  /** Learns one log by itself; the answer rests in the database until logs are added up. */
  readonly rememberDrive: (
    input: LogGround,
    onProgress: (done: number, total: number) => void,
    signal: AbortSignal,
  ) => Promise<PackedMemory>
  /** Takes a log's form again at another surface. @param input.x ln VE. */
  readonly relineariseDrive: (input: LogGround & { memory: Uint8Array; x: Float64Array }) => Promise<Uint8Array>
  readonly addUpLogs: (memories: readonly Uint8Array[], ground: Ground) => Promise<LearnResult>
  readonly replayDrive: (input: ReplayInput) => Promise<Replay>
  readonly samplesOfCell: (
    input: LogGround & { fitted: Float64Array; path: MixturePath; cell: number; most: number },
  ) => Promise<CellSample[]>
  /** Looks over a whole log for what the engine and its sensors did wrong. */
  readonly inspectLog: (input: InspectionInput) => Promise<Inspection>
  readonly close: () => Promise<void>
}

export function openCrunch(): Crunch {
  const pool = new Piscina({
    filename: new URL('./thread-entry.mjs', import.meta.url).href,
    // One stays: a log switched on or off must not wait for a thread to start.
    minThreads: 1,
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
    async rememberDrive(input, onProgress, signal) {
      const { port1, port2 } = new MessageChannel()
      port1.on('message', ({ done, total }: { done: number; total: number }) => onProgress(done, total))
      try {
        return (await pool.run(
          { ...input, progress: port2 },
          { name: 'rememberDrive', signal, transferList: [port2] },
        )) as PackedMemory
      } finally {
        port1.close()
      }
    },
    relineariseDrive: (input) => pool.run(input, { name: 'relineariseDrive' }) as Promise<Uint8Array>,
    addUpLogs: (memories, ground) => pool.run({ memories, ground }, { name: 'addUpLogs' }) as Promise<LearnResult>,
    replayDrive: (input) => pool.run(input, { name: 'replayDrive' }) as Promise<Replay>,
    samplesOfCell: (input) => pool.run(input, { name: 'samplesOfCell' }) as Promise<CellSample[]>,
    inspectLog: (input) => pool.run(input, { name: 'inspectLog' }) as Promise<Inspection>,
    close: () => pool.destroy(),
  }
}
