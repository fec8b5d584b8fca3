/** The notices noun's SQL. A notice is read by its person, in its workshop, and only while they may see its vehicle. */
import { and, count, desc, eq, inArray, isNull, lt, lte } from 'drizzle-orm'
import type { NoticeChoice, NoticeKind } from '../../../shared/contract/notices.ts'
import type { Reader, Tx } from '../../platform/db/client.ts'
import { memberships, people } from '../../platform/db/schema/accounts.ts'
import { noticeChoices, notices } from '../../platform/db/schema/notices.ts'
import { vehicles } from '../../platform/db/schema/vehicles.ts'
import { scopeOf, type Actor } from '../../platform/http/actor.ts'
import { inScope } from '../vehicles/service.ts'

const mine = (db: Reader, actor: Actor) =>
  and(
    eq(notices.personId, actor.personId),
    eq(notices.workshopId, actor.workshopId),
    inArray(
      notices.vehicleId,
      db
        .select({ id: vehicles.id })
        .from(vehicles)
        .where(inScope(db, scopeOf(actor))),
    ),
  )

export const noticesOf = (db: Reader, actor: Actor, before: number | undefined, limit: number) =>
  db
    .select()
    .from(notices)
    .where(and(mine(db, actor), before === undefined ? undefined : lt(notices.id, before)))
    .orderBy(desc(notices.id))
    .limit(limit)

export async function countUnread(db: Reader, actor: Actor): Promise<number> {
  const [row] = await db
    .select({ n: count() })
    .from(notices)
    .where(and(mine(db, actor), isNull(notices.readAt)))
  return row?.n ?? 0
}

export const markRead = (db: Reader, actor: Actor, upTo: number, at: Date) =>
  db
    .update(notices)
    .set({ readAt: at })
    .where(and(mine(db, actor), lte(notices.id, upTo), isNull(notices.readAt)))

/** Members of the workshop among the ids; who has left it is told nothing. */
export const membersAmong = (db: Reader, workshopId: string, ids: readonly string[]) =>
  db
    .select({ id: people.id, email: people.email })
    .from(memberships)
    .innerJoin(people, eq(people.id, memberships.personId))
    .where(and(eq(memberships.workshopId, workshopId), inArray(people.id, [...ids])))

export const choicesOf = (db: Reader, workshopId: string, ids: readonly string[], kind?: NoticeKind) =>
  db
    .select()
    .from(noticeChoices)
    .where(
      and(
        eq(noticeChoices.workshopId, workshopId),
        inArray(noticeChoices.personId, [...ids]),
        kind ? eq(noticeChoices.kind, kind) : undefined,
      ),
    )

export const saveChoice = (tx: Tx, actor: Actor, { kind, inApp, mail }: NoticeChoice) =>
  tx
    .insert(noticeChoices)
    .values({ workshopId: actor.workshopId, personId: actor.personId, kind, inApp, mail })
    .onConflictDoUpdate({
      target: [noticeChoices.workshopId, noticeChoices.personId, noticeChoices.kind],
      set: { inApp, mail },
    })
