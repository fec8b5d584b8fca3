/** Use cases of the workshop's admin and of access tokens: people, roles, invitations, settings. */
import { and, eq, isNull } from 'drizzle-orm'
import type { AccessToken, Invitation, Person, Workshop } from '../../../shared/contract/accounts.ts'
import type { Role } from '../../../shared/access.ts'
import type { Deps } from '../../deps.ts'
import { recordAudit } from '../../platform/audit/record.ts'
import { accessTokens, invitations, memberships, sessions, workshops } from '../../platform/db/schema/accounts.ts'
import { vehicleOwners } from '../../platform/db/schema/vehicles.ts'
import type { Actor } from '../../platform/http/actor.ts'
import { Problem } from '../../platform/http/problem.ts'
import { enqueue } from '../../platform/queue/enqueue.ts'
import { hashSecret, newSecret } from './secrets.ts'
import { addPerson, startSession, type Started } from './service.ts'
import * as store from './store.ts'
import { countTry } from './tries.ts'

const weekMs = 7 * 86_400_000

export async function listPeople(deps: Deps, actor: Actor): Promise<Person[]> {
  const rows = await store.membersOf(deps.db, actor.workshopId)
  return rows.map((row) => ({ ...row, joinedAt: row.joinedAt.toISOString() }))
}

/** @throws Problem last-admin where the change would leave the workshop without one. */
async function keepAnAdmin(
  tx: Parameters<typeof store.lockWorkshop>[0],
  workshopId: string,
  personId: string,
  roles: readonly Role[],
): Promise<void> {
  await store.lockWorkshop(tx, workshopId)
  const others = (await store.membersOf(tx, workshopId)).filter((person) => person.id !== personId)
  if (!roles.includes('admin') && !others.some((person) => person.roles.includes('admin')))
    throw new Problem('last-admin')
}

export async function changeRoles(deps: Deps, actor: Actor, personId: string, roles: Role[]): Promise<Person> {
  return deps.db.transaction(async (tx) => {
    await keepAnAdmin(tx, actor.workshopId, personId, roles)
    const changed = await tx
      .update(memberships)
      .set({ roles })
      .where(and(eq(memberships.workshopId, actor.workshopId), eq(memberships.personId, personId)))
      .returning({ id: memberships.personId })
    if (changed.length === 0) throw new Problem('not-found')
    const person = (await store.membersOf(tx, actor.workshopId)).find((each) => each.id === personId)
    if (!person) throw new Problem('not-found')
    await recordAudit(tx, actor, { action: 'person.roles', subject: person.name, facts: { roles } })
    return { ...person, joinedAt: person.joinedAt.toISOString() }
  })
}

export async function removePerson(deps: Deps, actor: Actor, personId: string): Promise<void> {
  await deps.db.transaction(async (tx) => {
    await keepAnAdmin(tx, actor.workshopId, personId, [])
    const names = await store.namesOf(tx, [personId])
    const gone = await tx
      .delete(memberships)
      .where(and(eq(memberships.workshopId, actor.workshopId), eq(memberships.personId, personId)))
      .returning({ id: memberships.personId })
    if (gone.length === 0) throw new Problem('not-found')
    const now = deps.clock.now()
    await tx
      .update(sessions)
      .set({ revokedAt: now })
      .where(
        and(eq(sessions.personId, personId), eq(sessions.workshopId, actor.workshopId), isNull(sessions.revokedAt)),
      )
    await tx
      .update(accessTokens)
      .set({ revokedAt: now })
      .where(and(eq(accessTokens.personId, personId), eq(accessTokens.workshopId, actor.workshopId)))
    await recordAudit(tx, actor, { action: 'person.remove', subject: names.get(personId) ?? 'somebody' })
  })
}

const toInvitation = (row: typeof invitations.$inferSelect, invitedBy: string): Invitation => ({
  id: row.id,
  email: row.email,
  roles: row.roles as Role[],
  vehicleIds: row.vehicleIds,
  invitedBy,
  createdAt: row.createdAt.toISOString(),
  expiresAt: row.expiresAt.toISOString(),
})

export async function listInvitations(deps: Deps, actor: Actor): Promise<Invitation[]> {
  const rows = await store.openInvitations(deps.db, actor.workshopId, deps.clock.now())
  return rows.map(({ invitation, invitedBy }) => toInvitation(invitation, invitedBy))
}

export async function invite(
  deps: Deps,
  actor: Actor,
  input: { email: string; roles: Role[]; vehicleIds: string[] },
): Promise<Invitation> {
  const email = input.email.toLowerCase()
  return deps.db.transaction(async (tx) => {
    const members = await store.membersOf(tx, actor.workshopId)
    if (members.some((person) => person.email === email)) throw new Problem('already-a-member')
    const owned = await tx.query.vehicles.findMany({
      where: (table, { eq: is }) => is(table.workshopId, actor.workshopId),
    })
    if (!input.vehicleIds.every((id) => owned.some((vehicle) => vehicle.id === id))) throw new Problem('not-found')
    const [row] = await tx
      .insert(invitations)
      .values({
        workshopId: actor.workshopId,
        email,
        roles: input.roles,
        vehicleIds: input.vehicleIds,
        // Nobody knows this secret: the job that sends the mail makes the one that works.
        secretHash: hashSecret(newSecret()),
        invitedById: actor.personId,
        expiresAt: new Date(deps.clock.now().getTime() + weekMs),
      })
      .returning()
    await enqueue(tx, 'account.send-invitation', { invitationId: row!.id })
    await recordAudit(tx, actor, { action: 'person.invite', subject: email, facts: { roles: input.roles } })
    return toInvitation(row!, actor.name)
  })
}

