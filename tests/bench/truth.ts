/** The truth to score against, and the errors of an answer. */
import { cornerAt, type Grid } from '../../shared/grid.ts'
import { factorInPlace, solveInto } from '../../server/core/fit/cholesky.ts'
import type { Drive } from '../../server/core/drive.ts'
import { prepare, Role } from '../../server/core/model/prepare.ts'
import type { Plant } from './scenarios.ts'

/**
 * The grid's least-squares best representation of the true surface where the engine ran: what a perfect learner gives.
 * Sampling the surface at the nodes instead differs by about 0.4 % by itself.
 */
export function bestTable(plant: Plant, drives: readonly Drive[]): Float64Array {
  const { grid, engine } = plant
  const n = grid.rpm.length * grid.mapKpa.length
  const a = new Float64Array(n * n)
  const b = new Float64Array(n)
  for (let i = 0; i < n; i += 1) {
    const ve = engine.trueVe(grid.rpm[i % grid.rpm.length]!, grid.mapKpa[Math.floor(i / grid.rpm.length)]!)
    // A whisper of the nodes themselves, so that cells nobody visited have an answer.
    a[i * n + i] = 1e-3
    b[i] = 1e-3 * ve
  }
  for (const drive of drives) {
    const { role } = prepare(drive, plant.facts, grid)
    for (let i = 0; i < drive.timeS.length; i += 1) {
      // Outside the axes the table is clamped, and with the fuel cut nothing burns: no table could be right there.
      if (role[i] === Role.silent) continue
      const { cells, weights } = cornerAt(grid, drive.rpm[i]!, drive.mapKpa[i]!)
      const ve = engine.trueVe(drive.rpm[i]!, drive.mapKpa[i]!)
      for (let p = 0; p < 4; p += 1) {
        b[cells[p]!]! += weights[p]! * ve
        for (let q = 0; q < 4; q += 1) a[cells[p]! * n + cells[q]!]! += weights[p]! * weights[q]!
      }
    }
  }
  if (!factorInPlace(a, n)) throw new Error('the reference table cannot be solved')
  solveInto(b, a, n)
  return b
}

/** Error of each listed cell, %; cells without an answer are left out. */
export const errorsPct = (values: Float64Array, truth: Float64Array, cells: readonly number[]): number[] =>
  cells.map((cell) => 100 * (values[cell]! / truth[cell]! - 1)).filter((value) => Number.isFinite(value))

/** Cells beside a visited one that nobody visited. */
export function neighboursOf(grid: Grid, visited: readonly number[]): number[] {
  const cols = grid.rpm.length
  const has = new Set(visited)
  return Array.from({ length: cols * grid.mapKpa.length }, (_, cell) => cell).filter(
    (cell) =>
      !has.has(cell) &&
      visited.some(
        (other) =>
          Math.abs((other % cols) - (cell % cols)) <= 1 &&
          Math.abs(Math.floor(other / cols) - Math.floor(cell / cols)) <= 1,
      ),
  )
}
