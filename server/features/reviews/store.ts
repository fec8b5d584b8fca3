/** The reviews noun's SQL. */
import { aliasedTable, and, asc, count, eq, inArray, isNull } from 'drizzle-orm'
import type { Reader, Tx } from '../../platform/db/client.ts'
import { people } from '../../platform/db/schema/accounts.ts'
import { comments, reviewMoves } from '../../platform/db/schema/reviews.ts'

const settlers = aliasedTable(people, 'settlers')

const found = (db: Reader) =>
  db
    .select({ row: comments, author: people.name, settler: settlers.name })
    .from(comments)
    .innerJoin(people, eq(people.id, comments.authorId))
    .leftJoin(settlers, eq(settlers.id, comments.resolvedById))

export interface CommentFound {
  readonly row: typeof comments.$inferSelect
  readonly author: string
  readonly settler: string | null
}

export const commentsOf = (db: Reader, revisionId: string): Promise<CommentFound[]> =>
  found(db).where(eq(comments.revisionId, revisionId)).orderBy(asc(comments.createdAt))

export async function commentById(db: Reader, commentId: string): Promise<CommentFound | null> {
  const [row] = await found(db).where(eq(comments.id, commentId))
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

export async function openCommentCounts(db: Reader, revisionIds: readonly string[]): Promise<Map<string, number>> {
  const rows = await db
    .select({ revisionId: comments.revisionId, n: count() })
    .from(comments)
    .where(and(inArray(comments.revisionId, [...revisionIds]), isNull(comments.resolvedAt)))
    .groupBy(comments.revisionId)
  return new Map(rows.map(({ revisionId, n }) => [revisionId, n]))
}

/** Settles once; false when somebody was quicker. */
export async function settle(tx: Tx, commentId: string, personId: string, at: Date): Promise<boolean> {
  const rows = await tx
    .update(comments)
    .set({ resolvedAt: at, resolvedById: personId })
    .where(and(eq(comments.id, commentId), isNull(comments.resolvedAt)))
    .returning({ id: comments.id })
  return rows.length === 1
}

export const movesOf = (db: Reader, revisionId: string) =>
  db
    .select({
      move: reviewMoves.move,
      at: reviewMoves.createdAt,
      note: reviewMoves.note,
      checklist: reviewMoves.checklist,
      who: people.name,
    })
    .from(reviewMoves)
    .innerJoin(people, eq(people.id, reviewMoves.byId))
    .where(eq(reviewMoves.revisionId, revisionId))
    .orderBy(asc(reviewMoves.createdAt))
