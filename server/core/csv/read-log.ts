/** The door of the log reader: chunks of bytes in, columns of numbers and counted faults out. */
import { recogniseName } from '../channels/names.ts'
import { readHead, type Dialect, type Refusal } from './head.ts'
import { Column, endOfLastLine, scanLines } from './scan.ts'

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

/** Streams a log in; memory is that of the columns and one chunk. Quoted fields may not span lines. */
export function createLogReader(): LogReader {
  const faults = new Map<Fault['kind'], Fault>()
  let pending: Uint8Array = new Uint8Array(0)
  let dialect: Dialect | null = null
  let columns: Column[] = []
  let line = 1

  const note = (kind: Fault['kind'], at: number, text: string) => {
    const fault = faults.get(kind) ?? { kind, count: 0, examples: [] }
    fault.count += 1
    if (fault.examples.length < exampleCount) fault.examples.push({ line: at, text })
    faults.set(kind, fault)
  }

  const scan = (bytes: Uint8Array) => {
    if (!dialect) return
    line += scanLines(bytes, columns, dialect.delimiter.charCodeAt(0), dialect.decimalComma, line, {
      ragged: (at, fields) => note('ragged row', at, `${fields} fields where the header has ${columns.length}`),
      unreadable: (at, text) => note('unreadable field', at, text),
    })
  }

  const begin = (whole: boolean): Refusal | null => {
    const head = readHead(pending.subarray(0, headBytes), whole && pending.length <= headBytes)
    if ('ok' in head) return head
    dialect = head
    columns = head.header.map((name) => new Column(recogniseName(name) === 'time'))
    pending = pending.subarray(offsetOfLine(pending, head.skipLines))
    line = head.skipLines + 1
    return null
  }

  return {
    push(chunk) {
      pending = pending.length === 0 ? chunk : joined(pending, chunk)
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
      if (!dialect) {
        const refusal = begin(true)
        if (refusal) return refusal
      }
      const cut = pending.length > 0 && endOfLastLine(pending) < pending.length
      const before = columns[0]?.length ?? 0
      scan(pending)
      const ragged = faults.get('ragged row')
      // A last line without its end and with too few fields was cut off by the logger: it is left out.
      if (cut && ragged && ragged.examples.at(-1)?.line === line - 1 && (columns[0]?.length ?? 0) > before) {
        for (const column of columns) column.length -= 1
        note('cut last line', line - 1, 'the file ends in the middle of a line')
      }
      const rows = columns[0]?.length ?? 0
      if (rows === 0) return { ok: false, reason: 'no-rows', detail: 'The file has a header and no row of numbers.' }
      return {
        ok: true,
        header: dialect!.header,
        units: dialect!.units,
        rows,
        columns: columns.map((column) => column.values.slice(0, rows)),
        faults: [...faults.values()],
      }
    },
  }
}
