/** Reading the trail back: one workshop's entries, newest first, narrowed by a filter. */
import { and, desc, eq, gte, lt, sql } from 'drizzle-orm'
import type { Reader } from '../db/client.ts'
import { auditEntries } from '../db/schema/audit.ts'

export interface TrailFilter {
  readonly before?: number | undefined
  readonly vehicleId?: string | undefined
  readonly personId?: string | undefined
  /** How the action's name begins. */
  readonly action?: string | undefined
  /** Days in UTC, both included. */
  readonly from?: string | undefined
  readonly to?: string | undefined
}

const dayMs = 86_400_000
const startOf = (day: string): Date => new Date(`${day}T00:00:00Z`)

export const trailPage = (db: Reader, workshopId: string, filter: TrailFilter, limit: number) => {
  const { before, vehicleId, personId, action, from, to } = filter
  return db
    .select()
    .from(auditEntries)
    .where(
      and(
        eq(auditEntries.workshopId, workshopId),
        before === undefined ? undefined : lt(auditEntries.id, before),
        vehicleId === undefined ? undefined : eq(auditEntries.vehicleId, vehicleId),
        personId === undefined ? undefined : eq(auditEntries.personId, personId),
        action === undefined ? undefined : sql`starts_with(${auditEntries.action}, ${action})`,
        from === undefined ? undefined : gte(auditEntries.at, startOf(from)),
        to === undefined ? undefined : lt(auditEntries.at, new Date(startOf(to).getTime() + dayMs)),
      ),
    )
    .orderBy(desc(auditEntries.id))
    .limit(limit)
}
