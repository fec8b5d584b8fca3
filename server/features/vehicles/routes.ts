/** Binds the vehicles endpoints; no logic. */
import * as contract from '../../../shared/contract/vehicles.ts'
import type { Deps } from '../../deps.ts'
import { on, type Binder } from '../../platform/http/on.ts'
import * as vehicles from './service.ts'

export function mountVehicles(binder: Binder, deps: Deps): void {
  on(binder, contract.listVehicles)(async ({ actor }) => ({ vehicles: await vehicles.listVehicles(deps, actor) }))
  on(binder, contract.createVehicle)(({ actor, body }) => vehicles.createVehicle(deps, actor, body))
  on(binder, contract.getVehicle)(({ actor, params }) => vehicles.getVehicle(deps, actor, params.vehicleId))
  on(
    binder,
    contract.changeVehicle,
  )(({ actor, params, body }) => vehicles.changeVehicle(deps, actor, params.vehicleId, body))
  on(
    binder,
    contract.writeEngineSheet,
  )(({ actor, params, body }) => vehicles.writeEngineSheet(deps, actor, params.vehicleId, body))
}
