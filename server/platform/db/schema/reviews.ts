/** Tables of the reviews noun: comments and the moves a revision went through. */
import { index, integer, pgTable, text, uuid } from 'drizzle-orm/pg-core'
import type { RevisionMove } from '../../../../shared/lifecycle.ts'
import { people } from './accounts.ts'
import { createdAt, id, instant } from './columns.ts'
import { revisions } from './tables.ts'

export const comments = pgTable(
  'comments',
  {
    id: id(),
    revisionId: uuid()
      .notNull()
      .references(() => revisions.id),
    cell: integer(),
    authorId: uuid()
      .notNull()
      .references(() => people.id),
    text: text().notNull(),
    /** Ids of the people it speaks to. */
    mentions: uuid().array().notNull().default([]),
    createdAt: createdAt(),
    resolvedAt: instant(),
    resolvedById: uuid().references(() => people.id),
  },
  (table) => [index().on(table.revisionId)],
)

export const reviewMoves = pgTable(
  'review_moves',
  {
    id: id(),
    revisionId: uuid()
      .notNull()
      .references(() => revisions.id),
    move: text().$type<RevisionMove>().notNull(),
    byId: uuid()
      .notNull()
      .references(() => people.id),
    note: text().notNull().default(''),
    /** For a sign-off: the cautions that were ticked, by their keys in shared/cautions.ts. */
    checklist: text().array().notNull().default([]),
    createdAt: createdAt(),
  },
  (table) => [index().on(table.revisionId)],
)
