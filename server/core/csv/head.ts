/** What the first 64 KB of a log tell: is it a log at all, its dialect, its header and units, where its numbers begin. */
import Papa from 'papaparse'
import { recogniseName } from '../channels/names.ts'
import { decode, latin1 } from './encoding.ts'
import { isNumeric, missing } from './field.ts'
import { endOfLastLine } from './scan.ts'

export interface Dialect {
  readonly delimiter: string
  /** Decimal comma: only where the delimiter is something else. */
  readonly decimalComma: boolean
  /** The head shows no decimal point either, so a comma further down may still be the decimal mark. */
  readonly commaToo: boolean
  readonly header: readonly string[]
  readonly units: readonly string[]
  /** Columns that hold words, such as a gear's letter. */
  readonly words: readonly boolean[]
  /** Lines before the first row of numbers, header and units row included. */
  readonly skipLines: number
}

export interface Refusal {
  readonly ok: false
  readonly reason: 'empty' | 'not-text' | 'not-a-table' | 'no-rows'
  readonly detail: string
}

const refuse = (reason: Refusal['reason'], detail: string): Refusal => ({ ok: false, reason, detail })

const starts: readonly [string, string][] = [
  ['%PDF', 'a PDF document'],
  ['\u0089PNG', 'a picture'],
  ['ÿØÿ', 'a picture'],
  ['GIF8', 'a picture'],
  ['PK\u0003\u0004', 'a ZIP archive or a spreadsheet file; save the sheet as CSV first'],
  ['\u001f\u008b', 'a gzip archive; unpack it first'],
]

/** "MAP (kPa)" or "clt_F" -> name and unit. */
export function splitUnit(title: string): { name: string; unit: string } {
  const bracket = /^(.*?)\s*[([]\s*([^)\]]*)\s*[)\]]\s*$/.exec(title)
  return bracket ? { name: bracket[1]!.trim(), unit: bracket[2]!.trim() } : { name: title.trim(), unit: '' }
}

/** Bytes that no text holds: control characters other than tab, line ends and the page marks of old printers. */
const isControl = (byte: number): boolean => byte < 32 && (byte < 9 || byte > 13) && byte !== 27

function refuseBytes(bytes: Uint8Array): Refusal | null {
  if (bytes.every((byte) => byte <= 32 && !isControl(byte))) return refuse('empty', 'The file is empty.')
  const raw = latin1(bytes)
  const known = starts.find(([mark]) => raw.startsWith(mark))
  if (known) return refuse('not-text', `This is ${known[1]}, not a log in CSV form.`)
  if (/^(ï»¿)?\s*<(!doctype|html|head|body|table|script|\?xml)/i.test(raw))
    return refuse('not-text', 'This is a web page, not a log in CSV form.')
  if (bytes.some(isControl))
    return refuse('not-text', 'The file holds bytes that are not text. Save the log as CSV, in UTF-8.')
  return null
}

const delimiters = [';', '\t', '|', ','] as const
const fieldsOf = (line: string, delimiter: string): string[] => Papa.parse<string[]>(line, { delimiter }).data[0] ?? []

interface Start {
  readonly delimiter: string
  readonly first: number
  readonly titles: readonly string[]
  readonly units: readonly string[]
  readonly share: number
}

/** The line as the first of the body, read with this mark: numbers, below a line of as many titles without any. */
function startAt(lines: readonly string[], first: number, above: readonly number[], delimiter: string): Start | null {
  if (!lines[first]!.includes(delimiter)) return null
  const row = fieldsOf(lines[first]!, delimiter)
  const filled = row.filter((field) => !missing.test(field.trim()))
  const numbers = filled.filter(isNumeric).length
  // A lone number beside words is a remark such as "Rate;100"; alone among blanks it is a first row before sensors wake.
  if (numbers === 0 || (numbers === 1 && filled.length > 1) || numbers / filled.length < 0.3) return null
  const width = row.at(-1)!.trim() === '' ? row.length - 1 : row.length
  const [near, far] = above.map((line) => fieldsOf(lines[line]!, delimiter))
  const titled = (fields: readonly string[] | undefined): fields is string[] =>
    fields !== undefined && fields.length >= 2 && Math.abs(fields.length - width) <= 1 && !fields.some(isTitleNumber)
  if (!titled(near)) return null
  const share = numbers / filled.length
  return titled(far) && isUnitsRow(near, far)
    ? { delimiter, first, titles: far, units: near, share }
    : { delimiter, first, titles: near, units: [], share }
}

