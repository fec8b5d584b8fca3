/** Arithmetic on selected cells. Every function returns the cells it would set and their unrounded values. Pure. */
import type { Grid } from '../../../shared/grid.ts'
import type { CellValue } from './clipboard.ts'
import { cellsOf, rectangleOf, type Selection } from './selection.ts'

type Values = readonly (number | null)[]

const each = (cells: readonly number[], values: Values, change: (value: number) => number): CellValue[] =>
  cells.flatMap((cell) => {
    const value = values[cell] ?? null
    return value === null ? [] : [{ cell, value: change(value) }]
  })

/** @param percent  10 makes 50 into 55. */
export const scale = (cells: readonly number[], values: Values, percent: number): CellValue[] =>
  each(cells, values, (value) => value * (1 + percent / 100))

/** @param amount  in the table's own unit. */
export const add = (cells: readonly number[], values: Values, amount: number): CellValue[] =>
  each(cells, values, (value) => value + amount)

const share = (axis: readonly number[], [low, high]: readonly [number, number], at: number): number =>
  high === low ? 0 : (axis[at]! - axis[low]!) / (axis[high]! - axis[low]!)

export type Direction = 'rpm' | 'load' | 'both'

/**
 * Straight lines between the selection's ends, by the axes' own numbers rather than by counting cells: along rpm
 * between its left and right column, along load between its lower and upper row, or bilinear between its corners.
 */
export function interpolate(grid: Grid, selection: Selection, values: Values, along: Direction): CellValue[] {
  const { rows, cols } = rectangleOf(grid, selection)
  const at = (row: number, col: number) => values[row * grid.rpm.length + col] ?? Number.NaN
  const mix = (from: number, to: number, part: number) => from + (to - from) * part
  return cellsOf(grid, selection).flatMap((cell) => {
    const row = Math.floor(cell / grid.rpm.length)
    const col = cell % grid.rpm.length
    const u = share(grid.rpm, cols, col)
    const v = share(grid.mapKpa, rows, row)
    const value =
      along === 'rpm'
        ? mix(at(row, cols[0]), at(row, cols[1]), u)
        : along === 'load'
          ? mix(at(rows[0], col), at(rows[1], col), v)
          : mix(
              mix(at(rows[0], cols[0]), at(rows[0], cols[1]), u),
              mix(at(rows[1], cols[0]), at(rows[1], cols[1]), u),
              v,
            )
    return Number.isFinite(value) ? [{ cell, value }] : []
  })
}

/**
 * Moves every selected cell towards the straight line between its neighbours, by rpm and by MAP as far as there are
 * two on opposite sides; a plane is left as it is.
 * @param percent  0 leaves the cell, 100 puts it on the line.
 */
export function blendTowardsNeighbours(
  grid: Grid,
  cells: readonly number[],
  values: Values,
  percent: number,
): CellValue[] {
  const width = grid.rpm.length
  return cells.flatMap((cell) => {
    const now = values[cell] ?? null
    const lines = [
      between(grid.rpm, cell % width, (i) => values[cell - (cell % width) + i] ?? null),
      between(grid.mapKpa, Math.floor(cell / width), (i) => values[i * width + (cell % width)] ?? null),
    ].filter((value) => value !== null)
    if (now === null || lines.length === 0) return []
    const line = lines.reduce((sum, value) => sum + value, 0) / lines.length
    return [{ cell, value: now + (line - now) * (percent / 100) }]
  })
}

/** The value at `at` on the line between its two neighbours on an axis; null at the ends. */
function between(axis: readonly number[], at: number, valueAt: (i: number) => number | null): number | null {
  if (at === 0 || at === axis.length - 1) return null
  const [before, after] = [valueAt(at - 1), valueAt(at + 1)]
  if (before === null || after === null) return null
  return before + (after - before) * share(axis, [at - 1, at + 1], at)
}
