/** The history of a table: what each revision changed, where it branches, and going back to an earlier state. */
import type { HistoryEntry } from '../../../shared/contract/reviews.ts'
import type { Revision, TableKind } from '../../../shared/contract/tables.ts'
import { sameGrid } from '../../../shared/grid.ts'
import { fromWire } from '../../../shared/wire.ts'
import type { Deps } from '../../deps.ts'
import { scopeOf, type Actor } from '../../platform/http/actor.ts'
import { Problem } from '../../platform/http/problem.ts'
import { appendRevision, currentTable, getRevision, listRevisions, tablesOf, type Table } from '../tables/service.ts'
import { lockVehicle } from '../vehicles/service.ts'
import * as store from './store.ts'

/** Change of each cell in %, to 0.1; null where the axes differ. */
function changeOf(table: Table, parent: Table | undefined): number[] | null {
  if (!parent || !sameGrid(parent.grid, table.grid)) return null
  return Array.from(table.values, (value, cell) => Math.round((value / parent.values[cell]! - 1) * 1000) / 10)
}

export async function getHistory(
  deps: Deps,
  actor: Actor,
  vehicleId: string,
  kind: TableKind,
): Promise<{ entries: HistoryEntry[] }> {
  const lines = await listRevisions(deps, actor, vehicleId, kind)
  const tables = new Map((await tablesOf(deps.db, scopeOf(actor), vehicleId, kind)).map((table) => [table.id, table]))
  const open = await store.openCommentCounts(
    deps.db,
    lines.map(({ id }) => id),
  )
  return {
    entries: lines.map(({ id, parentId }) => {
      const table = tables.get(id)!
      const parent = parentId === null ? undefined : tables.get(parentId)
      return {
        revisionId: id,
        parentNumber: parent?.number ?? null,
        childNumbers: lines
          .filter((line) => line.parentId === id)
          .map(({ number }) => number)
          .sort((a, b) => a - b),
        changePct: changeOf(table, parent),
        cols: table.grid.rpm.length,
        openComments: open.get(id) ?? 0,
      }
    }),
  }
}

/** A new draft with the cells of an earlier revision, made from the table that is in use now. */
export async function restoreRevision(deps: Deps, actor: Actor, revisionId: string, note: string): Promise<Revision> {
  const scope = scopeOf(actor)
  return deps.db.transaction(async (tx) => {
    const source = await getRevision(tx, scope, revisionId)
    await lockVehicle(tx, source.vehicleId)
    const now = await currentTable(tx, scope, source.vehicleId, source.kind)
    if (!now || now.checksum === source.checksum)
      throw new Problem('move-not-legal', {
        detail: `The cells in use now are those of revision ${source.number}: there is nothing to go back to.`,
      })
    const values = fromWire(source.values)
    const changed = sameGrid(now.grid, source.grid)
      ? values.filter((value, cell) => value !== now.values[cell]).length
      : values.length
    const row = await appendRevision(tx, actor, {
      vehicleId: source.vehicleId,
      kind: source.kind,
      grid: source.grid,
      values,
      parentId: now.id,
      cellsChanged: changed,
      origin: 'restored',
      note: note === '' ? `Cells of revision ${source.number} again` : note,
      logs: source.logs,
      settings: { ...source.settings, restoredFrom: source.checksum },
      ...(source.coreVersion ? { coreVersion: source.coreVersion } : {}),
      ...(source.provenance ? { provenance: source.provenance } : {}),
    })
    return getRevision(tx, scope, row.id)
  })
}
