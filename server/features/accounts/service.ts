/** Use cases of people signing in and out, passwords, and who they are. */
import { eq } from 'drizzle-orm'
import type { Me } from '../../../shared/contract/accounts.ts'
import type { Role } from '../../../shared/access.ts'
import type { Deps } from '../../deps.ts'
import { recordAudit } from '../../platform/audit/record.ts'
import type { Reader, Tx } from '../../platform/db/client.ts'
import { demoMails } from '../../platform/db/schema/mail.ts'
import { memberships, passwordResets, people, sessions, workshops } from '../../platform/db/schema/accounts.ts'
import type { Actor } from '../../platform/http/actor.ts'
import { Problem } from '../../platform/http/problem.ts'
import { enqueueMail } from '../../platform/mail/send.ts'
import { enqueue } from '../../platform/queue/enqueue.ts'
import { sessionDays } from './identify.ts'
import { passwordChangedMessage } from './messages.ts'
import { hashSecret, newSecret } from './secrets.ts'
import * as store from './store.ts'
import { clearTries, countTry } from './tries.ts'

export { namesOf, workshopById as workshopSettings } from './store.ts'

/** Compared against when the account does not exist, so that both answers take as long. */
const nobodysHash = '$2b$12$CwTycUXWue0Thq9StjUM0uJ8Y4kQ3c9mB1YVdKkQh8cJw8yq0nXeK'
const hourMs = 3_600_000

export interface Started {
  readonly sessionId: string
  readonly me: Me
}

export async function describeMe(deps: Deps, actor: Actor, db: Reader = deps.db): Promise<Me> {
  return {
    person: { id: actor.personId, name: actor.name, email: actor.email },
    workshop: await store.workshopById(db, actor.workshopId),
    roles: [...actor.roles],
    workshops: await store.workshopsOf(db, actor.personId),
    demo: deps.config.demo,
  }
}

export async function startSession(deps: Deps, tx: Tx, personId: string, workshopId: string): Promise<Started> {
  const expiresAt = new Date(deps.clock.now().getTime() + sessionDays * 24 * hourMs)
  const sessionId = await store.insertSession(tx, personId, workshopId, expiresAt)
  const actor = await store.actorOfSession(tx, sessionId, deps.clock.now())
  if (!actor) throw new Problem('not-signed-in')
  return { sessionId, me: await describeMe(deps, actor, tx) }
}

export async function signIn(
  deps: Deps,
  input: { email: string; password: string },
  address: string,
): Promise<Started> {
  const account = `sign-in:${hashSecret(input.email.toLowerCase())}`
  await countTry(deps, [account, `sign-in-from:${address}`])
  const person = await store.personByEmail(deps.db, input.email)
  const matches = await deps.crunch.checkPassword(input.password, person?.passwordHash ?? nobodysHash)
  if (!person || !matches) throw new Problem('sign-in-failed')
  const [workshop] = await store.workshopsOf(deps.db, person.id)
  if (!workshop) throw new Problem('not-allowed', { detail: 'You are not a member of any workshop at the moment.' })
  await clearTries(deps, account)
  await clearTries(deps, `sign-in-from:${address}`)
  return deps.db.transaction(async (tx) => {
    const started = await startSession(deps, tx, person.id, workshop.id)
    await recordAudit(
      tx,
      { personId: person.id, name: person.name, workshopId: workshop.id },
      { action: 'session.start', subject: person.name },
    )
    return started
  })
}

export async function signOut(deps: Deps, actor: Actor): Promise<void> {
  if (actor.sessionId) await store.revokeSession(deps.db, actor.sessionId, deps.clock.now())
}

export async function signOutEverywhere(deps: Deps, actor: Actor): Promise<void> {
  await deps.db.transaction(async (tx) => {
    await store.revokeSessions(tx, actor.personId, deps.clock.now())
    await recordAudit(tx, actor, { action: 'session.end-all', subject: actor.name })
  })
}

export async function changeWorkshop(deps: Deps, actor: Actor, workshopId: string): Promise<Me> {
  const mine = await store.workshopsOf(deps.db, actor.personId)
  if (!actor.sessionId || !mine.some((workshop) => workshop.id === workshopId)) throw new Problem('not-found')
  await deps.db.update(sessions).set({ workshopId }).where(eq(sessions.id, actor.sessionId))
  const there = await store.actorOfSession(deps.db, actor.sessionId, deps.clock.now())
  if (!there) throw new Problem('not-found')
  return describeMe(deps, there)
}

