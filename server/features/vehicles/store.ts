/** The vehicles noun's SQL. Every read takes a scope. */
import { and, asc, desc, eq, exists, max } from 'drizzle-orm'
import type { Reader } from '../../platform/db/client.ts'
import { people } from '../../platform/db/schema/accounts.ts'
import { engineSheets, vehicleOwners, vehicles } from '../../platform/db/schema/vehicles.ts'
import type { Scope } from '../../platform/http/actor.ts'

export type VehicleRow = typeof vehicles.$inferSelect

/** Which vehicles a scope may see: the workshop's, for owners those they are on. */
export const inScope = (db: Reader, scope: Scope) =>
  and(
    eq(vehicles.workshopId, scope.workshopId),
    scope.ownerId === null
      ? undefined
      : exists(
          db
            .select({ id: vehicleOwners.vehicleId })
            .from(vehicleOwners)
            .where(and(eq(vehicleOwners.vehicleId, vehicles.id), eq(vehicleOwners.personId, scope.ownerId))),
        ),
  )

export const vehiclesInScope = (db: Reader, scope: Scope): Promise<VehicleRow[]> =>
  db.select().from(vehicles).where(inScope(db, scope)).orderBy(asc(vehicles.createdAt))

export async function vehicleById(db: Reader, scope: Scope, vehicleId: string): Promise<VehicleRow | null> {
  const [row] = await db
    .select()
    .from(vehicles)
    .where(and(eq(vehicles.id, vehicleId), inScope(db, scope)))
  return row ?? null
}

export const ownersOf = (db: Reader, vehicleId: string) =>
  db
    .select({ id: people.id, name: people.name, email: people.email })
    .from(vehicleOwners)
    .innerJoin(people, eq(people.id, vehicleOwners.personId))
    .where(eq(vehicleOwners.vehicleId, vehicleId))
    .orderBy(asc(people.name))

export async function latestSheet(db: Reader, vehicleId: string) {
  const [row] = await db
    .select({ row: engineSheets, author: people.name })
    .from(engineSheets)
    .innerJoin(people, eq(people.id, engineSheets.authorId))
    .where(eq(engineSheets.vehicleId, vehicleId))
    .orderBy(desc(engineSheets.number))
    .limit(1)
  return row ?? null
}

export async function lastSheetNumber(db: Reader, vehicleId: string): Promise<number> {
  const [row] = await db
    .select({ last: max(engineSheets.number) })
    .from(engineSheets)
    .where(eq(engineSheets.vehicleId, vehicleId))
  return row?.last ?? 0
}
