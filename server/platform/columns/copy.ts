/** PostgreSQL's binary COPY: the fastest way in and out for blocks of bytes, without quoting and without hex. */
import { pipeline } from 'node:stream/promises'
import { Readable } from 'node:stream'
import type pg from 'pg'
import { from as copyFrom, to as copyTo } from 'pg-copy-streams'

/** A field of a row: bytes as they are, or a 32-bit integer. Text and uuid are bytes. */
export type CopyField = Uint8Array | number

const signature = Buffer.from('PGCOPY\n\xff\r\n\0\0\0\0\0\0\0\0\0', 'latin1')
const trailer = Buffer.from([0xff, 0xff])

function rowBytes(fields: readonly CopyField[]): Buffer {
  const parts: Buffer[] = []
  const count = Buffer.alloc(2)
  count.writeInt16BE(fields.length)
  parts.push(count)
  for (const field of fields) {
    const bytes =
      typeof field === 'number' ? Buffer.alloc(4) : Buffer.from(field.buffer, field.byteOffset, field.byteLength)
    if (typeof field === 'number') bytes.writeInt32BE(field)
    const length = Buffer.alloc(4)
    length.writeInt32BE(bytes.length)
    parts.push(length, bytes)
  }
  return Buffer.concat(parts)
}

/** @param target  table and columns, such as `log_blocks (log_id, block)`; never from outside. */
export async function copyIn(
  client: pg.PoolClient,
  target: string,
  rows: Iterable<readonly CopyField[]>,
): Promise<void> {
  function* stream() {
    yield signature
    for (const row of rows) yield rowBytes(row)
    yield trailer
  }
  await pipeline(Readable.from(stream()), client.query(copyFrom(`copy ${target} from stdin (format binary)`)))
}

/** @param query  a select whose values were checked by the caller: COPY takes no parameters. */
export async function copyOut(client: pg.PoolClient, query: string): Promise<Buffer[][]> {
  const chunks: Buffer[] = []
  for await (const chunk of client.query(copyTo(`copy (${query}) to stdout (format binary)`)))
    chunks.push(chunk as Buffer)
  const all = Buffer.concat(chunks)
  const rows: Buffer[][] = []
  let at = signature.length
  for (let count = all.readInt16BE(at); count >= 0; count = all.readInt16BE(at)) {
    at += 2
    const row: Buffer[] = []
    for (let i = 0; i < count; i += 1) {
      const length = all.readInt32BE(at)
      at += 4
      row.push(length < 0 ? Buffer.alloc(0) : all.subarray(at, at + length))
      at += Math.max(0, length)
    }
    rows.push(row)
  }
  return rows
}

export const uuidBytes = (id: string): Uint8Array => Buffer.from(id.replaceAll('-', ''), 'hex')
export const textBytes = (text: string): Uint8Array => Buffer.from(text, 'utf8')
