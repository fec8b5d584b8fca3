/** Comments on a revision or its cells: adding, naming people, settling. */
import type { Comment } from '../../../shared/contract/reviews.ts'
import type { Revision } from '../../../shared/contract/tables.ts'
import type { Deps } from '../../deps.ts'
import { recordAudit } from '../../platform/audit/record.ts'
import type { Reader } from '../../platform/db/client.ts'
import { comments } from '../../platform/db/schema/reviews.ts'
import { scopeOf, type Actor } from '../../platform/http/actor.ts'
import { Problem } from '../../platform/http/problem.ts'
import { peopleWithRole } from '../accounts/service.ts'
import { tell } from '../notices/service.ts'
import { getRevision, holdState, revisionInScope } from '../tables/service.ts'
import { ownersOf, vehicleInScope } from '../vehicles/service.ts'
import { namesYou, wasCommented } from './facts.ts'
import * as store from './store.ts'

interface Named {
  readonly id: string
  readonly name: string
}

/** Who may read the revision and can therefore be spoken to: the workshop's tuners and reviewers, and owners who see it. */
export async function mentionable(db: Reader, actor: Actor, revision: Revision): Promise<Named[]> {
  const groups = [
    await peopleWithRole(db, actor.workshopId, 'tuner'),
    await peopleWithRole(db, actor.workshopId, 'reviewer'),
    revision.flashed || revision.state === 'signed' ? await ownersOf(db, revision.vehicleId) : [],
  ]
  const people = new Map(groups.flat().map(({ id, name }) => [id, { id, name }]))
  return [...people.values()].sort((a, b) => a.name.localeCompare(b.name))
}

/** "@" and the whole name; of two names where one begins with the other, the longer counts. */
export function mentionsIn(text: string, people: readonly Named[]): Named[] {
  let rest = text
  return people
    .toSorted((a, b) => b.name.length - a.name.length)
    .filter(({ name }) => {
      const found = rest.includes(`@${name}`)
      if (found) rest = rest.replaceAll(`@${name}`, ' ')
      return found
    })
}

export const toComment = ({ row, author, settler }: store.CommentFound, people: readonly Named[]): Comment => ({
  id: row.id,
  revisionId: row.revisionId,
  cell: row.cell,
  author: { id: row.authorId, name: author },
  at: row.createdAt.toISOString(),
  text: row.text,
  mentions: people.filter(({ id }) => row.mentions.includes(id)),
  resolvedAt: row.resolvedAt?.toISOString() ?? null,
  resolvedBy: settler,
})

export async function addComment(
  deps: Deps,
  actor: Actor,
  revisionId: string,
  input: { cell: number | null; text: string },
): Promise<Comment> {
  return deps.db.transaction(async (tx) => {
    // Held, so that nobody signs between this look and the comment.
    await holdState(tx, revisionId)
    const revision = await getRevision(tx, scopeOf(actor), revisionId)
    if (revision.state === 'signed') throw new Problem('revision-already-signed')
    if (input.cell !== null && input.cell >= revision.values.length)
      throw new Problem('input-invalid', { detail: 'There is no such cell.' })
    const people = await mentionable(tx, actor, revision)
    const named = mentionsIn(input.text, people).map(({ id }) => id)
    const earlier = (await store.commentsOf(tx, revisionId)).map(({ row }) => row.authorId)
    const [row] = await tx
      .insert(comments)
      .values({ revisionId, authorId: actor.personId, mentions: named, ...input })
      .returning()
    const { number, vehicleId } = revision
    await recordAudit(tx, actor, {
      action: 'comment.add',
      subject: `Revision ${number}`,
      vehicleId,
      facts: { revisionId, cell: input.cell },
    })
    const { name: vehicle } = await vehicleInScope(tx, scopeOf(actor), vehicleId)
    const about = { workshopId: actor.workshopId, vehicleId, revisionId, vehicle, number }
    const facts = { ...about, who: actor.name, note: input.text }
    const others = [revision.author.id, ...earlier].filter((id) => id !== actor.personId && !named.includes(id))
    await tell(deps, tx, others, wasCommented(facts))
    await tell(
      deps,
      tx,
      named.filter((id) => id !== actor.personId),
      namesYou(facts),
    )
    return toComment({ row: row!, author: actor.name, settler: null }, people)
  })
}

export async function resolveComment(deps: Deps, actor: Actor, commentId: string): Promise<Comment> {
  return deps.db.transaction(async (tx) => {
    const found = await store.commentById(tx, commentId)
    if (!found) throw new Problem('not-found')
    await holdState(tx, found.row.revisionId)
    const { row: revision } = await revisionInScope(tx, scopeOf(actor), found.row.revisionId)
    if (revision.state === 'signed') throw new Problem('revision-already-signed')
    if (found.row.authorId !== actor.personId && revision.authorId !== actor.personId)
      throw new Problem('not-allowed', {
        detail: 'A comment is settled by who made it or by the author of the revision.',
      })
    if (!(await store.settle(tx, commentId, actor.personId, deps.clock.now())))
      throw new Problem('changed-meanwhile', { detail: 'Somebody has settled this comment already.' })
    await recordAudit(tx, actor, {
      action: 'comment.settle',
      subject: `Revision ${revision.number}`,
      vehicleId: revision.vehicleId,
      facts: { commentId },
    })
    const people = await mentionable(tx, actor, await getRevision(tx, scopeOf(actor), revision.id))
    return toComment((await store.commentById(tx, commentId)) ?? found, people)
  })
}
