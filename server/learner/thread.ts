/** What runs off the main thread: password hashing, reading a log, learning. One function per kind of work. */
import { createReadStream } from 'node:fs'
import { createGunzip } from 'node:zlib'
import type { MessagePort } from 'node:worker_threads'
import { compare, hash } from 'bcryptjs'
import { createLogReader, type LogReading } from '../core/csv/read-log.ts'
import { serialize, deserialize } from 'node:v8'
import type { Grid } from '../../shared/grid.ts'
import { cellSamples, type CellSample } from '../core/cell-samples.ts'
import type { Drive, EngineFacts } from '../core/drive.ts'
import type { LearnRefusal } from '../core/evidence/refuse.ts'
import { inspect, type InspectionInput } from '../core/findings/inspect.ts'
import { priorParts } from '../core/fit/prior.ts'
import { learnFrom, type Ground, type LearnResult } from '../core/learn.ts'
import { relinearise, rememberLog, type LogMemory } from '../core/log-memory.ts'
import type { MixturePath } from '../core/model/path.ts'
import { replay, type Replay, type ReplayInput } from '../core/replay.ts'

/** 2^12 rounds: under a second on an ordinary machine, as OWASP's password storage page asks. */
const bcryptCost = 12

export const hashPassword = ({ password }: { password: string }): Promise<string> => hash(password, bcryptCost)

export const checkPassword = ({ password, against }: { password: string; against: string }): Promise<boolean> =>
  compare(password, against)

/** Reads a kept original (gzip) or an upload, streaming; memory is that of the columns. */
export async function readLogFile({ path, gzip }: { path: string; gzip: boolean }): Promise<LogReading> {
  const reader = createLogReader()
  const file = createReadStream(path, { highWaterMark: 1 << 20 })
  const stream = gzip ? file.pipe(createGunzip({ chunkSize: 1 << 20 })) : file
  for await (const chunk of stream as AsyncIterable<Uint8Array>) {
    const refusal = reader.push(chunk)
    if (refusal) return refusal
  }
  return reader.end()
}

/** What is remembered of a log travels and rests as bytes: only the threads look inside. */
const pack = (memory: LogMemory): Uint8Array => serialize(memory)
const unpack = (bytes: Uint8Array): LogMemory => deserialize(bytes) as LogMemory

export interface LogGround {
  readonly drive: Drive
  readonly engine: EngineFacts
  readonly grid: Grid
}
export type PackedMemory = { readonly ok: true; readonly memory: Uint8Array } | LearnRefusal

export function rememberDrive(input: LogGround & { progress: MessagePort }): PackedMemory {
  const { drive, engine, grid, progress } = input
  try {
    const found = rememberLog(drive, engine, grid, priorParts(grid), (done, total) =>
      progress.postMessage({ done, total }),
    )
    return found.ok ? { ok: true, memory: pack(found.memory) } : found
  } finally {
    progress.close()
  }
}

export const relineariseDrive = ({
  memory,
  drive,
  engine,
  grid,
  x,
}: LogGround & { memory: Uint8Array; x: Float64Array }): Uint8Array =>
  pack(relinearise(unpack(memory), drive, engine, grid, x))

export const addUpLogs = ({ memories, ground }: { memories: readonly Uint8Array[]; ground: Ground }): LearnResult =>
  learnFrom(memories.map(unpack), ground, priorParts(ground.grid))

export const replayDrive = (input: ReplayInput): Replay => replay(input)

export const samplesOfCell = (
  input: LogGround & { fitted: Float64Array; path: MixturePath; cell: number; most: number },
): CellSample[] => cellSamples(input.drive, input.engine, input.grid, input.fitted, input.path, input.cell, input.most)

export const inspectLog = (input: InspectionInput) => inspect(input)
