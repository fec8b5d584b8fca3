/** The accounts noun's SQL. */
import { and, asc, count, desc, eq, gt, inArray, isNull } from 'drizzle-orm'
import type { Role } from '../../../shared/access.ts'
import type { Reader, Tx } from '../../platform/db/client.ts'
import {
  accessTokens,
  invitations,
  memberships,
  passwordResets,
  people,
  sessions,
  workshops,
} from '../../platform/db/schema/accounts.ts'
import type { Actor } from '../../platform/http/actor.ts'
import type { TokenActor } from './identify.ts'

const member = and(eq(memberships.personId, people.id))

export async function actorOfSession(db: Reader, sessionId: string, now: Date): Promise<Actor | null> {
  const [row] = await db
    .select({
      sessionId: sessions.id,
      personId: people.id,
      name: people.name,
      email: people.email,
      workshopId: sessions.workshopId,
      roles: memberships.roles,
    })
    .from(sessions)
    .innerJoin(people, eq(people.id, sessions.personId))
    .innerJoin(memberships, and(member, eq(memberships.workshopId, sessions.workshopId)))
    .where(and(eq(sessions.id, sessionId), isNull(sessions.revokedAt), gt(sessions.expiresAt, now)))
  return row ? { ...row, roles: row.roles as Role[] } : null
}

export async function actorOfToken(db: Reader, secretHash: string): Promise<TokenActor | null> {
  const [row] = await db
    .select({
      tokenId: accessTokens.id,
      tokenRole: accessTokens.role,
      personId: people.id,
      name: people.name,
      email: people.email,
      workshopId: accessTokens.workshopId,
      roles: memberships.roles,
    })
    .from(accessTokens)
    .innerJoin(people, eq(people.id, accessTokens.personId))
    .innerJoin(memberships, and(member, eq(memberships.workshopId, accessTokens.workshopId)))
    .where(and(eq(accessTokens.secretHash, secretHash), isNull(accessTokens.revokedAt)))
  return row ? { ...row, roles: row.roles as Role[], tokenRole: row.tokenRole as Role } : null
}

export const touchToken = (db: Reader, tokenId: string, at: Date) =>
  db.update(accessTokens).set({ lastUsedAt: at }).where(eq(accessTokens.id, tokenId))

export async function personByEmail(db: Reader, email: string) {
  const [row] = await db.select().from(people).where(eq(people.email, email.toLowerCase()))
  return row ?? null
}

export async function workshopsOf(db: Reader, personId: string) {
  return db
    .select({ id: workshops.id, name: workshops.name })
    .from(memberships)
    .innerJoin(workshops, eq(workshops.id, memberships.workshopId))
    .where(eq(memberships.personId, personId))
    .orderBy(asc(memberships.createdAt))
}

export async function workshopById(db: Reader, workshopId: string) {
  const [row] = await db.select().from(workshops).where(eq(workshops.id, workshopId))
  if (!row) throw new Error(`workshop ${workshopId} is gone`)
  return { id: row.id, name: row.name, allowOwnSignOff: row.allowOwnSignOff }
}

export async function countWorkshops(db: Reader): Promise<number> {
  const [row] = await db.select({ n: count() }).from(workshops)
  return row?.n ?? 0
}

export async function membersOf(db: Reader, workshopId: string) {
  const rows = await db
    .select({
      id: people.id,
      name: people.name,
      email: people.email,
      roles: memberships.roles,
      joinedAt: memberships.createdAt,
    })
    .from(memberships)
    .innerJoin(people, eq(people.id, memberships.personId))
    .where(eq(memberships.workshopId, workshopId))
    .orderBy(asc(people.name))
  return rows.map((row) => ({ ...row, roles: row.roles as Role[] }))
}

/** Locks the workshop's row, so that two changes of roles cannot each leave the other as the last admin. */
export const lockWorkshop = (tx: Tx, workshopId: string) =>
  tx.select({ id: workshops.id }).from(workshops).where(eq(workshops.id, workshopId)).for('update')

export async function insertSession(
  tx: Reader,
  personId: string,
  workshopId: string,
  expiresAt: Date,
): Promise<string> {
  const [row] = await tx.insert(sessions).values({ personId, workshopId, expiresAt }).returning({ id: sessions.id })
  return row!.id
}

export const revokeSessions = (tx: Reader, personId: string, at: Date) =>
  tx
    .update(sessions)
    .set({ revokedAt: at })
    .where(and(eq(sessions.personId, personId), isNull(sessions.revokedAt)))

export const revokeSession = (tx: Reader, sessionId: string, at: Date) =>
  tx.update(sessions).set({ revokedAt: at }).where(eq(sessions.id, sessionId))

/** Takes a reset link once: null when it is unknown, used or expired. */
export async function takeReset(tx: Tx, secretHash: string, now: Date): Promise<string | null> {
  const [row] = await tx
    .update(passwordResets)
    .set({ usedAt: now })
    .where(
      and(eq(passwordResets.secretHash, secretHash), isNull(passwordResets.usedAt), gt(passwordResets.expiresAt, now)),
    )
    .returning({ personId: passwordResets.personId })
  return row?.personId ?? null
}

const openInvitation = (now: Date) =>
  and(isNull(invitations.usedAt), isNull(invitations.withdrawnAt), gt(invitations.expiresAt, now))

export async function invitationByHash(db: Reader, secretHash: string, now: Date) {
  const [row] = await db
    .select()
    .from(invitations)
    .where(and(eq(invitations.secretHash, secretHash), openInvitation(now)))
  return row ?? null
}

export async function takeInvitation(tx: Tx, invitationId: string, now: Date): Promise<boolean> {
  const rows = await tx
    .update(invitations)
    .set({ usedAt: now })
    .where(and(eq(invitations.id, invitationId), openInvitation(now)))
    .returning({ id: invitations.id })
  return rows.length === 1
}

export async function openInvitations(db: Reader, workshopId: string, now: Date) {
  return db
    .select({ invitation: invitations, invitedBy: people.name })
    .from(invitations)
    .innerJoin(people, eq(people.id, invitations.invitedById))
    .where(and(eq(invitations.workshopId, workshopId), openInvitation(now)))
    .orderBy(desc(invitations.createdAt))
}

export async function tokensOf(db: Reader, personId: string, workshopId: string) {
  return db
    .select()
    .from(accessTokens)
    .where(
      and(eq(accessTokens.personId, personId), eq(accessTokens.workshopId, workshopId), isNull(accessTokens.revokedAt)),
    )
    .orderBy(desc(accessTokens.createdAt))
}

export async function namesOf(db: Reader, ids: readonly string[]): Promise<ReadonlyMap<string, string>> {
  if (ids.length === 0) return new Map()
  const rows = await db
    .select({ id: people.id, name: people.name })
    .from(people)
    .where(inArray(people.id, [...ids]))
  return new Map(rows.map((row) => [row.id, row.name]))
}
