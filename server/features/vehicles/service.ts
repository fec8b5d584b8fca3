/** Use cases of vehicles and engine sheets. */
import { and, eq, sql } from 'drizzle-orm'
import type { EngineSheet, EngineSheetInput, Vehicle } from '../../../shared/contract/vehicles.ts'
import type { Deps } from '../../deps.ts'
import { recordAudit } from '../../platform/audit/record.ts'
import type { Reader, Tx } from '../../platform/db/client.ts'
import { memberships } from '../../platform/db/schema/accounts.ts'
import { engineSheets, vehicleOwners, vehicles } from '../../platform/db/schema/vehicles.ts'
import { scopeOf, type Actor, type Scope } from '../../platform/http/actor.ts'
import { Problem } from '../../platform/http/problem.ts'
import * as store from './store.ts'

export { inScope, ownersOf, vehiclesInScope, type VehicleRow } from './store.ts'

/** @throws Problem not-found for what the scope may not see. */
export async function vehicleInScope(db: Reader, scope: Scope, vehicleId: string): Promise<store.VehicleRow> {
  const vehicle = await store.vehicleById(db, scope, vehicleId)
  if (!vehicle) throw new Problem('not-found')
  return vehicle
}

/** For jobs, which act for nobody: a vehicle that another row names. */
export async function vehicleById(db: Reader, vehicleId: string): Promise<store.VehicleRow> {
  const [vehicle] = await db.select().from(vehicles).where(eq(vehicles.id, vehicleId))
  if (!vehicle) throw new Error(`vehicle ${vehicleId} is gone`)
  return vehicle
}

export async function currentSheet(db: Reader, vehicleId: string): Promise<EngineSheet | null> {
  const found = await store.latestSheet(db, vehicleId)
  if (!found) return null
  const { row, author } = found
  return { ...row.sheet, id: row.id, number: row.number, createdAt: row.createdAt.toISOString(), author }
}

/** One writing of the sheet by its number: what was learned on it is learned on it again. */
export async function sheetNumbered(db: Reader, vehicleId: string, number: number): Promise<EngineSheetInput | null> {
  const [row] = await db
    .select({ sheet: engineSheets.sheet })
    .from(engineSheets)
    .where(and(eq(engineSheets.vehicleId, vehicleId), eq(engineSheets.number, number)))
  return row?.sheet ?? null
}

async function toVehicle(db: Reader, row: store.VehicleRow): Promise<Vehicle> {
  const owners = await store.ownersOf(db, row.id)
  return {
    id: row.id,
    name: row.name,
    description: row.description,
    createdAt: row.createdAt.toISOString(),
    archived: row.archived,
    owners: owners.map(({ id, name }) => ({ id, name })),
    sheet: await currentSheet(db, row.id),
    flashedRevisionId: row.flashedRevisionId,
    version: row.version,
  }
}

export async function listVehicles(deps: Deps, actor: Actor): Promise<Vehicle[]> {
  const rows = await store.vehiclesInScope(deps.db, scopeOf(actor))
  return Promise.all(rows.map((row) => toVehicle(deps.db, row)))
}

export async function getVehicle(deps: Deps, actor: Actor, vehicleId: string): Promise<Vehicle> {
  return toVehicle(deps.db, await vehicleInScope(deps.db, scopeOf(actor), vehicleId))
}

export async function createVehicle(
  deps: Deps,
  actor: Actor,
  input: { name: string; description: string; sheet?: EngineSheetInput | undefined },
): Promise<Vehicle> {
  return deps.db.transaction(async (tx) => {
    const { sheet, name, description } = input
    const [row] = await tx.insert(vehicles).values({ workshopId: actor.workshopId, name, description }).returning()
    if (sheet) await insertSheet(tx, actor, row!.id, sheet)
    await recordAudit(tx, actor, { action: 'vehicle.create', subject: name, vehicleId: row!.id })
    return toVehicle(tx, row!)
  })
}

export interface VehicleChange {
  readonly version: number
  readonly name?: string | undefined
  readonly description?: string | undefined
  readonly archived?: boolean | undefined
  readonly ownerIds?: string[] | undefined
}

export async function changeVehicle(
  deps: Deps,
  actor: Actor,
  vehicleId: string,
  change: VehicleChange,
): Promise<Vehicle> {
  const { version, ownerIds, ...fields } = change
  return deps.db.transaction(async (tx) => {
    await vehicleInScope(tx, scopeOf(actor), vehicleId)
    const [row] = await tx
      .update(vehicles)
      .set({ ...fields, version: sql`${vehicles.version} + 1` })
      .where(and(eq(vehicles.id, vehicleId), eq(vehicles.version, version)))
      .returning()
    if (!row)
      throw new Problem('changed-meanwhile', {
        detail: 'Load the page again to see the other change, then make yours.',
      })
    if (ownerIds) await setOwners(tx, actor.workshopId, vehicleId, ownerIds)
    await recordAudit(tx, actor, {
      action: 'vehicle.change',
      subject: row.name,
      vehicleId,
      facts: { ...fields, ...(ownerIds ? { ownerIds } : {}) },
    })
    return toVehicle(tx, row)
  })
}

async function setOwners(tx: Tx, workshopId: string, vehicleId: string, ownerIds: readonly string[]): Promise<void> {
  const members = await tx
    .select({ id: memberships.personId })
    .from(memberships)
    .where(eq(memberships.workshopId, workshopId))
  if (!ownerIds.every((id) => members.some((member) => member.id === id))) throw new Problem('not-found')
  await tx.delete(vehicleOwners).where(eq(vehicleOwners.vehicleId, vehicleId))
  if (ownerIds.length > 0) await tx.insert(vehicleOwners).values(ownerIds.map((personId) => ({ vehicleId, personId })))
}

async function insertSheet(tx: Tx, actor: Actor, vehicleId: string, sheet: EngineSheetInput): Promise<void> {
  const number = (await store.lastSheetNumber(tx, vehicleId)) + 1
  await tx.insert(engineSheets).values({ vehicleId, number, authorId: actor.personId, sheet })
}

export async function writeEngineSheet(
  deps: Deps,
  actor: Actor,
  vehicleId: string,
  sheet: EngineSheetInput,
): Promise<EngineSheet> {
  return deps.db.transaction(async (tx) => {
    const vehicle = await vehicleInScope(tx, scopeOf(actor), vehicleId)
    await lockVehicle(tx, vehicleId)
    await insertSheet(tx, actor, vehicleId, sheet)
    const written = await currentSheet(tx, vehicleId)
    await recordAudit(tx, actor, {
      action: 'engine-sheet.write',
      subject: `${vehicle.name}, writing ${written!.number}`,
      vehicleId,
    })
    return written!
  })
}

/** Numbers of logs, revisions and proposals count up within a vehicle: whoever allocates one holds its row. */
export const lockVehicle = (tx: Tx, vehicleId: string) =>
  tx.select({ id: vehicles.id }).from(vehicles).where(eq(vehicles.id, vehicleId)).for('update')

export const setFlashedRevision = (tx: Tx, vehicleId: string, flashedRevisionId: string) =>
  tx.update(vehicles).set({ flashedRevisionId }).where(eq(vehicles.id, vehicleId))
