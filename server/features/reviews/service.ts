/** Use cases of review: what the reviewer sees, and the moves submit, withdraw, sign off, send back. */
import type { ChecklistKey } from '../../../shared/cautions.ts'
import type { Review } from '../../../shared/contract/reviews.ts'
import type { Revision } from '../../../shared/contract/tables.ts'
import { can } from '../../../shared/access.ts'
import { isLegal, type RevisionMove } from '../../../shared/lifecycle.ts'
import type { Deps } from '../../deps.ts'
import { recordAudit } from '../../platform/audit/record.ts'
import type { Reader, Tx } from '../../platform/db/client.ts'
import { reviewMoves } from '../../platform/db/schema/reviews.ts'
import { scopeOf, type Actor } from '../../platform/http/actor.ts'
import { Problem } from '../../platform/http/problem.ts'
import { peopleWithRole, workshopSettings } from '../accounts/service.ts'
import { tell, type Fact } from '../notices/service.ts'
import { getRevision, isIntact, linesOf, moveRevision } from '../tables/service.ts'
import { ownersOf, vehicleInScope } from '../vehicles/service.ts'
import { mentionable, toComment } from './comments.ts'
import { reviewAsked, wasSentBack, wasSigned, type RevisionFacts } from './facts.ts'
import { changeSummary, lookFirst } from './look-first.ts'
import * as store from './store.ts'

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

async function historyOf(db: Reader, revisionId: string): Promise<Review['history']> {
  const moves = await store.movesOf(db, revisionId)
  return moves.map(({ at, who, move, note, checklist }) => ({
    at: at.toISOString(),
    who,
    move: move.replace('-', ' '),
    note,
    ticked: move === 'sign-off' ? checklist.length : null,
  }))
}

async function besideOf(db: Reader, actor: Actor, { id, parentId, vehicleId, kind }: Revision) {
  if (parentId === null) return []
  const lines = await linesOf(db, scopeOf(actor), vehicleId, kind)
  return lines
    .filter((line) => line.parentId === parentId && line.id !== id)
    .map((line) => ({ id: line.id, number: line.number }))
    .sort((a, b) => a.number - b.number)
}

export async function getReview(deps: Deps, actor: Actor, revisionId: string): Promise<Review> {
  const { db } = deps
  const revision = await getRevision(db, scopeOf(actor), revisionId)
  const reason = await whyNotSign(db, actor, revision)
  const own = revision.author.id === actor.personId
  const may = (move: RevisionMove) => isLegal(move, revision.state)
  const people = await mentionable(db, actor, revision)
  return {
    revisionId,
    lookFirst: lookFirst(revision),
    summary: changeSummary(revision),
    intact: isIntact(revision),
    comments: (await store.commentsOf(db, revisionId)).map((found) => toComment(found, people)),
    beside: await besideOf(db, actor, revision),
    mentionable: people,
    history: await historyOf(db, revisionId),
    may: {
      submit: may('submit') && can(actor.roles, 'revision:submit') && revision.parentId !== null,
      withdraw: may('withdraw') && can(actor.roles, 'revision:submit'),
      signOff: may('sign-off') && reason === null,
      sendBack: may('send-back') && actor.roles.includes('reviewer'),
      comment: revision.state !== 'signed' && can(actor.roles, 'revision:comment'),
    },
    whyNotSign: reason,
    signsOwn: own && may('sign-off') && reason === null,
  }
}

interface Move {
  readonly kind: RevisionMove
  readonly note: string
  readonly checklist?: readonly ChecklistKey[]
  readonly patch?: Parameters<typeof moveRevision>[3]
  readonly tells?: (facts: RevisionFacts) => Fact
  readonly whom?: Iterable<string>
}

