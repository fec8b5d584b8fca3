/** What the first 64 KB of a log tell: is it a log at all, its dialect, its header and units, where its numbers begin. */
import Papa from 'papaparse'

export interface Dialect {
  readonly delimiter: string
  /** Decimal comma: only where the delimiter is something else. */
  readonly decimalComma: boolean
  readonly header: readonly string[]
  readonly units: readonly string[]
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

const number = /^\s*[+-]?(\d+([.,]\d*)?|[.,]\d+)(e[+-]?\d+)?\s*$/i
const clock = /^\s*\d+:\d{1,2}(:\d{1,2}([.,]\d+)?)?\s*$/
const isNumeric = (field: string): boolean => number.test(field) || clock.test(field)
const shareNumeric = (row: readonly string[]): number => {
  const filled = row.filter((field) => field.trim() !== '')
  return filled.length === 0 ? 0 : filled.filter(isNumeric).length / filled.length
}

/** "MAP (kPa)" or "clt_F" -> name and unit. */
export function splitUnit(title: string): { name: string; unit: string } {
  const bracket = /^(.*?)\s*[([]\s*([^)\]]*)\s*[)\]]\s*$/.exec(title)
  return bracket ? { name: bracket[1]!.trim(), unit: bracket[2]!.trim() } : { name: title.trim(), unit: '' }
}

/** @param bytes  The first bytes of the file, at most 64 KB; a last incomplete line is ignored. */
export function readHead(bytes: Uint8Array, whole: boolean): Dialect | Refusal {
  if (bytes.length === 0) return refuse('empty', 'The file is empty.')
  const raw = latin1(bytes)
  const known = starts.find(([mark]) => raw.startsWith(mark))
  if (known) return refuse('not-text', `This is ${known[1]}, not a log in CSV form.`)
  if (/^\s*<(!doctype|html|\?xml)/i.test(raw)) return refuse('not-text', 'This is a web page, not a log in CSV form.')
  if (raw.includes('\u0000'))
    return refuse('not-text', 'The file holds bytes that are not text. Save the log as CSV, in UTF-8.')
  const text = decode(
    whole ? bytes : bytes.subarray(0, Math.max(raw.lastIndexOf('\n'), raw.lastIndexOf('\r')) + 1),
  ).replace(/^\uFEFF/, '')
  const lines = text.split(/\r\n|\n|\r/)
  const first = lines.findIndex((line, i) => {
    const here = Papa.parse<string[]>(line, { delimitersToGuess: [',', ';', '\t', '|'] }).data[0] ?? []
    return i > 0 && here.length >= 2 && shareNumeric(here) > 0.7
  })
  if (first < 0)
    return refuse(
      'not-a-table',
      'No line of numbers follows a line of column names. Export the log as CSV with a header.',
    )
  const delimiter = delimiterOf(lines.slice(Math.max(0, first - 2), first + 8))
  const fields = (line: string): string[] => Papa.parse<string[]>(line, { delimiter }).data[0] ?? []
  const width = fields(lines[first]!).length
  const above = fields(lines[first - 1]!)
  const twoAbove = first >= 2 ? fields(lines[first - 2]!) : []
  const hasUnitsRow =
    twoAbove.length === above.length && twoAbove.length >= width - 1 && twoAbove.every((title) => !isNumeric(title))
  const header = hasUnitsRow ? twoAbove : above
  if (header.length < 2) return refuse('not-a-table', 'The line above the numbers does not name the columns.')
  const split = header.map(splitUnit)
  return {
    delimiter,
    decimalComma:
      delimiter !== ',' &&
      lines.slice(first, first + 20).some((line) => fields(line).some((field) => /^\s*-?\d+,\d+\s*$/.test(field))),
    header: split.map((each) => each.name),
    units: split.map(
      (each, i) => each.unit || (hasUnitsRow ? (above[i] ?? '').trim().replace(/^[([]|[)\]]$/g, '') : ''),
    ),
    skipLines: first,
  }
}

/** The mark that parts the lines into the most columns of equal number. */
function delimiterOf(lines: readonly string[]): string {
  let best = ','
  let bestScore = 0
  for (const mark of [';', '\t', '|', ',']) {
    const counts = lines
      .filter((line) => line.trim() !== '')
      .map((line) => Papa.parse<string[]>(line, { delimiter: mark }).data[0]?.length ?? 0)
    const least = Math.min(...counts)
    if (least > bestScore && least >= 2) {
      best = mark
      bestScore = least
    }
  }
  return best
}