/** "1" stands for "no unit" in a units row and "2" may be a cylinder; a title is no measured number. */
const isTitleNumber = (field: string): boolean => /^\s*[+-]?\d+[.,]?\d*\s*$/.test(field) && field.trim() !== '1'

const unitWord =
  /^\W*(s|secs?|seconds?|ms|msec|[µμu]s|min|h|hh?:mm:ss(\.s+)?|rpm|(rev|r|tr|u|umdr)\/min|min-1|1\/min|k?pa|m?bar|hpa|psi|in ?hg|kpa ?\(?(abs|a|g)\)?|psi[ag]|°? ?[cfk]|deg ?[cfk]?|°|%|percent|pct|lambda|λ|afr|phi|:1|v|mv|volts?|km\/h|mph|g\/s|kg\/h|cc|l\/h|hz|n?m|a|1|-|–|none|factor|fraction)\W*$/i

/** Whether the line right above the numbers gives units, and the line above it the titles. */
function isUnitsRow(near: readonly string[], far: readonly string[]): boolean {
  const filled = near.filter((field) => field.trim() !== '')
  const units = filled.filter((field) => unitWord.test(field.trim()) || /^[%°]$/.test(field.trim())).length
  const known = (row: readonly string[]) => row.filter((title) => recogniseName(splitUnit(title).name) !== null).length
  return units > 0 && (units === filled.length || known(far) >= known(near))
}

/** The first line that begins the body in any of the marks; of several marks the one with more numbers, then more fields. */
function findStart(lines: readonly string[]): Start | null {
  const above: number[] = []
  for (let i = 0; i < lines.length; i += 1) {
    if (lines[i]!.trim() === '') continue
    const found = delimiters
      .flatMap((delimiter) => startAt(lines, i, above, delimiter) ?? [])
      .sort((a, b) => b.share - a.share || b.titles.length - a.titles.length)
    if (found[0]) return found[0]
    above.unshift(i)
    above.length = Math.min(above.length, 2)
  }
  return null
}

/**
 * Reads the lines up to the first numbers.
 * @param bytes  The first bytes of the file, at most 64 KB.
 * @param whole  They are the whole file; else a last incomplete line is ignored.
 */
export function readHead(bytes: Uint8Array, whole: boolean): Dialect | Refusal {
  const refusal = refuseBytes(bytes)
  if (refusal) return refusal
  const lines = decode(whole ? bytes : bytes.subarray(0, endOfLastLine(bytes)))
    .replace(/^\uFEFF/, '')
    .split(/\r\n|\n|\r/)
  const start = findStart(lines)
  if (!start)
    return refuse(
      'not-a-table',
      'No line of numbers follows a line of column names. Export the log as CSV with a header.',
    )
  const sample = lines
    .slice(start.first)
    .filter((line) => line.trim() !== '')
    .map((line) => fieldsOf(line, start.delimiter))
  const count = (form: RegExp) => sample.reduce((sum, row) => sum + row.filter((field) => form.test(field)).length, 0)
  const commas = start.delimiter === ',' ? 0 : count(/^\s*[+-]?\d*,\d+\s*$/)
  const points = count(/^\s*[+-]?\d*\.\d+\s*$/)
  const split = start.titles.map(splitUnit)
  return {
    delimiter: start.delimiter,
    decimalComma: commas > points,
    commaToo: start.delimiter !== ',' && points === 0,
    header: split.map((each) => each.name),
    units: split.map((each, i) => each.unit || (start.units[i] ?? '').trim().replace(/^[([]|[)\]]$/g, '')),
    words: split.map((_, i) => isWords(sample.map((row) => row[i] ?? ''))),
    skipLines: start.first,
  }
}

/** A column of which the head shows words and never a number. */
const isWords = (fields: readonly string[]): boolean => {
  const said = fields.filter((field) => !missing.test(field.trim()))
  return said.length > 0 && !said.some(isNumeric)
}
