/** Use cases of what leaves the product and what comes back from the controller. */
import type { ReadBack } from '../../../shared/contract/exports.ts'
import type { Revision } from '../../../shared/contract/tables.ts'
import { sameGrid } from '../../../shared/grid.ts'
import { fromWire } from '../../../shared/wire.ts'
import { tableToCsv } from '../../core/formats/table-csv.ts'
import { readTable } from '../../core/tables/read-table.ts'
import type { Deps } from '../../deps.ts'
import { scopeOf, type Actor } from '../../platform/http/actor.ts'
import type { FileAnswer } from '../../platform/http/on.ts'
import { Problem } from '../../platform/http/problem.ts'
import { getRevision, tablesOf, type Table } from '../tables/service.ts'
import { currentSheet, vehicleInScope } from '../vehicles/service.ts'

const cautions =
  'A wrong fuel table can destroy an engine or start a fire. A sign-off is a record of review, not a guarantee.'

function stateWords(revision: Revision): string {
  const { signature } = revision
  if (!signature) return 'DRAFT, NOT SIGNED'
  return `Signed by ${signature.by.name}${signature.byAuthor ? ', its author,' : ''} on ${signature.at}`
}

const fileName = (vehicle: string, revision: Revision, ending: string): string =>
  `${vehicle} ${revision.kind === 've' ? 'fuel table' : 'target table'} ${revision.number}${revision.signature ? '' : ' DRAFT'}.${ending}`
    .toLowerCase()
    .replace(/[^\w.]+/g, '-')
    .replace('draft', 'DRAFT')

export async function exportTable(
  deps: Deps,
  actor: Actor,
  revisionId: string,
  options: { axes: 'rpm-across' | 'rpm-down'; decimal: 'point' | 'comma' },
): Promise<FileAnswer> {
  const revision = await getRevision(deps.db, scopeOf(actor), revisionId)
  const vehicle = await vehicleInScope(deps.db, scopeOf(actor), revision.vehicleId)
  const text = tableToCsv({
    grid: revision.grid,
    values: fromWire(revision.values),
    ...options,
    remarks: [
      `${vehicle.name}: ${revision.kind === 've' ? 'volumetric efficiency in %' : 'target lambda'}, revision ${revision.number}`,
      stateWords(revision),
      `SHA-256 of axes and values: ${revision.checksum}`,
      cautions,
    ],
  })
  return {
    file: {
      name: fileName(vehicle.name, revision, 'csv'),
      type: 'text/csv; charset=utf-8',
      body: new TextEncoder().encode(text),
    },
  }
}

export async function exportProvenance(deps: Deps, actor: Actor, revisionId: string): Promise<FileAnswer> {
  const revision = await getRevision(deps.db, scopeOf(actor), revisionId)
  const vehicle = await vehicleInScope(deps.db, scopeOf(actor), revision.vehicleId)
  const body = { vehicle: vehicle.name, stateInWords: stateWords(revision), cautions, ...revision }
  return {
    file: {
      name: fileName(vehicle.name, revision, 'json'),
      type: 'application/json',
      body: new TextEncoder().encode(JSON.stringify(body, null, 2)),
    },
  }
}

/** Half of the last place a controller shows: nearer than this is the same value. */
const sameWithin = 1e-9

const differing = (table: Table, values: Float64Array) =>
  Array.from(values).flatMap((found, cell) =>
    Math.abs(found - table.values[cell]!) <= sameWithin ? [] : [{ cell, expected: table.values[cell]!, found }],
  )

export async function checkReadBack(
  deps: Deps,
  actor: Actor,
  vehicleId: string,
  input: { text: string; kind: 've' | 'target' },
): Promise<ReadBack> {
  const scope = scopeOf(actor)
  await vehicleInScope(deps.db, scope, vehicleId)
  const sheet = await currentSheet(deps.db, vehicleId)
  const reading = readTable(input.text, { kind: input.kind, stoichAfr: sheet?.stoichAfr ?? 14.7 })
  if (!reading.ok) throw new Problem('table-unreadable', { detail: reading.problems[0]?.detail ?? 'It is no table.' })
  const compared = (await tablesOf(deps.db, scope, vehicleId, input.kind))
    .filter((table) => sameGrid(table.grid, reading.grid))
    .map((table) => ({ table, differ: differing(table, reading.values) }))
    .sort((a, b) => a.differ.length - b.differ.length || b.table.number - a.table.number)
  const best = compared[0]
  if (!best)
    return { matches: null, closest: null, detail: 'No revision of this vehicle that you may see has these axes.' }
  const { id, number, state } = best.table
  if (best.differ.length === 0) {
    const words = state === 'signed' ? 'It is signed.' : 'Nobody has signed it.'
    return {
      matches: { id, number, state },
      closest: null,
      detail: `Every one of the ${reading.values.length} cells is that of revision ${number}. ${words}`,
    }
  }
  return {
    matches: null,
    closest: { id, number, differ: best.differ },
    detail: `The closest is revision ${number}; ${best.differ.length} of ${reading.values.length} cells differ from it.`,
  }
}
