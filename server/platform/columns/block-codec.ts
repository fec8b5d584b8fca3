/**
 * A block of samples as bytes that PostgreSQL's lz4 packs well. Logged channels are decimals: where every reading is
 * one of few decimal places, their zigzag differences go as four byte planes beside a bitmap of missing readings; else
 * the floats' own bytes are shuffled into planes. Lossless to the bit in both.
 */

const decimalKind = 1
const floatKind = 2
const doubleKind = 3
const mostDecimals = 6
const headBytes = 6

/** Fewest decimal places that give every reading back exactly, or -1. */
function decimalsOf(values: Float32Array): number {
  for (let places = 0; places <= mostDecimals; places += 1) {
    const power = 10 ** places
    let holds = true
    for (let i = 0; i < values.length && holds; i += 1) {
      const value = values[i]!
      if (Number.isNaN(value)) continue
      const scaled = Math.round(value * power)
      // Integers know no negative zero.
      holds = !Object.is(value, -0) && Math.abs(scaled) < 1_000_000_000 && Object.is(Math.fround(scaled / power), value)
    }
    if (holds) return places
  }
  return -1
}

function head(kind: number, places: number, count: number, bytes: number): Uint8Array {
  const out = new Uint8Array(headBytes + bytes)
  const view = new DataView(out.buffer)
  view.setUint8(0, kind)
  view.setUint8(1, places)
  view.setUint32(2, count, true)
  return out
}

/** Byte b of every element together: planes of equal significance pack better than the elements. */
function shuffle(kind: number, values: Float32Array | Float64Array): Uint8Array {
  const width = values.BYTES_PER_ELEMENT
  const source = new Uint8Array(values.buffer, values.byteOffset, values.byteLength)
  const out = head(kind, 0, values.length, values.byteLength)
  for (let i = 0; i < values.length; i += 1) {
    for (let b = 0; b < width; b += 1) out[headBytes + b * values.length + i] = source[i * width + b]!
  }
  return out
}

export function encodeBlock(values: Float32Array | Float64Array): Uint8Array {
  if (values instanceof Float64Array) return shuffle(doubleKind, values)
  const places = decimalsOf(values)
  if (places < 0) return shuffle(floatKind, values)
  const n = values.length
  const power = 10 ** places
  const bitmap = Math.ceil(n / 8)
  const out = head(decimalKind, places, n, bitmap + 4 * n)
  let before = 0
  for (let i = 0; i < n; i += 1) {
    const value = values[i]!
    let difference = 0
    if (!Number.isNaN(value)) {
      out[headBytes + (i >> 3)]! |= 1 << (i & 7)
      const scaled = Math.round(value * power)
      difference = scaled - before
      before = scaled
    }
    const zigzag = difference >= 0 ? difference * 2 : -difference * 2 - 1
    for (let b = 0; b < 4; b += 1) out[headBytes + bitmap + b * n + i] = (zigzag / 2 ** (8 * b)) & 255
  }
  return out
}

/** @throws RangeError for bytes that no encoder here wrote. */
export function decodeBlock(bytes: Uint8Array): Float32Array | Float64Array {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength)
  const kind = view.getUint8(0)
  const places = view.getUint8(1)
  const n = view.getUint32(2, true)
  if (kind === decimalKind) return decodeDecimals(bytes, places, n)
  if (kind !== floatKind && kind !== doubleKind) throw new RangeError(`unknown kind of block: ${kind}`)
  const values = kind === floatKind ? new Float32Array(n) : new Float64Array(n)
  const target = new Uint8Array(values.buffer)
  const width = values.BYTES_PER_ELEMENT
  for (let i = 0; i < n; i += 1)
    for (let b = 0; b < width; b += 1) target[i * width + b] = bytes[headBytes + b * n + i]!
  return values
}

function decodeDecimals(bytes: Uint8Array, places: number, n: number): Float32Array {
  const values = new Float32Array(n)
  const power = 10 ** places
  const planes = headBytes + Math.ceil(n / 8)
  let before = 0
  for (let i = 0; i < n; i += 1) {
    if ((bytes[headBytes + (i >> 3)]! & (1 << (i & 7))) === 0) {
      values[i] = Number.NaN
      continue
    }
    let zigzag = 0
    for (let b = 3; b >= 0; b -= 1) zigzag = zigzag * 256 + bytes[planes + b * n + i]!
    before += zigzag % 2 === 0 ? zigzag / 2 : -(zigzag + 1) / 2
    values[i] = before / power
  }
  return values
}
