/** What is believed before any log: the engine is smooth, and the correction of the flashed table is gradual. */
import { cellCount, cellIndex, type Grid } from '../../../shared/grid.ts'

export interface PriorScale {
  /** Scale of the curvature of ln VE; larger lets the engine be rougher. */
  readonly curvature: number
  /** Scale of the steps of the correction. */
  readonly gradient: number
}

export interface Prior {
  /** Precision Q, n × n, row-major, full. */
  readonly precision: Float64Array
  /** Q · mean, n. */
  readonly pull: Float64Array
}

/** The parts a prior is made of at scale 1, each n × n, full: they depend on the axes alone. */
export interface PriorParts {
  readonly n: number
  readonly curvature: Float64Array
  readonly gradient: Float64Array
  /** Precision of the level of each cell. */
  readonly level: number
}

type Terms = readonly (readonly [cell: number, factor: number])[]

/** Adds (sum of factor · x)² / sd² to the precision. Mutates `q`. */
function addTerm(q: Float64Array, n: number, terms: Terms, sd: number): void {
  const weight = 1 / (sd * sd)
  for (const [i, a] of terms) for (const [j, b] of terms) q[i * n + j]! += a * b * weight
}

const clip = (value: number, low: number, high: number): number => Math.min(high, Math.max(low, value))

/** Second difference at the middle of three unevenly spaced points, scaled to the mean spacing. */
function secondDifference(
  before: number,
  here: number,
  after: number,
  cells: readonly [number, number, number],
): { terms: Terms; h: number } {
  const h1 = here - before
  const h2 = after - here
  const hm = (h1 + h2) / 2
  return {
    h: hm,
    terms: [
      [cells[0], hm / h1],
      [cells[1], -(hm / h1 + hm / h2)],
      [cells[2], hm / h2],
    ],
  }
}

/** Second differences of ln VE along both axes. Reference spacings 420 rpm and 9 kPa; n × n. */
function curvaturePart(grid: Grid): Float64Array {
  const n = cellCount(grid)
  const { rpm, mapKpa } = grid
  const q = new Float64Array(n * n)
  for (let row = 0; row < mapKpa.length; row += 1) {
    for (let col = 1; col + 1 < rpm.length; col += 1) {
      const at = cellIndex(grid, row, col)
      const { terms, h } = secondDifference(rpm[col - 1]!, rpm[col]!, rpm[col + 1]!, [at - 1, at, at + 1])
      addTerm(q, n, terms, 0.04 * clip(h / 420, 0.5, 4) ** 1.3)
    }
  }
  for (let row = 1; row + 1 < mapKpa.length; row += 1) {
    // Back-pressure bends the surface most at low manifold pressure.
    const sd = 0.022 + (0.008 - 0.022) * clip((mapKpa[row]! - 30) / 30, 0, 1)
    for (let col = 0; col < rpm.length; col += 1) {
      const at = cellIndex(grid, row, col)
      const { terms, h } = secondDifference(mapKpa[row - 1]!, mapKpa[row]!, mapKpa[row + 1]!, [
        at - rpm.length,
        at,
        at + rpm.length,
      ])
      addTerm(q, n, terms, sd * clip(h / 9, 0.5, 4) ** 1.3)
    }
  }
  return q
}

/** First differences of the correction along both axes, n × n. */
function gradientPart(grid: Grid): Float64Array {
  const n = cellCount(grid)
  const { rpm, mapKpa } = grid
  const q = new Float64Array(n * n)
  const step = (from: number, to: number): Terms => [
    [from, -1],
    [to, 1],
  ]
  for (let row = 0; row < mapKpa.length; row += 1) {
    for (let col = 0; col < rpm.length; col += 1) {
      const at = cellIndex(grid, row, col)
      if (col + 1 < rpm.length) addTerm(q, n, step(at, at + 1), 0.04)
      if (row + 1 < mapKpa.length) addTerm(q, n, step(at, at + rpm.length), 0.04)
    }
  }
  return q
}

export const priorParts = (grid: Grid): PriorParts => ({
  n: cellCount(grid),
  curvature: curvaturePart(grid),
  gradient: gradientPart(grid),
  level: 1 / (20 * 0.25 ** 2),
})

/**
 * Prior of x = ln VE: second differences of x itself, first differences of x − base, and a weak level of x − base.
 * Smoothing the correction alone would be wrong: the flashed table's steps are hand-made, the engine's are not.
 * @param base  ln of the flashed table on the same grid, n.
 */
export function priorOf(parts: PriorParts, base: Float64Array, scale: PriorScale): Prior {
  const { n } = parts
  const precision = new Float64Array(n * n)
  const pull = new Float64Array(n)
  const c = 1 / scale.curvature ** 2
  const d = 1 / scale.gradient ** 2
  for (let i = 0; i < n; i += 1) {
    let sum = parts.level * base[i]!
    for (let j = 0; j < n; j += 1) {
      const gradient = d * parts.gradient[i * n + j]!
      precision[i * n + j] = c * parts.curvature[i * n + j]! + gradient
      sum += gradient * base[j]!
    }
    precision[i * n + i]! += parts.level
    pull[i] = sum
  }
  return { precision, pull }
}