/** One move: the state, the record of it, the audit line and the notices, together or not at all. */
async function move(deps: Deps, tx: Tx, actor: Actor, revision: Revision, step: Move): Promise<Revision> {
  const { kind, note, checklist = [], patch = {}, tells, whom = [] } = step
  const row = await moveRevision(tx, revision.id, kind, patch)
  await tx
    .insert(reviewMoves)
    .values({ revisionId: revision.id, move: kind, byId: actor.personId, note, checklist: [...checklist] })
  await recordAudit(tx, actor, {
    action: `revision.${kind}`,
    subject: `Revision ${row.number}`,
    vehicleId: row.vehicleId,
    facts: { revisionId: row.id, checksum: row.checksum, note, ...(kind === 'sign-off' ? { checklist } : {}) },
  })
  if (tells) {
    const { name } = await vehicleInScope(tx, scopeOf(actor), row.vehicleId)
    const facts = { workshopId: actor.workshopId, vehicleId: row.vehicleId, revisionId: row.id, vehicle: name }
    const others = [...whom].filter((id) => id !== actor.personId)
    await tell(deps, tx, others, tells({ ...facts, number: row.number, who: actor.name, note }))
  }
  return getRevision(tx, scopeOf(actor), revision.id)
}

export async function submit(deps: Deps, actor: Actor, revisionId: string, note: string): Promise<Revision> {
  return deps.db.transaction(async (tx) => {
    const revision = await getRevision(tx, scopeOf(actor), revisionId)
    const reviewers = await peopleWithRole(tx, actor.workshopId, 'reviewer')
    return move(deps, tx, actor, revision, {
      kind: 'submit',
      note,
      patch: { submittedAt: deps.clock.now() },
      tells: reviewAsked,
      whom: reviewers.map(({ id }) => id),
    })
  })
}

export async function withdraw(deps: Deps, actor: Actor, revisionId: string): Promise<Revision> {
  return deps.db.transaction(async (tx) => {
    const revision = await getRevision(tx, scopeOf(actor), revisionId)
    return move(deps, tx, actor, revision, { kind: 'withdraw', note: '' })
  })
}

interface Signing {
  readonly name: string
  readonly checksum: string
  readonly note: string
  readonly checklist?: readonly ChecklistKey[] | undefined
}

/** @throws Problem where this person may not sign, or what they looked at is not what would be signed. */
async function mustBeSignable(db: Reader, actor: Actor, revision: Revision, input: Signing): Promise<void> {
  if (revision.state === 'signed') throw new Problem('revision-already-signed')
  const reason = await whyNotSign(db, actor, revision)
  if (reason) {
    const own = revision.author.id === actor.personId
    throw new Problem(reason.includes('comment') ? 'comments-open' : own ? 'own-revision' : 'not-allowed', {
      detail: reason,
    })
  }
  if (input.name !== actor.name) {
    const detail = `Type your name as it stands: ${actor.name}.`
    throw new Problem('input-invalid', { detail, errors: [{ detail, pointer: '#/name' }] })
  }
  if (input.checksum !== revision.checksum)
    throw new Problem('changed-meanwhile', { detail: 'What you looked at is not this revision. Load it again.' })
  if (!isIntact(revision))
    throw new Problem('changed-meanwhile', { detail: 'The stored cells do not give the checksum. Nothing was signed.' })
}

export async function signOff(deps: Deps, actor: Actor, revisionId: string, input: Signing): Promise<Revision> {
  return deps.db.transaction(async (tx) => {
    const revision = await getRevision(tx, scopeOf(actor), revisionId)
    await mustBeSignable(tx, actor, revision, input)
    const owners = await ownersOf(tx, revision.vehicleId)
    return move(deps, tx, actor, revision, {
      kind: 'sign-off',
      note: input.note,
      checklist: [...new Set(input.checklist ?? [])],
      patch: {
        signedById: actor.personId,
        signedAt: deps.clock.now(),
        signatureName: input.name,
        signatureNote: input.note,
      },
      tells: wasSigned,
      whom: [revision.author.id, ...owners.map(({ id }) => id)],
    })
  })
}

export async function sendBack(deps: Deps, actor: Actor, revisionId: string, note: string): Promise<Revision> {
  return deps.db.transaction(async (tx) => {
    const revision = await getRevision(tx, scopeOf(actor), revisionId)
    if (!actor.roles.includes('reviewer'))
      throw new Problem('not-allowed', {
        detail: 'Sending back belongs to reviewers; an author takes it back instead.',
      })
    return move(deps, tx, actor, revision, {
      kind: 'send-back',
      note,
      tells: wasSentBack,
      whom: [revision.author.id],
    })
  })
}
