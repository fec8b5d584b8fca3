/** The logs noun's SQL. */
import { and, desc, eq, max, sql } from 'drizzle-orm'
import type { Reader, Tx } from '../../platform/db/client.ts'
import { people } from '../../platform/db/schema/accounts.ts'
import { logBlocks, logOriginals, logs, mappings } from '../../platform/db/schema/logs.ts'
import { proposalLogs, proposals } from '../../platform/db/schema/proposals.ts'
import { revisions } from '../../platform/db/schema/tables.ts'
import { vehicles } from '../../platform/db/schema/vehicles.ts'
import type { Scope } from '../../platform/http/actor.ts'
import { inScope } from '../vehicles/service.ts'

export type LogRow = typeof logs.$inferSelect

export interface LogFound {
  readonly row: LogRow
  readonly uploader: string
  readonly flashedNumber: number | null
}

const found = (db: Reader) =>
  db
    .select({ row: logs, uploader: people.name, flashedNumber: revisions.number })
    .from(logs)
    .innerJoin(vehicles, eq(vehicles.id, logs.vehicleId))
    .innerJoin(people, eq(people.id, logs.uploadedById))
    .leftJoin(revisions, eq(revisions.id, logs.flashedRevisionId))

export async function logById(db: Reader, scope: Scope, logId: string): Promise<LogFound | null> {
  const [row] = await found(db).where(and(eq(logs.id, logId), inScope(db, scope)))
  return row ?? null
}

export const logsOf = (db: Reader, scope: Scope, vehicleId: string): Promise<LogFound[]> =>
  found(db)
    .where(and(eq(logs.vehicleId, vehicleId), inScope(db, scope)))
    .orderBy(desc(logs.number))

export async function rowById(db: Reader, logId: string): Promise<LogRow | null> {
  const [row] = await db.select().from(logs).where(eq(logs.id, logId))
  return row ?? null
}

export async function logBySha(db: Reader, vehicleId: string, sha256: string): Promise<LogRow | null> {
  const [row] = await db
    .select()
    .from(logs)
    .where(and(eq(logs.vehicleId, vehicleId), eq(logs.sha256, sha256)))
  return row ?? null
}

export async function lastNumber(tx: Tx, vehicleId: string): Promise<number> {
  const [row] = await tx
    .select({ last: max(logs.number) })
    .from(logs)
    .where(eq(logs.vehicleId, vehicleId))
  return row?.last ?? 0
}

/** Bytes of originals (as uploaded) the workshop holds. */
export async function bytesHeld(db: Reader, workshopId: string): Promise<number> {
  const [row] = await db
    .select({ bytes: sql<string>`coalesce(sum(${logs.bytes}::bigint), 0)` })
    .from(logs)
    .innerJoin(vehicles, eq(vehicles.id, logs.vehicleId))
    .where(eq(vehicles.workshopId, workshopId))
  return Number(row?.bytes ?? 0)
}

export async function pieceOf(db: Reader, logId: string, piece: number): Promise<Uint8Array | null> {
  const [row] = await db
    .select({ data: logOriginals.data })
    .from(logOriginals)
    .where(and(eq(logOriginals.logId, logId), eq(logOriginals.piece, piece)))
  return row?.data ?? null
}

/** Writes to the log only while the attempt that read it is still the last one: a stale worker changes nothing. */
export async function updateAttempt(
  db: Reader,
  logId: string,
  attempt: number,
  patch: Partial<LogRow>,
): Promise<boolean> {
  const rows = await db
    .update(logs)
    .set(patch)
    .where(and(eq(logs.id, logId), eq(logs.attempt, attempt)))
    .returning({ id: logs.id })
  return rows.length === 1
}

export const channelsOf = (db: Reader, logId: string) =>
  db.selectDistinct({ channel: logBlocks.channel }).from(logBlocks).where(eq(logBlocks.logId, logId))

export async function rememberedMapping(db: Reader, vehicleId: string, headerHash: string) {
  const [row] = await db
    .select()
    .from(mappings)
    .where(and(eq(mappings.vehicleId, vehicleId), eq(mappings.headerHash, headerHash)))
  return row?.columns ?? null
}

export const rememberMapping = (
  tx: Tx,
  vehicleId: string,
  headerHash: string,
  columns: (typeof mappings.$inferInsert)['columns'],
) =>
  tx
    .insert(mappings)
    .values({ vehicleId, headerHash, columns })
    .onConflictDoUpdate({ target: [mappings.vehicleId, mappings.headerHash], set: { columns } })

/** True where a proposal was learned from the log. */
export async function isUsed(db: Reader, logId: string): Promise<boolean> {
  const rows = await db
    .select({ id: proposals.id })
    .from(proposalLogs)
    .innerJoin(proposals, eq(proposals.id, proposalLogs.proposalId))
    .where(eq(proposalLogs.logId, logId))
    .limit(1)
  return rows.length > 0
}
