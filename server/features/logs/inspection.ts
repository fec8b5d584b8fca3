/** Use case: look over a log on request, in a worker thread. Nothing of it is stored. */
import { channelNames, type Inspection } from '../../../shared/contract/logs.ts'
import type { EngineSheetInput } from '../../../shared/contract/vehicles.ts'
import type { InspectionInput } from '../../core/findings/inspect.ts'
import type { ViewFacts } from '../../core/findings/view.ts'
import type { Deps } from '../../deps.ts'
import { scopeOf, type Actor, type Scope } from '../../platform/http/actor.ts'
import { Problem } from '../../platform/http/problem.ts'
import { currentTable, tableById } from '../tables/service.ts'
import { currentSheet } from '../vehicles/service.ts'
import { readChannels } from './columns.ts'
import { factsOf, loadDrive } from './service.ts'
import * as store from './store.ts'

/** What a sheet that is not written yet is taken to say. */
const unknownSheet: Pick<EngineSheetInput, 'lambdaLow' | 'lambdaHigh' | 'deadTimeMs'> = {
  lambdaLow: 0.65,
  lambdaHigh: 1.35,
  deadTimeMs: 0.9,
}

async function inputOf(deps: Deps, scope: Scope, row: store.LogRow): Promise<InspectionInput> {
  const columns = await readChannels(deps.pool, row.id, channelNames)
  const sheet = await currentSheet(deps.db, row.vehicleId)
  const flashed = row.flashedRevisionId ? await tableById(deps.db, row.flashedRevisionId) : null
  const target = await currentTable(deps.db, scope, row.vehicleId, 'target')
  const table = flashed ?? (await currentTable(deps.db, scope, row.vehicleId, 've'))
  const { lambdaLow, lambdaHigh, deadTimeMs } = sheet ?? unknownSheet
  const facts: ViewFacts = {
    lambdaLow,
    lambdaHigh,
    deadTimeMs,
    grid: table?.grid ?? null,
    target: target ? { grid: target.grid, lambda: target.values } : null,
  }
  const teaches = flashed && target && sheet && columns.has('lambda')
  return {
    columns,
    facts,
    teaching: teaches ? { drive: await loadDrive(deps, row.id, target), engine: factsOf(sheet) } : null,
  }
}

/** @throws Problem log-not-ready before the log has been read. */
export async function inspectLog(deps: Deps, actor: Actor, logId: string): Promise<Inspection> {
  const scope = scopeOf(actor)
  const found = await store.logById(deps.db, scope, logId)
  if (!found) throw new Problem('not-found')
  if (found.row.state !== 'ready') throw new Problem('log-not-ready', { detail: 'It has not been read yet.' })
  return deps.crunch.inspectLog(await inputOf(deps, scope, found.row))
}
