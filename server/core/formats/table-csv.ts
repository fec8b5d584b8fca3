/** A revision as CSV: the table itself, and remarks that carry its state and checksum; it reads back to the same values. */
import type { Grid } from '../../../shared/grid.ts'

export interface TableExport {
  readonly grid: Grid
  readonly values: ArrayLike<number>
  readonly axes: 'rpm-across' | 'rpm-down'
  readonly decimal: 'point' | 'comma'
  /** Lines for the head: what, of which vehicle, in which state, with which checksum. */
  readonly remarks: readonly string[]
}

/**
 * The canonical text of a table, which the checksum is taken of: axes and values by MAP row, shortest decimal that reads
 * back to the same double, one line each.
 */
export function canonicalText(grid: Grid, values: ArrayLike<number>): string {
  const cols = grid.rpm.length
  const lines = [`rpm ${grid.rpm.join(' ')}`, `kPa ${grid.mapKpa.join(' ')}`]
  grid.mapKpa.forEach((_, row) =>
    lines.push(Array.from({ length: cols }, (_each, col) => values[row * cols + col]).join(' ')),
  )
  return `${lines.join('\n')}\n`
}

/** RFC 4180 quoting, and a leading apostrophe where a spreadsheet would take the text for a formula. */
export function textField(text: string): string {
  const flat = text.replace(/[\r\n]+/g, ' ')
  const guarded = /^[=+\-@\t]/.test(flat) ? `'${flat}` : flat
  return /[",;\n]/.test(guarded) ? `"${guarded.replaceAll('"', '""')}"` : guarded
}

/** RFC 4180 with CRLF; with a decimal comma the fields are parted by semicolons, as spreadsheets in such places do. */
export function tableToCsv({ grid, values, axes, decimal, remarks }: TableExport): string {
  const mark = decimal === 'comma' ? ';' : ','
  const number = (value: number) => (decimal === 'comma' ? String(value).replace('.', ',') : String(value))
  const cols = grid.rpm.length
  const rows = remarks.map((remark) => textField(`# ${remark}`))
  if (axes === 'rpm-across') {
    rows.push(['kPa \\ rpm', ...grid.rpm.map(number)].join(mark))
    grid.mapKpa.forEach((map, row) =>
      rows.push([map, ...grid.rpm.map((_, col) => values[row * cols + col]!)].map(number).join(mark)),
    )
  } else {
    rows.push(['rpm \\ kPa', ...grid.mapKpa.map(number)].join(mark))
    grid.rpm.forEach((rpm, col) =>
      rows.push([rpm, ...grid.mapKpa.map((_, row) => values[row * cols + col]!)].map(number).join(mark)),
    )
  }
  return `${rows.join('\r\n')}\r\n`
}
