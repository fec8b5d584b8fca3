/** The two-axis table: rpm along columns, manifold pressure along rows; the fit, the heatmap and the exports share it. */

/**
 * Axes of a fuel or target table. Cells are stored row-major in a flat array: `index = row * rpm.length + col`,
 * row following `mapKpa` (ascending), col following `rpm` (ascending).
 */
export interface Grid {
  /** Engine speed breakpoints, 1/min, strictly ascending, at least 2. */
  readonly rpm: readonly number[]
  /** Manifold absolute pressure breakpoints, kPa, strictly ascending, at least 2. */
  readonly mapKpa: readonly number[]
}

/** The four cells around a point and their bilinear weights (dimensionless, sum 1). */
export interface Corner {
  readonly cells: readonly [number, number, number, number]
  readonly weights: readonly [number, number, number, number]
}

export const cellCount = (grid: Grid): number => grid.rpm.length * grid.mapKpa.length

export const cellIndex = (grid: Grid, row: number, col: number): number => row * grid.rpm.length + col

/** High load begins here, kPa: 0.7 of the axis' top, or of 103 kPa on a boosted axis. */
export const highLoadKpa = (grid: Grid): number => 0.7 * Math.min(grid.mapKpa.at(-1)!, 103)

export const sameGrid = (a: Grid, b: Grid): boolean =>
  a.rpm.length === b.rpm.length &&
  a.mapKpa.length === b.mapKpa.length &&
  a.rpm.every((v, i) => v === b.rpm[i]) &&
  a.mapKpa.every((v, i) => v === b.mapKpa[i])

/** Index of the lower breakpoint of the interval that holds `value`, clamped to the axis. */
export function lowerIndex(axis: readonly number[], value: number): number {
  let low = 0
  let high = axis.length - 2
  while (low < high) {
    const middle = (low + high + 1) >> 1
    if (axis[middle]! <= value) low = middle
    else high = middle - 1
  }
  return low
}

/** Position of `value` in its interval, 0 to 1; values beyond the axis are clamped to its ends, as a controller does. */
export function fraction(axis: readonly number[], lower: number, value: number): number {
  const from = axis[lower]!
  const to = axis[lower + 1]!
  return Math.min(1, Math.max(0, (value - from) / (to - from)))
}

/** Bilinear weights at a point. Outside the axes the edge value holds (clamped). */
export function cornerAt(grid: Grid, rpm: number, mapKpa: number): Corner {
  const col = lowerIndex(grid.rpm, rpm)
  const row = lowerIndex(grid.mapKpa, mapKpa)
  const u = fraction(grid.rpm, col, rpm)
  const v = fraction(grid.mapKpa, row, mapKpa)
  const first = cellIndex(grid, row, col)
  const above = first + grid.rpm.length
  return {
    cells: [first, first + 1, above, above + 1],
    weights: [(1 - u) * (1 - v), u * (1 - v), (1 - u) * v, u * v],
  }
}

/** Table value at a point by bilinear interpolation, clamped at the axes' ends. */
export function valueAt(grid: Grid, values: ArrayLike<number>, rpm: number, mapKpa: number): number {
  const { cells, weights } = cornerAt(grid, rpm, mapKpa)
  let sum = 0
  for (let i = 0; i < 4; i += 1) sum += weights[i]! * values[cells[i]!]!
  return sum
}
