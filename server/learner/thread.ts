/** What runs off the main thread: password hashing, reading a log, learning. One function per kind of work. */
import { createReadStream } from 'node:fs'
import { createGunzip } from 'node:zlib'
import type { MessagePort } from 'node:worker_threads'
import { compare, hash } from 'bcryptjs'
import { createLogReader, type LogReading } from '../core/csv/read-log.ts'
import { learn, type LearnInput, type LearnResult } from '../core/learn.ts'

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

export function learnTable({ input, progress }: { input: LearnInput; progress: MessagePort }): LearnResult {
  const result = learn(input, (step, done, total) => progress.postMessage({ step, done, total }))
  progress.close()
  return result
}
