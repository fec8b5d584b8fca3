/** The reviews noun's SQL. */
import { and, asc, eq, isNull } from 'drizzle-orm'
import type { Reader } from '../../platform/db/client.ts'
import { people } from '../../platform/db/schema/accounts.ts'
import { comments, reviewMoves } from '../../platform/db/schema/reviews.ts'

export const commentsOf = (db: Reader, revisionId: string) =>
  db
    .select({ row: comments, author: people.name })
    .from(comments)
    .innerJoin(people, eq(people.id, comments.authorId))
    .where(eq(comments.revisionId, revisionId))
    .orderBy(asc(comments.createdAt))

export async function commentById(db: Reader, commentId: string) {
  const [row] = await db
    .select({ row: comments, author: people.name })
    .from(comments)
    .innerJoin(people, eq(people.id, comments.authorId))
    .where(eq(comments.id, commentId))
  return row ?? null
}

export async function hasOpenComment(db: Reader, revisionId: string, authorId: string): Promise<boolean> {
  const rows = await db
    .select({ id: comments.id })
    .from(comments)
    .where(and(eq(comments.revisionId, revisionId), eq(comments.authorId, authorId), isNull(comments.resolvedAt)))
    .limit(1)
  return rows.length > 0
}

export const movesOf = (db: Reader, revisionId: string) =>
  db
    .select({ move: reviewMoves.move, at: reviewMoves.createdAt, note: reviewMoves.note, who: people.name })
    .from(reviewMoves)
    .innerJoin(people, eq(people.id, reviewMoves.byId))
    .where(eq(reviewMoves.revisionId, revisionId))
    .orderBy(asc(reviewMoves.createdAt))
