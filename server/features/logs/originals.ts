/** The uploaded file as it came: its fingerprint, and its bytes kept in pieces. */
import { createHash } from 'node:crypto'
import { createReadStream } from 'node:fs'
import { createGzip } from 'node:zlib'
import type { Reader, Tx } from '../../platform/db/client.ts'
import { logOriginals } from '../../platform/db/schema/logs.ts'
import * as store from './store.ts'

/** SHA-256 of a file, hexadecimal. */
export async function sha256Of(path: string): Promise<string> {
  const hash = createHash('sha256')
  for await (const chunk of createReadStream(path)) hash.update(chunk as Uint8Array)
  return hash.digest('hex')
}

const pieceBytes = 1 << 20

/** Keeps the original, gzip, in pieces; never the whole of it in memory. */
export async function keepOriginal(tx: Tx, logId: string, path: string): Promise<void> {
  let piece = 0
  let held: Buffer[] = []
  let size = 0
  const flush = async () => {
    if (size === 0) return
    await tx.insert(logOriginals).values({ logId, piece, data: Buffer.concat(held) })
    piece += 1
    held = []
    size = 0
  }
  for await (const chunk of createReadStream(path).pipe(createGzip({ level: 4 })) as AsyncIterable<Buffer>) {
    held.push(chunk)
    size += chunk.length
    if (size >= pieceBytes) await flush()
  }
  await flush()
}

/** The gzip bytes of the kept original, piece by piece. */
export async function* originalPieces(db: Reader, logId: string): AsyncGenerator<Uint8Array> {
  for (let piece = 0; ; piece += 1) {
    const data = await store.pieceOf(db, logId, piece)
    if (!data) return
    yield data
  }
}
