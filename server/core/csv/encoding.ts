/** Bytes as text: which encoding a log is in, and UTF-16 as UTF-8 so that the scanner only ever meets one byte a digit. */

/** Bytes as text, one character a byte: enough to look for marks and to find line ends. */
export function latin1(bytes: Uint8Array): string {
  let text = ''
  for (let i = 0; i < bytes.length; i += 8192) text += String.fromCharCode(...bytes.subarray(i, i + 8192))
  return text
}

/** UTF-8 where it is valid, else Latin-1; for header words, not for numbers. */
export function decode(bytes: Uint8Array): string {
  const text = latin1(bytes)
  try {
    return decodeURIComponent(
      text.replace(/[%\u0080-\u00ff]/g, (sign) => `%${sign.charCodeAt(0).toString(16).padStart(2, '0')}`),
    )
  } catch {
    return text
  }
}

export type Encoding = 'bytes' | 'utf-16le' | 'utf-16be'

/** UTF-16 by its byte order mark, or by its zeros: text of digits and English words has one in every pair of bytes. */
export function encodingOf(bytes: Uint8Array): Encoding {
  if (bytes[0] === 0xff && bytes[1] === 0xfe) return 'utf-16le'
  if (bytes[0] === 0xfe && bytes[1] === 0xff) return 'utf-16be'
  const pairs = Math.min(bytes.length >> 1, 200)
  let first = 0
  let second = 0
  for (let i = 0; i < pairs; i += 1) {
    if (bytes[2 * i] === 0) first += 1
    if (bytes[2 * i + 1] === 0) second += 1
  }
  if (pairs >= 4 && second >= 0.9 * pairs && first === 0) return 'utf-16le'
  return pairs >= 4 && first >= 0.9 * pairs && second === 0 ? 'utf-16be' : 'bytes'
}

/**
 * UTF-16 to UTF-8, chunk by chunk: a pair of bytes cut by a chunk's end waits for the next. Signs beyond the basic plane
 * become question marks, which no number and no column's name holds.
 */
export function utf16Reader(littleEndian: boolean): (chunk: Uint8Array) => Uint8Array {
  let waiting = -1
  return (chunk) => {
    const out = new Uint8Array(3 * ((chunk.length >> 1) + 1))
    let at = 0
    for (const byte of chunk) {
      if (waiting < 0) {
        waiting = byte
        continue
      }
      const unit = littleEndian ? (byte << 8) | waiting : (waiting << 8) | byte
      waiting = -1
      if (unit < 0x80) out[at++] = unit
      else if (unit < 0x800) {
        out[at++] = 0xc0 | (unit >> 6)
        out[at++] = 0x80 | (unit & 63)
      } else if (unit >= 0xd800 && unit < 0xe000) out[at++] = 63
      else {
        out[at++] = 0xe0 | (unit >> 12)
        out[at++] = 0x80 | ((unit >> 6) & 63)
        out[at++] = 0x80 | (unit & 63)
      }
    }
    return out.subarray(0, at)
  }
}
