/** The numbers of a cut through the table. Pure. */
import { hasEvidence, type Decided } from './decisions.ts'
import { viewValue } from './views.ts'

export type Cut = 'rpm' | 'load'

export interface ProfilePoint {
  readonly cell: number
  /** rpm or kPa. */
  readonly at: number
  /** VE, %. */
  readonly current: number
  /** What is decided, or proposed where the cell is open. */
  readonly after: number
  /** 95 % band of the fitted value; closed where no log has been. */
  readonly low: number
  readonly high: number
}

export function profileOf(decided: Decided, cell: number, cut: Cut): ProfilePoint[] {
  const { surface } = decided
  const { grid } = surface
  const width = grid.rpm.length
  const axis = cut === 'rpm' ? grid.rpm : grid.mapKpa
  return axis.map((at, i) => {
    const each = cut === 'rpm' ? cell - (cell % width) + i : i * width + (cell % width)
    const after = viewValue(decided, 'proposed', each) ?? Number.NaN
    const known = hasEvidence(surface, each)
    const middle = known ? (surface.fitted[each] ?? after) : after
    const half = known ? (1.96 * middle * (surface.sigmaPct[each] ?? 0)) / 100 : 0
    return {
      cell: each,
      at,
      current: surface.current[each] ?? Number.NaN,
      after,
      low: middle - half,
      high: middle + half,
    }
  })
}
