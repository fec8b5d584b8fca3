/** WOFF 1.0 unpacked to the plain font inside it, once a process: the PDF writer would inflate it anew for every document. */
import { inflateSync } from 'node:zlib'

const headerBytes = 44
const entryBytes = 20
const recordBytes = 16
const padded = (length: number): number => (length + 3) & ~3

/**
 * The TrueType file that a WOFF file holds (W3C WOFF File Format 1.0, sections 3 to 5). Tables keep their order and their
 * checksums; each is deflated only where that made it smaller.
 */
export function fontInWoff(woff: Buffer): Buffer {
  if (woff.toString('latin1', 0, 4) !== 'wOFF') throw new TypeError('this is no WOFF 1.0 file')
  const count = woff.readUInt16BE(12)
  const entries = Array.from({ length: count }, (_, i) => {
    const at = headerBytes + i * entryBytes
    const [offset, packed, length] = [4, 8, 12].map((field) => woff.readUInt32BE(at + field)) as [
      number,
      number,
      number,
    ]
    const bytes = woff.subarray(offset, offset + packed)
    const table = packed < length ? inflateSync(bytes, { maxOutputLength: length }) : bytes
    return { tag: woff.subarray(at, at + 4), checksum: woff.readUInt32BE(at + 16), table }
  })
  const power = 2 ** Math.floor(Math.log2(count))
  let end = 12 + count * recordBytes
  const font = Buffer.alloc(end + entries.reduce((sum, { table }) => sum + padded(table.length), 0))
  woff.copy(font, 0, 4, 8)
  font.writeUInt16BE(count, 4)
  font.writeUInt16BE(power * 16, 6)
  font.writeUInt16BE(Math.log2(power), 8)
  font.writeUInt16BE((count - power) * 16, 10)
  entries.forEach(({ tag, checksum, table }, i) => {
    const at = 12 + i * recordBytes
    tag.copy(font, at)
    font.writeUInt32BE(checksum, at + 4)
    font.writeUInt32BE(end, at + 8)
    font.writeUInt32BE(table.length, at + 12)
    table.copy(font, end)
    end += padded(table.length)
  })
  return font
}
