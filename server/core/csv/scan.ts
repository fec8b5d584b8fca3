/** The body of a log: bytes to columns of numbers without making strings, except where a field is no plain number. */

const LF = 10
const CR = 13
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

/** A column that grows by doubling; time keeps all its digits, channels are single precision. */
export class Column {
  values: Float32Array | Float64Array
  length = 0
  constructor(wide: boolean) {
    this.values = wide ? new Float64Array(4096) : new Float32Array(4096)
  }
  push(value: number): void {
    if (this.length === this.values.length) {
      const grown =
        this.values instanceof Float64Array ? new Float64Array(this.length * 2) : new Float32Array(this.length * 2)
      grown.set(this.values)
      this.values = grown
    }
    this.values[this.length] = value
    this.length += 1
  }
}

const missing = /^(|-+|nan|n\/?a|null|none|inf(inity)?|\?)$/i

/** A field that is no plain number: blank, text, quoted, unit behind it, clock time. NaN where it says nothing. */
export function slowNumber(text: string, decimalComma: boolean): number {
  let field = text.trim()
  if (field.startsWith('"') && field.endsWith('"')) field = field.slice(1, -1).replaceAll('""', '"').trim()
  if (decimalComma) field = field.replace(',', '.')
  if (missing.test(field)) return Number.NaN
  const plain = Number(field)
  if (!Number.isNaN(plain)) return plain
  const clock = /^(\d+):(\d{1,2})(?::(\d{1,2}(?:\.\d+)?))?$/.exec(field)
  if (clock) {
    const [first, second, third] = [Number(clock[1]), Number(clock[2]), clock[3]]
    return third === undefined ? first * 60 + second : first * 3600 + second * 60 + Number(third)
  }
  const suffixed = /^([+-]?\d+(?:\.\d+)?)\s*[^\d\s][^\d]*$/.exec(field)
  return suffixed ? Number(suffixed[1]) : Number.NaN
}

/**
 * Scans the bytes of whole lines. A plain number of up to 15 digits is mantissa divided by a power of ten, both exact in
 * double precision, so the quotient is the correctly rounded value that `Number` gives. O(bytes).
 * @param bytes     Whole lines; the last may lack its line end.
 * @param columns   One for each column of the header; each grows by one value a line. Mutated.
 * @param firstLine 1-based number of the first line, for faults.
 * @returns how many lines there were, blank ones included.
 */
export function scanLines(
  bytes: Uint8Array,
  columns: readonly Column[],
  delimiter: number,
  decimalComma: boolean,
  firstLine: number,
  faults: ScanFaults,
): number {
  const width = columns.length
  const decimal = decimalComma ? COMMA : POINT
  const end = bytes.length
  let at = 0
  let line = firstLine
  while (at < end) {
    if (bytes[at] === LF || bytes[at] === CR) {
      at += bytes[at] === CR && bytes[at + 1] === LF ? 2 : 1
      line += 1
      continue
    }
    let field = 0
    for (;;) {
      const start = at
      let negative = false
      let mantissa = 0
      let digits = 0
      let decimals = -1
      let plain = true
      if (bytes[at] === MINUS) {
        negative = true
        at += 1
      } else if (bytes[at] === PLUS) at += 1
      for (; at < end; at += 1) {
        const byte = bytes[at]!
        if (byte >= ZERO && byte <= NINE) {
          mantissa = mantissa * 10 + (byte - ZERO)
          digits += 1
          if (decimals >= 0) decimals += 1
        } else if (byte === delimiter || byte === LF || byte === CR) break
        else if (byte === decimal && decimals < 0) decimals = 0
        else if (byte === QUOTE && at === start) {
          plain = false
          at = endOfQuoted(bytes, at)
          break
        } else plain = false
      }
      if (field < width) {
        if (plain && digits > 0 && digits <= 15) {
          const value = decimals > 0 ? mantissa / powersOfTen[decimals]! : mantissa
          columns[field]!.push(negative ? -value : value)
        } else columns[field]!.push(slowField(bytes, start, at, decimalComma, line, faults))
      }
      field += 1
      const byte = bytes[at]
      if (at < end && byte === delimiter) {
        at += 1
        continue
      }
      if (at < end) at += byte === CR && bytes[at + 1] === LF ? 2 : 1
      break
    }
    if (field !== width) {
      faults.ragged(line, field)
      for (let i = field; i < width; i += 1) columns[i]!.push(Number.NaN)
    }
    line += 1
  }
  return line - firstLine
}

/** Index just past the closing quote; a doubled quote inside is text. */
function endOfQuoted(bytes: Uint8Array, open: number): number {
  let at = open + 1
  while (at < bytes.length) {
    if (bytes[at] === QUOTE) {
      if (bytes[at + 1] !== QUOTE) return at + 1
      at += 1
    }
    at += 1
  }
  return at
}

function slowField(
  bytes: Uint8Array,
  start: number,
  end: number,
  comma: boolean,
  line: number,
  faults: ScanFaults,
): number {
  if (end === start) return Number.NaN
  let text = ''
  for (let i = start; i < end && i < start + 200; i += 1) text += String.fromCharCode(bytes[i]!)
  const value = slowNumber(text, comma)
  if (Number.isNaN(value) && !missing.test(text.trim())) faults.unreadable(line, text.trim().slice(0, 40))
  return value
}

/** Index just past the last line end in the bytes, or 0. */
export function endOfLastLine(bytes: Uint8Array): number {
  for (let i = bytes.length - 1; i >= 0; i -= 1)
    if (bytes[i] === LF || (bytes[i] === CR && i < bytes.length - 1)) return i + 1
  return 0
}
