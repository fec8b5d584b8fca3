/** Idle, cruise and load as parts of the table, and what the decisions change in each. Pure. */
import { highLoadKpa, type Grid } from '../../../shared/grid.ts'
import { changePct, takenValue, type Decided } from './decisions.ts'

export type Region = 'idle' | 'cruise' | 'load'

/** Where a warm engine idles; common practice, no source. */
export const idleRpm = 1200
export const idleKpa = 60

/** Load is where the lean guard watches; the rest above idle is cruise. */
export function regionOf(grid: Grid, cell: number): Region {
  const mapKpa = grid.mapKpa[Math.floor(cell / grid.rpm.length)]!
  if (mapKpa >= highLoadKpa(grid)) return 'load'
  return grid.rpm[cell % grid.rpm.length]! <= idleRpm && mapKpa <= idleKpa ? 'idle' : 'cruise'
}

export interface RegionChange {
  readonly region: Region
  /** Cells with evidence. */
  readonly cells: number
  /** Mean change of what the next revision takes, %, each cell weighted by its seconds; null without evidence. */
  readonly meanPct: number | null
}

export function regionChanges(decided: Decided): RegionChange[] {
  const { grid, current, evidenceS } = decided.surface
  const sums = { idle: { s: 0, change: 0, n: 0 }, cruise: { s: 0, change: 0, n: 0 }, load: { s: 0, change: 0, n: 0 } }
  for (let cell = 0; cell < current.length; cell += 1) {
    const seconds = evidenceS[cell] ?? 0
    if (seconds <= 0) continue
    const sum = sums[regionOf(grid, cell)]
    sum.s += seconds
    sum.change += seconds * changePct(current[cell] ?? Number.NaN, takenValue(decided, cell))
    sum.n += 1
  }
  return (['idle', 'cruise', 'load'] as const).map((region) => ({
    region,
    cells: sums[region].n,
    meanPct: sums[region].s > 0 ? sums[region].change / sums[region].s : null,
  }))
}