export async function withdrawInvitation(deps: Deps, actor: Actor, invitationId: string): Promise<void> {
  await deps.db.transaction(async (tx) => {
    const rows = await tx
      .update(invitations)
      .set({ withdrawnAt: deps.clock.now() })
      .where(
        and(eq(invitations.id, invitationId), eq(invitations.workshopId, actor.workshopId), isNull(invitations.usedAt)),
      )
      .returning({ email: invitations.email })
    if (!rows[0]) throw new Problem('not-found')
    await recordAudit(tx, actor, { action: 'person.uninvite', subject: rows[0].email })
  })
}

const expired = () =>
  new Problem('link-expired', { detail: 'Ask for a new invitation; each works once, for seven days.' })

export async function readInvitation(deps: Deps, secret: string) {
  const invitation = await store.invitationByHash(deps.db, hashSecret(secret), deps.clock.now())
  if (!invitation) throw expired()
  const workshop = await store.workshopById(deps.db, invitation.workshopId)
  const person = await store.personByEmail(deps.db, invitation.email)
  return {
    workshopName: workshop.name,
    email: invitation.email,
    roles: invitation.roles as Role[],
    hasAccount: person !== null,
  }
}

export async function acceptInvitation(
  deps: Deps,
  secret: string,
  input: { name: string; password: string },
  address: string,
): Promise<Started> {
  await countTry(deps, [`invitation:${address}`])
  const now = deps.clock.now()
  const invitation = await store.invitationByHash(deps.db, hashSecret(secret), now)
  if (!invitation) throw expired()
  const known = await store.personByEmail(deps.db, invitation.email)
  if (known && !(await deps.crunch.checkPassword(input.password, known.passwordHash)))
    throw new Problem('sign-in-failed')
  const passwordHash = known ? '' : await deps.crunch.hashPassword(input.password)
  const roles = invitation.roles as Role[]
  return deps.db.transaction(async (tx) => {
    if (!(await store.takeInvitation(tx, invitation.id, now))) throw expired()
    const { workshopId, email } = invitation
    const personId = known?.id ?? (await addPerson(tx, workshopId, { name: input.name, email, passwordHash }, roles))
    if (known) await tx.insert(memberships).values({ workshopId, personId, roles }).onConflictDoNothing()
    for (const vehicleId of invitation.vehicleIds) {
      await tx.insert(vehicleOwners).values({ vehicleId, personId }).onConflictDoNothing()
    }
    const name = known?.name ?? input.name
    await recordAudit(tx, { personId, name, workshopId }, { action: 'person.join', subject: name, facts: { roles } })
    return startSession(deps, tx, personId, workshopId)
  })
}

export async function changeSettings(
  deps: Deps,
  actor: Actor,
  input: { name?: string | undefined; allowOwnSignOff?: boolean | undefined },
): Promise<Workshop> {
  return deps.db.transaction(async (tx) => {
    if (input.name !== undefined || input.allowOwnSignOff !== undefined) {
      await tx.update(workshops).set(input).where(eq(workshops.id, actor.workshopId))
      await recordAudit(tx, actor, {
        action: 'workshop.settings',
        subject: input.name ?? 'Workshop',
        facts: { ...input },
      })
    }
    return store.workshopById(tx, actor.workshopId)
  })
}

const toToken = (row: typeof accessTokens.$inferSelect): AccessToken => ({
  id: row.id,
  label: row.label,
  role: row.role as Role,
  createdAt: row.createdAt.toISOString(),
  lastUsedAt: row.lastUsedAt?.toISOString() ?? null,
})

export async function listTokens(deps: Deps, actor: Actor): Promise<AccessToken[]> {
  return (await store.tokensOf(deps.db, actor.personId, actor.workshopId)).map(toToken)
}

export async function createToken(deps: Deps, actor: Actor, input: { label: string; role: Role }) {
  if (!actor.roles.includes(input.role)) throw new Problem('token-scope', { detail: `You are not ${input.role} here.` })
  // A token must not be able to make its own successor: only a signed-in person may.
  if (actor.sessionId === null)
    throw new Problem('not-allowed', { detail: 'Access tokens are made on the page, signed in.' })
  const secret = newSecret('evb_')
  return deps.db.transaction(async (tx) => {
    const [row] = await tx
      .insert(accessTokens)
      .values({ personId: actor.personId, workshopId: actor.workshopId, secretHash: hashSecret(secret), ...input })
      .returning()
    await recordAudit(tx, actor, { action: 'token.create', subject: input.label, facts: { role: input.role } })
    return { token: toToken(row!), secret }
  })
}

export async function revokeToken(deps: Deps, actor: Actor, tokenId: string): Promise<void> {
  await deps.db.transaction(async (tx) => {
    const rows = await tx
      .update(accessTokens)
      .set({ revokedAt: deps.clock.now() })
      .where(
        and(
          eq(accessTokens.id, tokenId),
          eq(accessTokens.personId, actor.personId),
          eq(accessTokens.workshopId, actor.workshopId),
          isNull(accessTokens.revokedAt),
        ),
      )
      .returning({ label: accessTokens.label })
    if (!rows[0]) throw new Problem('not-found')
    await recordAudit(tx, actor, { action: 'token.revoke', subject: rows[0].label })
  })
}