/** Says nothing of whether the account exists. */
export async function askPasswordReset(deps: Deps, email: string, address: string): Promise<void> {
  await countTry(deps, [`reset:${hashSecret(email.toLowerCase())}`, `reset-from:${address}`])
  const person = await store.personByEmail(deps.db, email)
  if (!person) return
  await deps.db.transaction(async (tx) => {
    const [row] = await tx
      .insert(passwordResets)
      .values({
        personId: person.id,
        // Nobody knows this secret: the job that sends the mail makes the one that works.
        secretHash: hashSecret(newSecret()),
        expiresAt: new Date(deps.clock.now().getTime() + hourMs),
      })
      .returning({ id: passwordResets.id })
    await enqueue(tx, 'account.send-reset', { resetId: row!.id })
  })
}

export async function resetPassword(deps: Deps, secret: string, password: string, address: string): Promise<void> {
  await countTry(deps, [`reset-use:${address}`])
  const passwordHash = await deps.crunch.hashPassword(password)
  await deps.db.transaction(async (tx) => {
    const personId = await store.takeReset(tx, hashSecret(secret), deps.clock.now())
    if (!personId) throw new Problem('link-expired', { detail: 'Ask for a new link; each works once, for one hour.' })
    const [person] = await tx.update(people).set({ passwordHash }).where(eq(people.id, personId)).returning()
    await store.revokeSessions(tx, personId, deps.clock.now())
    await enqueueMail(tx, person!.email, passwordChangedMessage(person!.name))
    for (const workshop of await store.workshopsOf(tx, personId)) {
      await recordAudit(
        tx,
        { personId, name: person!.name, workshopId: workshop.id },
        { action: 'password.reset', subject: person!.name },
      )
    }
  })
}

export const setupNeeded = async (deps: Deps): Promise<boolean> => (await store.countWorkshops(deps.db)) === 0

export interface NewPerson {
  readonly name: string
  readonly email: string
  readonly passwordHash: string
}

/** Makes a workshop with its first person, who is admin, tuner, owner and reviewer in one. */
export async function foundWorkshop(
  tx: Tx,
  workshopName: string,
  person: NewPerson,
  roles: readonly Role[] = ['admin', 'tuner', 'reviewer', 'owner'],
  allowOwnSignOff = true,
) {
  const [workshop] = await tx.insert(workshops).values({ name: workshopName, allowOwnSignOff }).returning()
  const personId = await addPerson(tx, workshop!.id, person, roles)
  await recordAudit(
    tx,
    { personId, name: person.name, workshopId: workshop!.id },
    { action: 'workshop.found', subject: workshopName },
  )
  return { workshopId: workshop!.id, personId }
}

export async function addPerson(
  tx: Tx,
  workshopId: string,
  person: NewPerson,
  roles: readonly Role[],
): Promise<string> {
  const [row] = await tx
    .insert(people)
    .values({ ...person, email: person.email.toLowerCase() })
    .returning({ id: people.id })
  await tx.insert(memberships).values({ workshopId, personId: row!.id, roles: [...roles] })
  return row!.id
}

export async function setUp(
  deps: Deps,
  input: { workshopName: string; name: string; email: string; password: string },
): Promise<Started> {
  const passwordHash = await deps.crunch.hashPassword(input.password)
  return deps.db.transaction(async (tx) => {
    // Two first visits at once: the second waits here and then finds a workshop.
    await tx.execute('lock table workshops in exclusive mode')
    if ((await store.countWorkshops(tx)) > 0) throw new Problem('already-set-up')
    const { name, email } = input
    const { workshopId, personId } = await foundWorkshop(tx, input.workshopName, { name, email, passwordHash })
    return startSession(deps, tx, personId, workshopId)
  })
}

/** Members of the workshop who hold the role. */
export async function peopleWithRole(db: Reader, workshopId: string, role: Role) {
  return (await store.membersOf(db, workshopId)).filter((person) => person.roles.includes(role))
}

export async function listDemoMails(deps: Deps) {
  if (!deps.config.demoMailbox) throw new Problem('not-found')
  const rows = await deps.db.query.demoMails.findMany({
    orderBy: (table, { desc }) => desc(table.createdAt),
    limit: 100,
  })
  return rows.map((row: typeof demoMails.$inferSelect) => ({
    id: row.id,
    at: row.createdAt.toISOString(),
    to: row.recipient,
    subject: row.subject,
    text: row.text,
    html: row.html,
  }))
}
