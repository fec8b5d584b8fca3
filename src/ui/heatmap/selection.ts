/** Which cells are selected and where a key leads. Pure. */
import type { Grid } from '../../../shared/grid.ts'

/** A rectangle of cells from anchor to focus; the focus is the cell spoken of. */
export interface Selection {
  readonly anchor: number
  readonly focus: number
}

interface Rectangle {
  readonly rows: readonly [low: number, high: number]
  readonly cols: readonly [low: number, high: number]
}

export function rectangleOf(grid: Grid, { anchor, focus }: Selection): Rectangle {
  const width = grid.rpm.length
  const [r1, r2] = [Math.floor(anchor / width), Math.floor(focus / width)]
  const [c1, c2] = [anchor % width, focus % width]
  return { rows: [Math.min(r1, r2), Math.max(r1, r2)], cols: [Math.min(c1, c2), Math.max(c1, c2)] }
}

/** The cells of a selection's rectangle, ascending. */
export function cellsOf(grid: Grid, selection: Selection): number[] {
  const { rows, cols } = rectangleOf(grid, selection)
  const cells: number[] = []
  for (let row = rows[0]; row <= rows[1]; row += 1)
    for (let col = cols[0]; col <= cols[1]; col += 1) cells.push(row * grid.rpm.length + col)
  return cells
}

/** A whole row or column; the focus is the cell beside its head. */
export const rowOf = (grid: Grid, row: number): Selection => ({
  anchor: row * grid.rpm.length + grid.rpm.length - 1,
  focus: row * grid.rpm.length,
})
export const columnOf = (grid: Grid, col: number): Selection => ({
  anchor: (grid.mapKpa.length - 1) * grid.rpm.length + col,
  focus: col,
})
export const everything = (grid: Grid): Selection => ({ anchor: 0, focus: grid.rpm.length * grid.mapKpa.length - 1 })

const steps: Record<string, [row: number, col: number]> = {
  ArrowUp: [1, 0],
  ArrowDown: [-1, 0],
  ArrowRight: [0, 1],
  ArrowLeft: [0, -1],
  PageUp: [4, 0],
  PageDown: [-4, 0],
}

/** Where a key leads, or null when it leads nowhere; with Ctrl an arrow leads to the table's edge. */
export function cellAfter(grid: Grid, cell: number, key: string, ctrl: boolean): number | null {
  const cols = grid.rpm.length
  const rows = grid.mapKpa.length
  const row = Math.floor(cell / cols)
  const col = cell % cols
  if (key === 'Home') return ctrl ? (rows - 1) * cols : row * cols
  if (key === 'End') return ctrl ? cols - 1 : row * cols + cols - 1
  const step = steps[key]
  if (!step) return null
  const far = ctrl ? Math.max(rows, cols) : 1
  const clamp = (value: number, high: number) => Math.min(high, Math.max(0, value))
  return clamp(row + step[0] * far, rows - 1) * cols + clamp(col + step[1] * far, cols - 1)
}
