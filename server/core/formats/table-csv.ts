/** A revision as CSV: the table itself, and remarks that carry its state and checksum; it reads back to the same values. */
import type { Grid } from '../../../shared/grid.ts'
import { writeMap, type MapUnit } from './map-unit.ts'

export interface TableExport {
  readonly grid: Grid
  readonly values: ArrayLike<number>
  readonly axes: 'rpm-across' | 'rpm-down'
  readonly decimal: 'point' | 'comma'
  /** Decimal places of every value; without it as many as reading back to the same double takes. */
  readonly places?: number | undefined
  /** Unit of the MAP axis; kPa without it. */
  readonly mapUnit?: MapUnit
  /** Set where a target is written as air-fuel ratio: the ratio of lambda 1. Needs `places`. */
  readonly stoichAfr?: number | undefined
  /** Cells for the clipboard are parted by tabs. */
  readonly tabs?: boolean
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
  const flat = text.replace(/[\r\n\t]+/g, ' ')
  const guarded = /^[=+\-@]/.test(flat.trimStart()) ? `'${flat}` : flat
  return /[",;\n]/.test(guarded) ? `"${guarded.replaceAll('"', '""')}"` : guarded
}

const markOf = ({ tabs, decimal }: TableExport): string => (tabs ? '\t' : decimal === 'comma' ? ';' : ',')

/** RFC 4180 with CRLF; with a decimal comma the fields are parted by semicolons, as spreadsheets in such places do. */
export function tableToCsv(table: TableExport): string {
  const { grid, values, axes, decimal, remarks, places, mapUnit = 'kPa', stoichAfr = 1 } = table
  const mark = markOf(table)
  const pointed = (text: string) => (decimal === 'comma' ? text.replace('.', ',') : text)
  const rpm = grid.rpm.map((each) => pointed(String(each)))
  const map = grid.mapKpa.map((each) => pointed(writeMap(each, mapUnit)))
  const value = (row: number, col: number) => {
    const number = values[row * rpm.length + col]! * stoichAfr
    return pointed(places === undefined ? String(number) : number.toFixed(places))
  }
  const rows = remarks.map((remark) => textField(`# ${remark}`))
  if (axes === 'rpm-across') {
    rows.push([`${mapUnit} \\ rpm`, ...rpm].join(mark))
    map.forEach((each, row) => rows.push([each, ...rpm.map((_, col) => value(row, col))].join(mark)))
  } else {
    rows.push([`rpm \\ ${mapUnit}`, ...map].join(mark))
    rpm.forEach((each, col) => rows.push([each, ...map.map((_, row) => value(row, col))].join(mark)))
  }
  return `${rows.join('\r\n')}\r\n`
}
