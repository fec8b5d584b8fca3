/** Binds the tables endpoints; no logic. */
import * as contract from '../../../shared/contract/tables.ts'
import type { Deps } from '../../deps.ts'
import { scopeOf } from '../../platform/http/actor.ts'
import { on, type Binder } from '../../platform/http/on.ts'
import * as tables from './service.ts'

export function mountTables(binder: Binder, deps: Deps): void {
  on(
    binder,
    contract.previewTable,
  )(({ actor, params, body }) => tables.previewTable(deps, actor, params.vehicleId, body))
  on(binder, contract.bringTable)(({ actor, params, body }) => tables.bringTable(deps, actor, params.vehicleId, body))
  on(
    binder,
    contract.listRevisions,
  )(async ({ actor, params, query }) => ({
    revisions: await tables.listRevisions(deps, actor, params.vehicleId, query.kind),
  }))
  on(
    binder,
    contract.getRevision,
  )(({ actor, params }) => tables.getRevision(deps.db, scopeOf(actor), params.revisionId))
  on(
    binder,
    contract.markFlashed,
  )(({ actor, params, body }) => tables.markFlashed(deps, actor, params.revisionId, body))
}
