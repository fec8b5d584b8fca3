/** Use cases of review: submit, withdraw, comment, settle, sign off, send back. */
import { eq } from 'drizzle-orm'
import type { Comment, Review } from '../../../shared/contract/reviews.ts'
import type { Revision } from '../../../shared/contract/tables.ts'
import { can } from '../../../shared/access.ts'
import { isLegal, type RevisionMove } from '../../../shared/lifecycle.ts'
import type { Deps } from '../../deps.ts'
import { recordAudit } from '../../platform/audit/record.ts'
import type { Reader, Tx } from '../../platform/db/client.ts'
import { comments, reviewMoves } from '../../platform/db/schema/reviews.ts'
import { scopeOf, type Actor } from '../../platform/http/actor.ts'
import { Problem } from '../../platform/http/problem.ts'
import { enqueueMail, type Message } from '../../platform/mail/send.ts'
import { peopleWithRole, workshopSettings } from '../accounts/service.ts'
import { getRevision, moveRevision, revisionInScope } from '../tables/service.ts'
import { ownersOf, vehicleInScope } from '../vehicles/service.ts'
import { lookFirst } from './look-first.ts'
import { commentMessage, sentBackMessage, signedMessage, submittedMessage, type RevisionFacts } from './messages.ts'
import * as store from './store.ts'

const toComment = ({ row, author }: { row: typeof comments.$inferSelect; author: string }): Comment => ({
  id: row.id,
  revisionId: row.revisionId,
  cell: row.cell,
  author: { id: row.authorId, name: author },
  at: row.createdAt.toISOString(),
  text: row.text,
  resolvedAt: row.resolvedAt?.toISOString() ?? null,
})

/** Why this person may not sign, in words; null when they may. */
async function whyNotSign(db: Reader, actor: Actor, revision: Revision): Promise<string | null> {
  if (!can(actor.roles, 'revision:sign-off')) return 'Your role does not include signing.'
  if (revision.state !== 'submitted') return null
  const own = revision.author.id === actor.personId
  const settings = await workshopSettings(db, actor.workshopId)
  if (own && !settings.allowOwnSignOff) return 'You prepared this revision, so someone else must sign it.'
  if (!own && !actor.roles.includes('reviewer')) return 'Signing belongs to reviewers.'
  if (await store.hasOpenComment(db, revision.id, actor.personId))
    return 'You can sign once your own comment is settled.'
  return null
}

export async function getReview(deps: Deps, actor: Actor, revisionId: string): Promise<Review> {
  const { db } = deps
  const revision = await getRevision(db, scopeOf(actor), revisionId)
  const reason = await whyNotSign(db, actor, revision)
  const own = revision.author.id === actor.personId
  const reviewer = actor.roles.includes('reviewer')
  const may = (move: RevisionMove) => isLegal(move, revision.state)
  const history = await store.movesOf(db, revisionId)
  return {
    revisionId,
    lookFirst: lookFirst(revision),
    comments: (await store.commentsOf(db, revisionId)).map(toComment),
    history: history.map(({ at, who, move, note }) => ({
      at: at.toISOString(),
      who,
      move: move.replace('-', ' '),
      note,
    })),
    may: {
      submit: may('submit') && can(actor.roles, 'revision:submit') && revision.parentId !== null,
      withdraw: may('withdraw') && can(actor.roles, 'revision:submit'),
      signOff: may('sign-off') && reason === null,
      sendBack: may('send-back') && reviewer,
      comment: revision.state !== 'signed',
    },
    whyNotSign: reason,
    signsOwn: own && may('sign-off') && reason === null,
  }
}

/** One move: the state, the record of it, the audit line and the mails, together or not at all. */
async function move(
  deps: Deps,
  tx: Tx,
  actor: Actor,
  revision: Revision,
  kind: RevisionMove,
  note: string,
  patch: Parameters<typeof moveRevision>[3] = {},
): Promise<RevisionFacts> {
  const row = await moveRevision(tx, revision.id, kind, patch)
  await tx.insert(reviewMoves).values({ revisionId: revision.id, move: kind, byId: actor.personId, note })
  await recordAudit(tx, actor, {
    action: `revision.${kind}`,
    subject: `Revision ${row.number}`,
    vehicleId: row.vehicleId,
    facts: { revisionId: row.id, checksum: row.checksum, note },
  })
  const vehicle = await vehicleInScope(tx, scopeOf(actor), row.vehicleId)
  const url = `${deps.config.publicUrl}/vehicles/${row.vehicleId}/revisions/${row.id}`
  return { vehicle: vehicle.name, number: row.number, who: actor.name, note, url }
}

async function tell(
  tx: Tx,
  actor: Actor,
  people: readonly { id: string; email: string }[],
  message: Message,
): Promise<void> {
  const told = new Set<string>([actor.personId])
  for (const person of people) {
    if (told.has(person.id)) continue
    told.add(person.id)
    await enqueueMail(tx, person.email, message)
  }
}

async function authorOf(tx: Tx, actor: Actor, revision: Revision) {
  const all = await peopleWithRole(tx, actor.workshopId, 'tuner')
  return all.filter((person) => person.id === revision.author.id)
}

