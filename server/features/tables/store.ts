/** The tables noun's SQL. */
import { and, desc, eq, inArray, max, or } from 'drizzle-orm'
import { alias } from 'drizzle-orm/pg-core'
import type { RevisionState } from '../../../shared/lifecycle.ts'
import type { Reader, Tx } from '../../platform/db/client.ts'
import { people } from '../../platform/db/schema/accounts.ts'
import { revisions } from '../../platform/db/schema/tables.ts'
import { vehicles } from '../../platform/db/schema/vehicles.ts'
import type { Scope } from '../../platform/http/actor.ts'
import { inScope } from '../vehicles/service.ts'

export type RevisionRow = typeof revisions.$inferSelect
export type TableKind = RevisionRow['kind']

export interface RevisionFound {
  readonly row: RevisionRow
  readonly author: string
  readonly signer: string | null
  readonly flashedId: string | null
}

/** Owners see what is signed or in the engine; drafts are the workshop's. */
const visible = (scope: Scope) =>
  scope.ownerId === null ? undefined : or(eq(revisions.state, 'signed'), eq(vehicles.flashedRevisionId, revisions.id))

const signers = alias(people, 'signers')

const found = (db: Reader) =>
  db
    .select({ row: revisions, author: people.name, signer: signers.name, flashedId: vehicles.flashedRevisionId })
    .from(revisions)
    .innerJoin(vehicles, eq(vehicles.id, revisions.vehicleId))
    .innerJoin(people, eq(people.id, revisions.authorId))
    .leftJoin(signers, eq(signers.id, revisions.signedById))

export async function revisionById(db: Reader, scope: Scope, revisionId: string): Promise<RevisionFound | null> {
  const [row] = await found(db).where(and(eq(revisions.id, revisionId), inScope(db, scope), visible(scope)))
  return row ?? null
}

export const revisionsOf = (db: Reader, scope: Scope, vehicleId: string, kind?: TableKind): Promise<RevisionFound[]> =>
  found(db)
    .where(
      and(
        eq(revisions.vehicleId, vehicleId),
        kind ? eq(revisions.kind, kind) : undefined,
        inScope(db, scope),
        visible(scope),
      ),
    )
    .orderBy(desc(revisions.createdAt), desc(revisions.number))

export async function lastNumber(tx: Tx, vehicleId: string, kind: TableKind): Promise<number> {
  const [row] = await tx
    .select({ last: max(revisions.number) })
    .from(revisions)
    .where(and(eq(revisions.vehicleId, vehicleId), eq(revisions.kind, kind)))
  return row?.last ?? 0
}

export async function rowById(db: Reader, revisionId: string): Promise<RevisionRow | null> {
  const [row] = await db.select().from(revisions).where(eq(revisions.id, revisionId))
  return row ?? null
}

/** Moves a revision only where it still is in one of the states; null when somebody was quicker. */
export async function updateFrom(
  tx: Tx,
  revisionId: string,
  from: readonly RevisionState[],
  patch: Partial<RevisionRow>,
): Promise<RevisionRow | null> {
  const [row] = await tx
    .update(revisions)
    .set(patch)
    .where(and(eq(revisions.id, revisionId), inArray(revisions.state, [...from])))
    .returning()
  return row ?? null
}
