/** Two revisions against each other: the change of each cell, and what it comes to. Pure. */
import type { Revision } from '../../../shared/contract/tables.ts'
import { sameGrid, valueAt, type Grid } from '../../../shared/grid.ts'
import { fromWire } from '../../../shared/wire.ts'

export interface CellDifference {
  readonly cell: number
  readonly rpm: number
  readonly mapKpa: number
  readonly before: number
  readonly after: number
  readonly changePct: number
}

export interface RevisionDifference {
  readonly grid: Grid
  /** True where the first was read between its own breakpoints, because its axes are others. */
  readonly interpolated: boolean
  /** In %, one per cell of the second. */
  readonly changePct: readonly number[]
  /** Cells that differ, the largest first. */
  readonly differ: readonly CellDifference[]
}

/** Values nearer than this, in %, are the same: interpolation leaves such a residue. */
const samePct = 1e-9

export function differenceOf(from: Revision, to: Revision): RevisionDifference {
  const { grid } = to
  const interpolated = !sameGrid(from.grid, grid)
  const source = fromWire(from.values)
  const place = (cell: number) => ({
    rpm: grid.rpm[cell % grid.rpm.length]!,
    mapKpa: grid.mapKpa[Math.floor(cell / grid.rpm.length)]!,
  })
  const cells = Array.from(fromWire(to.values), (after, cell): CellDifference => {
    const { rpm, mapKpa } = place(cell)
    const before = interpolated ? valueAt(from.grid, source, rpm, mapKpa) : source[cell]!
    return { cell, rpm, mapKpa, before, after, changePct: (after / before - 1) * 100 }
  })
  return {
    grid,
    interpolated,
    changePct: cells.map(({ changePct }) => changePct),
    differ: cells
      .filter(({ changePct }) => Math.abs(changePct) > samePct)
      .sort((a, b) => Math.abs(b.changePct) - Math.abs(a.changePct)),
  }
}

/** Says for people which of two revisions is leaner; more VE is richer, more lambda leaner. */
export function compareSentence(from: Revision, to: Revision, { differ, changePct }: RevisionDifference): string {
  if (differ.length === 0) return `Revisions ${from.number} and ${to.number} hold the same values`
  const richer = differ.filter((each) => each.changePct > 0 === (to.kind === 've')).length
  return `Revision ${to.number} differs from ${from.number} in ${differ.length} of ${changePct.length} cells: ${richer} richer, ${differ.length - richer} leaner`
}
