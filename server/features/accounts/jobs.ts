/**
 * Mails whose link is a secret. The secret is made when the mail goes out, so that no job, backup or log of the queue ever
 * holds a link that works; tried again, a fresh link replaces the one that may not have arrived.
 */
import { and, eq, gt, isNull } from 'drizzle-orm'
import { z } from 'zod'
import type { Deps } from '../../deps.ts'
import { invitations, passwordResets, people, workshops } from '../../platform/db/schema/accounts.ts'
import { sendMail } from '../../platform/mail/send.ts'
import type { JobDefinition } from '../../platform/queue/run.ts'
import { invitationMessage, resetMessage } from './messages.ts'
import { hashSecret, newSecret } from './secrets.ts'

async function sendReset(deps: Deps, resetId: string): Promise<void> {
  const secret = newSecret()
  const [row] = await deps.db
    .update(passwordResets)
    .set({ secretHash: hashSecret(secret) })
    .from(people)
    .where(
      and(
        eq(passwordResets.id, resetId),
        eq(people.id, passwordResets.personId),
        isNull(passwordResets.usedAt),
        gt(passwordResets.expiresAt, deps.clock.now()),
      ),
    )
    .returning({ name: people.name, email: people.email })
  if (!row) return
  const url = `${deps.config.publicUrl}/reset/${secret}`
  await sendMail(deps, { to: row.email, ...resetMessage(row.name, url) })
}

async function sendInvitation(deps: Deps, invitationId: string): Promise<void> {
  const secret = newSecret()
  const [row] = await deps.db
    .update(invitations)
    .set({ secretHash: hashSecret(secret) })
    .where(
      and(
        eq(invitations.id, invitationId),
        isNull(invitations.usedAt),
        isNull(invitations.withdrawnAt),
        gt(invitations.expiresAt, deps.clock.now()),
      ),
    )
    .returning()
  if (!row) return
  const [inviter] = await deps.db.select().from(people).where(eq(people.id, row.invitedById))
  const [workshop] = await deps.db.select().from(workshops).where(eq(workshops.id, row.workshopId))
  const message = invitationMessage({
    inviter: inviter!.name,
    workshop: workshop!.name,
    roles: row.roles.join(' and '),
    url: `${deps.config.publicUrl}/invitation/${secret}`,
  })
  await sendMail(deps, { to: row.email, ...message })
}

const Reset = z.object({ resetId: z.uuid() })
const Invited = z.object({ invitationId: z.uuid() })

export const accountJobs: readonly JobDefinition[] = [
  { name: 'account.send-reset', handle: async (deps, payload) => sendReset(deps, Reset.parse(payload).resetId) },
  {
    name: 'account.send-invitation',
    handle: async (deps, payload) => sendInvitation(deps, Invited.parse(payload).invitationId),
  },
]
