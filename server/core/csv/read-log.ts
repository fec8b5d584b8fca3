/** The door of the log reader: chunks of bytes in, columns of numbers and counted faults out. */
import { recogniseName } from '../channels/names.ts'
import { encodingOf, utf16Reader } from './encoding.ts'
import { readHead, type Dialect, type Refusal } from './head.ts'
import { emptyBody, endOfLastLine, scanLines, type Body } from './scan.ts'

export interface Fault {
  readonly kind: 'ragged row' | 'unreadable field' | 'cut last line'
  count: number
  readonly examples: { line: number; text: string }[]
}

export interface LogColumns {
  readonly ok: true
  readonly header: readonly string[]
  readonly units: readonly string[]
  readonly rows: number
  /** One per header, `rows` long. Missing is NaN. Time columns are double precision. */
  readonly columns: readonly (Float32Array | Float64Array)[]
  readonly faults: readonly Fault[]
}

export type LogReading = LogColumns | Refusal

export interface LogReader {
  /** Takes the next bytes. A refusal means: stop, this is no log. */
  readonly push: (chunk: Uint8Array) => Refusal | null
  readonly end: () => LogReading
}

const headBytes = 65_536
const sniffBytes = 400
const exampleCount = 5

function joined(a: Uint8Array, b: Uint8Array): Uint8Array {
  const both = new Uint8Array(a.length + b.length)
  both.set(a)
  both.set(b, a.length)
  return both
}

/** Bytes of the lines before the numbers. */
function offsetOfLine(bytes: Uint8Array, lines: number): number {
  let at = 0
  for (let seen = 0; seen < lines && at < bytes.length; at += 1) {
    if (bytes[at] === 10 || (bytes[at] === 13 && bytes[at + 1] !== 10)) seen += 1
  }
  return at
}

type Note = (kind: Fault['kind'], line: number, text: string) => void

/** Counts faults by kind and keeps the first few of each as examples. */
function faultBook(): { note: Note; take: (kind: Fault['kind'], line: number) => void; all: () => Fault[] } {
  const faults = new Map<Fault['kind'], Fault>()
  return {
    note(kind, line, text) {
      const fault = faults.get(kind) ?? { kind, count: 0, examples: [] }
      fault.count += 1
      if (fault.examples.length < exampleCount) fault.examples.push({ line, text })
      faults.set(kind, fault)
    },
    take(kind, line) {
      const fault = faults.get(kind)
      if (!fault) return
      fault.count -= 1
      if (fault.examples.at(-1)?.line === line) fault.examples.pop()
      if (fault.count === 0) faults.delete(kind)
    },
    all: () => [...faults.values()],
  }
}

/**
 * Streams a log in: UTF-8, Latin-1 or UTF-16, any of four marks between fields, either decimal mark. Memory is that of
 * the columns and one chunk. Quoted fields may not span lines.
 */
export function createLogReader(): LogReader {
  const faults = faultBook()
  let toBytes: ((chunk: Uint8Array) => Uint8Array) | null = null
  let pending: Uint8Array = new Uint8Array(0)
  let dialect: Dialect | null = null
  let body: Body = emptyBody([], [])
  let line = 1
  let lastShort = 0

  const scan = (bytes: Uint8Array) => {
    if (!dialect) return
    const marks = { ...dialect, delimiter: dialect.delimiter.charCodeAt(0) }
    const width = body.columns.length
    line += scanLines(bytes, body, marks, line, {
      ragged(at, fields) {
        if (fields < width) lastShort = at
        faults.note('ragged row', at, `${fields} fields where the header has ${width}`)
      },
      unreadable: (at, text) => faults.note('unreadable field', at, text),
    })
  }

  const begin = (whole: boolean): Refusal | null => {
    const head = readHead(pending.subarray(0, headBytes), whole && pending.length <= headBytes)
    if ('ok' in head) return head
    dialect = head
    body = emptyBody(
      head.header.map((name) => recogniseName(name) === 'time'),
      head.words,
    )
    pending = pending.subarray(offsetOfLine(pending, head.skipLines))
    line = head.skipLines + 1
    return null
  }

  const take = (chunk: Uint8Array): Uint8Array => {
    if (!toBytes) {
      // The first bytes tell the encoding; fewer than a handful wait.
      const start = joined(pending, chunk)
      if (start.length < sniffBytes) {
        pending = start
        return new Uint8Array(0)
      }
      pending = new Uint8Array(0)
      return decided(start)
    }
    return toBytes(chunk)
  }
  const decided = (start: Uint8Array): Uint8Array => {
    const encoding = encodingOf(start)
    toBytes = encoding === 'bytes' ? (chunk) => chunk : utf16Reader(encoding === 'utf-16le')
    return toBytes(start)
  }

  return {
    push(chunk) {
      const bytes = take(chunk)
      if (!toBytes) return null
      pending = pending.length === 0 ? bytes : joined(pending, bytes)
      if (!dialect) {
        if (pending.length < headBytes) return null
        const refusal = begin(false)
        if (refusal) return refusal
      }
      const end = endOfLastLine(pending)
      scan(pending.subarray(0, end))
      pending = pending.slice(end)
      return null
    },
    end() {
      if (!toBytes) pending = decided(pending)
      if (!dialect) {
        const refusal = begin(true)
        if (refusal) return refusal
      }
      const cut = pending.length > 0 && endOfLastLine(pending) < pending.length
      scan(pending)
      // A last line without its end and with too few fields was cut off by the logger: it is left out.
      if (cut && lastShort === line - 1) {
        body.rows -= 1
        faults.take('ragged row', lastShort)
        faults.note('cut last line', lastShort, 'the file ends in the middle of a line')
      }
      const { rows } = body
      if (rows === 0) return { ok: false, reason: 'no-rows', detail: 'The file has a header and no row of numbers.' }
      return {
        ok: true,
        header: dialect!.header,
        units: dialect!.units,
        rows,
        columns: body.columns.map((column) => column.slice(0, rows)),
        faults: faults.all(),
      }
    },
  }
}
