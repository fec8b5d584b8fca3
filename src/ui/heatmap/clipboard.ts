/** Cells as spreadsheets carry them: rows from the highest load down, as they stand on the page; tabs between cells. Pure. */
import type { Grid } from '../../../shared/grid.ts'
import { rectangleOf, type Selection } from './selection.ts'

export type DecimalMark = 'point' | 'comma'

/** The selected cells as text; a cell without a value is left empty. */
export function blockText(
  grid: Grid,
  values: readonly (number | null)[],
  selection: Selection,
  mark: DecimalMark,
  digits: number,
): string {
  const { rows, cols } = rectangleOf(grid, selection)
  const lines: string[] = []
  for (let row = rows[1]; row >= rows[0]; row -= 1) {
    const cells: string[] = []
    for (let col = cols[0]; col <= cols[1]; col += 1) {
      const value = values[row * grid.rpm.length + col] ?? null
      const text = value === null || !Number.isFinite(value) ? '' : String(Number(value.toFixed(digits)))
      cells.push(mark === 'comma' ? text.replace('.', ',') : text)
    }
    lines.push(cells.join('\t'))
  }
  return lines.join('\n')
}

/** Reads a number typed with a point or a comma; null where it is none. */
export function readNumber(text: string): number | null {
  const bare = text.trim().replace('\u2212', '-').replace(/%$/, '').trim()
  return /^[+-]?(\d+([.,]\d*)?|[.,]\d+)$/.test(bare) ? Number(bare.replace(',', '.')) : null
}

export interface CellValue {
  readonly cell: number
  readonly value: number
}
export type Pasted = { ok: true; cells: CellValue[]; area: Selection } | { ok: false; problem: string }

/** Splits at tabs, or at semicolons where there is no tab. */
function rowsOf(text: string): string[][] {
  const lines = text.replace(/\r\n?/g, '\n').replace(/\n+$/, '').split('\n')
  const between = text.includes('\t') ? '\t' : ';'
  return lines.map((line) => line.split(between))
}

/**
 * Places pasted text on the table: from the selection's upper left corner, or one number into every selected cell.
 * An empty field leaves its cell alone. All or nothing: a field that is no number, or a block that sticks out, is
 * refused with its place.
 */
export function placePaste(grid: Grid, selection: Selection, text: string): Pasted {
  if (text.trim() === '') return { ok: false, problem: 'There is nothing to paste.' }
  const block = rowsOf(text)
  const { rows, cols } = rectangleOf(grid, selection)
  const width = Math.max(...block.map((line) => line.length))
  const single = block.length === 1 && width === 1
  const height = single ? rows[1] - rows[0] + 1 : block.length
  const across = single ? cols[1] - cols[0] + 1 : width
  const [top, left] = [rows[1], cols[0]]
  if (height > top + 1 || across > grid.rpm.length - left) {
    return {
      ok: false,
      problem: `${block.length} by ${width} cells do not fit below and right of ${grid.rpm[left]} rpm, ${grid.mapKpa[top]} kPa. Nothing was changed.`,
    }
  }
  const cells: CellValue[] = []
  for (let down = 0; down < height; down += 1) {
    for (let right = 0; right < across; right += 1) {
      const field = single ? block[0]![0]! : (block[down]![right] ?? '')
      if (field.trim() === '') continue
      const value = readNumber(field)
      if (value === null) {
        return {
          ok: false,
          problem: `Row ${down + 1}, column ${right + 1} of what was pasted: “${field.trim().slice(0, 20)}” is not a number. Nothing was changed.`,
        }
      }
      cells.push({ cell: (top - down) * grid.rpm.length + left + right, value })
    }
  }
  const perRow = grid.rpm.length
  return {
    ok: true,
    cells,
    area: { anchor: top * perRow + left, focus: (top - height + 1) * perRow + left + across - 1 },
  }
}
