/** The proposals noun's SQL. */
import { and, asc, desc, eq, gt, inArray, max, type SQL } from 'drizzle-orm'
import type { ProposalState } from '../../../shared/lifecycle.ts'
import type { Reader, Tx } from '../../platform/db/client.ts'
import { people } from '../../platform/db/schema/accounts.ts'
import { logs } from '../../platform/db/schema/logs.ts'
import { proposalLogs, proposals } from '../../platform/db/schema/proposals.ts'
import { revisions } from '../../platform/db/schema/tables.ts'
import { vehicles } from '../../platform/db/schema/vehicles.ts'
import type { Scope } from '../../platform/http/actor.ts'
import { inScope } from '../vehicles/service.ts'

export type ProposalRow = typeof proposals.$inferSelect

export interface ProposalFound {
  readonly row: ProposalRow
  readonly requester: string
  readonly baseNumber: number
}

const found = (db: Reader) =>
  db
    .select({ row: proposals, requester: people.name, baseNumber: revisions.number })
    .from(proposals)
    .innerJoin(vehicles, eq(vehicles.id, proposals.vehicleId))
    .innerJoin(people, eq(people.id, proposals.requestedById))
    .innerJoin(revisions, eq(revisions.id, proposals.baseRevisionId))

export async function proposalById(db: Reader, scope: Scope, proposalId: string): Promise<ProposalFound | null> {
  const [row] = await found(db).where(and(eq(proposals.id, proposalId), inScope(db, scope)))
  return row ?? null
}

export const proposalsOf = (db: Reader, scope: Scope, vehicleId: string): Promise<ProposalFound[]> =>
  found(db)
    .where(and(eq(proposals.vehicleId, vehicleId), inScope(db, scope)))
    .orderBy(desc(proposals.number))

export async function rowById(db: Reader, proposalId: string): Promise<ProposalRow | null> {
  const [row] = await db.select().from(proposals).where(eq(proposals.id, proposalId))
  return row ?? null
}

export async function lastNumber(tx: Tx, vehicleId: string): Promise<number> {
  const [row] = await tx
    .select({ last: max(proposals.number) })
    .from(proposals)
    .where(eq(proposals.vehicleId, vehicleId))
  return row?.last ?? 0
}

export const logsOf = (db: Reader, proposalId: string) =>
  db
    .select({
      id: logs.id,
      number: logs.number,
      title: logs.title,
      sha256: logs.sha256,
      recordedOn: logs.recordedOn,
      createdAt: logs.createdAt,
      used: proposalLogs.used,
    })
    .from(proposalLogs)
    .innerJoin(logs, eq(logs.id, proposalLogs.logId))
    .where(eq(proposalLogs.proposalId, proposalId))
    .orderBy(asc(logs.number))

/** Switches the proposal's logs: those named are used, the others are not. */
export async function useLogs(tx: Tx, proposalId: string, logIds: readonly string[]): Promise<void> {
  await tx
    .update(proposalLogs)
    .set({ used: inArray(proposalLogs.logId, [...logIds]) as SQL<boolean> })
    .where(eq(proposalLogs.proposalId, proposalId))
}

/** A fuel-table revision newer than the one the proposal started from. */
export async function newerRevision(db: Reader, row: ProposalRow, baseNumber: number) {
  const [newer] = await db
    .select({ id: revisions.id, number: revisions.number })
    .from(revisions)
    .where(and(eq(revisions.vehicleId, row.vehicleId), eq(revisions.kind, 've'), gt(revisions.number, baseNumber)))
    .orderBy(desc(revisions.number))
    .limit(1)
  return newer && newer.id !== row.revisionId ? newer : null
}

/** Writes only from one of the states; false when somebody was quicker. */
export async function updateFrom(
  db: Reader,
  proposalId: string,
  from: readonly ProposalState[],
  patch: Partial<ProposalRow>,
): Promise<boolean> {
  const rows = await db
    .update(proposals)
    .set(patch)
    .where(and(eq(proposals.id, proposalId), inArray(proposals.state, [...from])))
    .returning({ id: proposals.id })
  return rows.length === 1
}

/** Writes only on the version that was seen; false when it has moved on. */
export async function updateVersion(
  tx: Tx,
  proposalId: string,
  version: number,
  patch: Partial<ProposalRow>,
): Promise<boolean> {
  const rows = await tx
    .update(proposals)
    .set({ ...patch, version: version + 1 })
    .where(and(eq(proposals.id, proposalId), eq(proposals.version, version), eq(proposals.state, 'open')))
    .returning({ id: proposals.id })
  return rows.length === 1
}
