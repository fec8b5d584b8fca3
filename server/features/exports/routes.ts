/** Binds the exports endpoints; no logic. */
import * as contract from '../../../shared/contract/exports.ts'
import type { Deps } from '../../deps.ts'
import { on, type Binder } from '../../platform/http/on.ts'
import * as exports from './service.ts'

export function mountExports(binder: Binder, deps: Deps): void {
  on(
    binder,
    contract.exportTable,
  )(({ actor, params, query }) => exports.exportTable(deps, actor, params.revisionId, query))
  on(
    binder,
    contract.exportCells,
  )(({ actor, params, query }) => exports.exportCells(deps, actor, params.revisionId, query))
  on(
    binder,
    contract.exportChangeSheet,
  )(({ actor, params }) => exports.exportChangeSheet(deps, actor, params.revisionId))
  on(binder, contract.exportProvenance)(({ actor, params }) => exports.exportProvenance(deps, actor, params.revisionId))
  on(
    binder,
    contract.checkReadBack,
  )(({ actor, params, body }) => exports.checkReadBack(deps, actor, params.vehicleId, body))
}