export async function submit(deps: Deps, actor: Actor, revisionId: string, note: string): Promise<Revision> {
  return deps.db.transaction(async (tx) => {
    const revision = await getRevision(tx, scopeOf(actor), revisionId)
    const facts = await move(deps, tx, actor, revision, 'submit', note, { submittedAt: deps.clock.now() })
    await tell(tx, actor, await peopleWithRole(tx, actor.workshopId, 'reviewer'), submittedMessage(facts))
    return getRevision(tx, scopeOf(actor), revisionId)
  })
}

export async function withdraw(deps: Deps, actor: Actor, revisionId: string): Promise<Revision> {
  return deps.db.transaction(async (tx) => {
    const revision = await getRevision(tx, scopeOf(actor), revisionId)
    await move(deps, tx, actor, revision, 'withdraw', '')
    return getRevision(tx, scopeOf(actor), revisionId)
  })
}

export async function signOff(
  deps: Deps,
  actor: Actor,
  revisionId: string,
  input: { name: string; checksum: string; note: string },
): Promise<Revision> {
  return deps.db.transaction(async (tx) => {
    const revision = await getRevision(tx, scopeOf(actor), revisionId)
    if (revision.state === 'signed') throw new Problem('revision-already-signed')
    const reason = await whyNotSign(tx, actor, revision)
    if (reason) {
      const own = revision.author.id === actor.personId
      throw new Problem(reason.includes('comment') ? 'comments-open' : own ? 'own-revision' : 'not-allowed', {
        detail: reason,
      })
    }
    if (input.name !== actor.name) {
      throw new Problem('input-invalid', {
        detail: `Type your name as it stands: ${actor.name}.`,
        errors: [{ detail: `Type your name as it stands: ${actor.name}.`, pointer: '#/name' }],
      })
    }
    if (input.checksum !== revision.checksum)
      throw new Problem('changed-meanwhile', { detail: 'What you looked at is not this revision. Load it again.' })
    const facts = await move(deps, tx, actor, revision, 'sign-off', input.note, {
      signedById: actor.personId,
      signedAt: deps.clock.now(),
      signatureName: input.name,
      signatureNote: input.note,
    })
    await tell(
      tx,
      actor,
      [...(await authorOf(tx, actor, revision)), ...(await ownersOf(tx, revision.vehicleId))],
      signedMessage(facts),
    )
    return getRevision(tx, scopeOf(actor), revisionId)
  })
}

export async function sendBack(deps: Deps, actor: Actor, revisionId: string, note: string): Promise<Revision> {
  return deps.db.transaction(async (tx) => {
    const revision = await getRevision(tx, scopeOf(actor), revisionId)
    if (!actor.roles.includes('reviewer'))
      throw new Problem('not-allowed', {
        detail: 'Sending back belongs to reviewers; an author takes it back instead.',
      })
    const facts = await move(deps, tx, actor, revision, 'send-back', note)
    await tell(tx, actor, await authorOf(tx, actor, revision), sentBackMessage(facts))
    return getRevision(tx, scopeOf(actor), revisionId)
  })
}

export async function addComment(
  deps: Deps,
  actor: Actor,
  revisionId: string,
  input: { cell: number | null; text: string },
): Promise<Comment> {
  return deps.db.transaction(async (tx) => {
    const revision = await getRevision(tx, scopeOf(actor), revisionId)
    if (revision.state === 'signed') throw new Problem('revision-already-signed')
    if (input.cell !== null && input.cell >= revision.values.length)
      throw new Problem('input-invalid', { detail: 'There is no such cell.' })
    const [row] = await tx
      .insert(comments)
      .values({ revisionId, authorId: actor.personId, ...input })
      .returning()
    await recordAudit(tx, actor, {
      action: 'comment.add',
      subject: `Revision ${revision.number}`,
      vehicleId: revision.vehicleId,
      facts: { revisionId, cell: input.cell },
    })
    const vehicle = await vehicleInScope(tx, scopeOf(actor), revision.vehicleId)
    const url = `${deps.config.publicUrl}/vehicles/${revision.vehicleId}/revisions/${revisionId}`
    await tell(
      tx,
      actor,
      await authorOf(tx, actor, revision),
      commentMessage({ vehicle: vehicle.name, number: revision.number, who: actor.name, note: input.text, url }),
    )
    return toComment({ row: row!, author: actor.name })
  })
}

export async function resolveComment(deps: Deps, actor: Actor, commentId: string): Promise<Comment> {
  return deps.db.transaction(async (tx) => {
    const found = await store.commentById(tx, commentId)
    if (!found) throw new Problem('not-found')
    const { row: revision } = await revisionInScope(tx, scopeOf(actor), found.row.revisionId)
    if (revision.state === 'signed') throw new Problem('revision-already-signed')
    if (found.row.authorId !== actor.personId && revision.authorId !== actor.personId)
      throw new Problem('not-allowed', {
        detail: 'A comment is settled by who made it or by the author of the revision.',
      })
    const [row] = await tx
      .update(comments)
      .set({ resolvedAt: deps.clock.now(), resolvedById: actor.personId })
      .where(eq(comments.id, commentId))
      .returning()
    await recordAudit(tx, actor, {
      action: 'comment.settle',
      subject: `Revision ${revision.number}`,
      vehicleId: revision.vehicleId,
      facts: { commentId },
    })
    return toComment({ row: row!, author: found.author })
  })
}
