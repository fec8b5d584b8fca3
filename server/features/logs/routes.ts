/** Binds the logs endpoints; no logic. */
import * as contract from '../../../shared/contract/logs.ts'
import type { Deps } from '../../deps.ts'
import { on, type Binder } from '../../platform/http/on.ts'
import { inspectLog } from './inspection.ts'
import * as logs from './service.ts'

export function mountLogs(binder: Binder, deps: Deps): void {
  on(
    binder,
    contract.uploadLog,
  )(({ actor, params, body, file }) => logs.receiveLog(deps, actor, params.vehicleId, file, body))
  on(
    binder,
    contract.listLogs,
  )(async ({ actor, params }) => ({ logs: await logs.listLogs(deps, actor, params.vehicleId) }))
  on(binder, contract.getLog)(({ actor, params }) => logs.getLog(deps, actor, params.logId))
  on(binder, contract.changeLog)(({ actor, params, body }) => logs.changeLog(deps, actor, params.logId, body))
  on(binder, contract.mapColumns)(({ actor, params, body }) => logs.mapColumns(deps, actor, params.logId, body.columns))
  on(binder, contract.readLogAgain)(({ actor, params }) => logs.readLogAgain(deps, actor, params.logId))
  on(
    binder,
    contract.getTraces,
  )(async ({ actor, params, query }) => ({
    traces: await logs.getTraces(deps, actor, params.logId, query),
  }))
  on(binder, contract.inspectLog)(({ actor, params }) => inspectLog(deps, actor, params.logId))
  on(binder, contract.downloadLog)(({ actor, params }) => logs.downloadLog(deps, actor, params.logId))
  on(
    binder,
    contract.removeLog,
  )(async ({ actor, params }) => {
    await logs.removeLog(deps, actor, params.logId)
    return { done: true as const }
  })
}
