/** The font inside a WOFF file, against the checksums that OpenType demands of every table. */
import { readFileSync } from 'node:fs'
import { createRequire } from 'node:module'
import { expect, test } from 'vitest'
import { fontInWoff } from '../../../server/features/exports/woff.ts'

const file = createRequire(import.meta.url).resolve(
  '@fontsource/source-sans-3/files/source-sans-3-latin-400-normal.woff',
)

/** Sum of the table's 32-bit words, big-endian (OpenType 1.9, "Calculating checksums"). */
function sumOf(table: Buffer): number {
  const words = Buffer.concat([table, Buffer.alloc(3)])
  let sum = 0
  for (let at = 0; at + 4 <= words.length && at < table.length; at += 4) sum = (sum + words.readUInt32BE(at)) >>> 0
  return sum
}

test('every table stands where the directory says and has its checksum', () => {
  const font = fontInWoff(readFileSync(file))
  const count = font.readUInt16BE(4)
  expect(count).toBeGreaterThan(8)
  for (let i = 0; i < count; i += 1) {
    const at = 12 + 16 * i
    const tag = font.toString('latin1', at, at + 4)
    const [checksum, offset, length] = [4, 8, 12].map((field) => font.readUInt32BE(at + field)) as [
      number,
      number,
      number,
    ]
    const table = Buffer.from(font.subarray(offset, offset + length))
    // The head table's own field for the whole file's sum counts as zero.
    if (tag === 'head') table.writeUInt32BE(0, 8)
    expect(sumOf(table), tag).toBe(checksum)
  }
})

test('what is no WOFF file is refused', () => {
  expect(() => fontInWoff(Buffer.from('OTTO and more'))).toThrow(/no WOFF/)
})
