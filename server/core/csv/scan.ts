/** The body of a log: bytes to columns of numbers without making strings, except where a field is no plain number. */
import { missing, slowNumber } from './field.ts'

const LF = 10
const CR = 13
const SPACE = 32
const QUOTE = 34
const PLUS = 43
const MINUS = 45
const COMMA = 44
const POINT = 46
const ZERO = 48
const NINE = 57

const powersOfTen = Float64Array.from({ length: 23 }, (_, i) => Number(`1e${i}`))

export interface ScanFaults {
  /** Called with the 1-based line number of the file and a short piece of the text. */
  readonly ragged: (line: number, fields: number) => void
  readonly unreadable: (line: number, text: string) => void
}

/** Columns that grow together by doubling; time keeps all its digits, channels are single precision. */
export interface Body {
  readonly columns: (Float32Array | Float64Array)[]
  /** Columns of words: they hold nothing and are no fault. */
  readonly words: readonly boolean[]
  rows: number
  room: number
}

export interface Marks {
  /** Byte that parts the fields. */
  readonly delimiter: number
  readonly decimalComma: boolean
  /** Whether a comma met on the slow path may be the decimal mark. */
  readonly commaToo: boolean
}

const firstRoom = 4096

export const emptyBody = (wide: readonly boolean[], words: readonly boolean[]): Body => ({
  columns: wide.map((each) => (each ? new Float64Array(firstRoom) : new Float32Array(firstRoom))),
  words,
  rows: 0,
  room: firstRoom,
})

function growInPlace(body: Body): void {
  body.room *= 2
  body.columns.forEach((column, i) => {
    const grown = column instanceof Float64Array ? new Float64Array(body.room) : new Float32Array(body.room)
    grown.set(column)
    body.columns[i] = grown
  })
}

/**
 * Scans the bytes of whole lines. A plain number of up to 15 digits is mantissa divided by a power of ten, both exact in
 * double precision, so the quotient is the correctly rounded value that `Number` gives. O(bytes).
 * @param bytes     Whole lines; the last may lack its line end. A quoted field ends with its line at the latest.
 * @param body      Each column grows by one value a line. Mutated.
 * @param firstLine 1-based number of the first line, for faults.
 * @returns how many lines there were, blank ones included.
 */
export function scanLines(bytes: Uint8Array, body: Body, marks: Marks, firstLine: number, faults: ScanFaults): number {
  const width = body.columns.length
  const { delimiter } = marks
  const decimal = marks.decimalComma ? COMMA : POINT
  const { columns } = body
  const end = bytes.length
  let at = 0
  let line = firstLine
  while (at < end) {
    if (bytes[at] === LF || bytes[at] === CR) {
      at += bytes[at] === CR && bytes[at + 1] === LF ? 2 : 1
      line += 1
      continue
    }
    if (body.rows === body.room) growInPlace(body)
    const { rows } = body
    let field = 0
    let start = at
    for (;;) {
      start = at
      let byte = bytes[at]!
      while (byte === SPACE) {
        at += 1
        byte = bytes[at]!
      }
      const negative = byte === MINUS
      if (negative || byte === PLUS) {
        at += 1
        byte = bytes[at]!
      }
      let mantissa = 0
      const digitsFrom = at
      while (byte >= ZERO && byte <= NINE) {
        mantissa = mantissa * 10 + (byte - ZERO)
        at += 1
        byte = bytes[at]!
      }
      let digits = at - digitsFrom
      let decimals = 0
      if (byte === decimal) {
        at += 1
        byte = bytes[at]!
        const decimalsFrom = at
        while (byte >= ZERO && byte <= NINE) {
          mantissa = mantissa * 10 + (byte - ZERO)
          at += 1
          byte = bytes[at]!
        }
        decimals = at - decimalsFrom
        digits += decimals
      }
      if (digits > 0 && digits <= 15 && (at >= end || byte === delimiter || byte === LF || byte === CR)) {
        if (field < width) {
          const value = decimals > 0 ? mantissa / powersOfTen[decimals]! : mantissa
          columns[field]![rows] = negative ? -value : value
        }
      } else {
        at = endOfField(bytes, start, delimiter)
        if (field < width) columns[field]![rows] = slowField(bytes, start, at, field, line, body, marks, faults)
      }
      field += 1
      if (at < end && bytes[at] === delimiter) {
        at += 1
        continue
      }
      break
    }
    // A mark after the last field, which many loggers write, opens no field.
    const fields = field === width + 1 && start === at ? width : field
    if (at < end) at += bytes[at] === CR && bytes[at + 1] === LF ? 2 : 1
    if (fields !== width) {
      faults.ragged(line, fields)
      for (let i = fields; i < width; i += 1) columns[i]![rows] = Number.NaN
    }
    body.rows += 1
    line += 1
  }
  return line - firstLine
}

/**
 * Index of the mark or line end behind the field. A quote that opens the field hides marks until it is closed, a doubled
 * one inside is text; one that is never closed hides nothing, so that it cannot swallow its neighbours.
 */
function endOfField(bytes: Uint8Array, start: number, delimiter: number): number {
  let at = start
  while (bytes[at] === SPACE) at += 1
  if (bytes[at] === QUOTE) {
    const open = at
    for (at += 1; at < bytes.length && bytes[at] !== LF && bytes[at] !== CR; at += 1) {
      if (bytes[at] !== QUOTE) continue
      if (bytes[at + 1] !== QUOTE) break
      at += 1
    }
    if (bytes[at] !== QUOTE) at = open
  }
  while (at < bytes.length && bytes[at] !== delimiter && bytes[at] !== LF && bytes[at] !== CR) at += 1
  return at
}

function slowField(
  bytes: Uint8Array,
  start: number,
  end: number,
  field: number,
  line: number,
  body: Body,
  marks: Marks,
  faults: ScanFaults,
): number {
  if (end === start || body.words[field]) return Number.NaN
  let text = ''
  for (let i = start; i < end && i < start + 200; i += 1) text += String.fromCharCode(bytes[i]!)
  const value = slowNumber(text, marks.decimalComma || marks.commaToo)
  if (Number.isNaN(value) && !missing.test(text.replaceAll('"', '').trim()))
    faults.unreadable(line, text.trim().slice(0, 40))
  return value
}

/** Index just past the last line end in the bytes, or 0. */
export function endOfLastLine(bytes: Uint8Array): number {
  for (let i = bytes.length - 1; i >= 0; i -= 1)
    if (bytes[i] === LF || (bytes[i] === CR && i < bytes.length - 1)) return i + 1
  return 0
}
