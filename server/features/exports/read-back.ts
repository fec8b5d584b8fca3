/** Which revision a table read back from the controller is, or what differs. Pure. */
import type { ReadBack, ReadBackCell } from '../../../shared/contract/exports.ts'
import type { Grid } from '../../../shared/grid.ts'
import type { Table } from '../tables/service.ts'

export interface TableRead {
  readonly grid: Grid
  readonly values: Float64Array
  readonly halfPlace: number
}

/** Axes that went through bar or psi come back to 0.001 kPa. */
const sameBreakpoint = (a: number, b: number): boolean => Math.abs(a - b) < 0.0011

function differingAxes(table: Table, read: TableRead): ReadBack['axes'] {
  const pairs = (axis: 'rpm' | 'kPa', expected: readonly number[], found: readonly number[]) =>
    expected.flatMap((each, i) => (sameBreakpoint(each, found[i]!) ? [] : [{ axis, expected: each, found: found[i]! }]))
  return [...pairs('rpm', table.grid.rpm, read.grid.rpm), ...pairs('kPa', table.grid.mapKpa, read.grid.mapKpa)]
}

const sameSize = (a: Grid, b: Grid): boolean => a.rpm.length === b.rpm.length && a.mapKpa.length === b.mapKpa.length

/** The smallest difference that is told: half of the last place read back, and never finer than rounding of doubles. */
const toleranceOf = (halfPlace: number): number => halfPlace * (1 + 1e-9) + 1e-9

function differing(table: Table, read: TableRead, within: number): ReadBackCell[] {
  const { rpm, mapKpa } = table.grid
  return Array.from(read.values).flatMap((found, cell) => {
    const expected = table.values[cell]!
    if (Math.abs(found - expected) <= within) return []
    return [{ cell, rpm: rpm[cell % rpm.length]!, mapKpa: mapKpa[Math.floor(cell / rpm.length)]!, expected, found }]
  })
}

/** @param tables  Revisions of the vehicle that the asker may see, newest first. */
export function compareReadBack(tables: readonly Table[], read: TableRead, inEngineId: string | null): ReadBack {
  const within = toleranceOf(read.halfPlace)
  const blank: ReadBack = { matches: null, alsoMatches: [], closest: null, axes: [], within, detail: '' }
  const named = ({ id, number, state }: Table) => ({ id, number, state, inEngine: id === inEngineId })
  const sized = tables
    .filter((table) => sameSize(table.grid, read.grid))
    .map((table) => ({ table, axes: differingAxes(table, read) }))
  const compared = sized
    .filter(({ axes }) => axes.length === 0)
    .map(({ table }) => ({ table, differ: differing(table, read, within), away: distance(table, read) }))
    .sort((a, b) => a.differ.length - b.differ.length || a.away - b.away || b.table.number - a.table.number)
  const best = compared[0]
  if (!best) {
    const nearest = sized.sort((a, b) => a.axes.length - b.axes.length)[0]
    if (!nearest) return { ...blank, detail: 'No revision of this vehicle that you may see has a table of this size.' }
    return {
      ...blank,
      axes: nearest.axes,
      detail: `The axes are not those of any revision; revision ${nearest.table.number} comes nearest.`,
    }
  }
  const total = read.values.length
  if (best.differ.length > 0) {
    return {
      ...blank,
      closest: { ...named(best.table), differ: best.differ },
      detail: `The closest is revision ${best.table.number}; ${best.differ.length} of ${total} cells differ from it.`,
    }
  }
  const others = compared.filter((each) => each !== best && each.differ.length === 0)
  return {
    ...blank,
    matches: named(best.table),
    alsoMatches: others.map(({ table }) => named(table)),
    detail: `Every one of the ${total} cells is that of revision ${best.table.number}. ${stateOf(best.table)}`,
  }
}

const distance = (table: Table, read: TableRead): number =>
  read.values.reduce((sum, value, cell) => sum + Math.abs(value - table.values[cell]!), 0)

const stateOf = (table: Table): string => (table.state === 'signed' ? 'It is signed.' : 'Nobody has signed it.')
