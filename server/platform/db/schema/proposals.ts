/** Tables of the proposals noun: frozen inputs, the learned surface, decisions. */
import { boolean, doublePrecision, integer, jsonb, pgTable, primaryKey, text, unique, uuid } from 'drizzle-orm/pg-core'
import type { Proposal } from '../../../../shared/contract/proposals.ts'
import type { CellDecision, ProposalState } from '../../../../shared/lifecycle.ts'
import { people } from './accounts.ts'
import { bytes, createdAt, id, instant } from './columns.ts'
import { logs } from './logs.ts'
import { revisions } from './tables.ts'
import { vehicles } from './vehicles.ts'

export const proposals = pgTable(
  'proposals',
  {
    id: id(),
    vehicleId: uuid()
      .notNull()
      .references(() => vehicles.id),
    number: integer().notNull(),
    state: text().$type<ProposalState>().notNull().default('queued'),
    step: text().notNull().default(''),
    progress: doublePrecision().notNull().default(0),
    trouble: text(),
    requestedById: uuid()
      .notNull()
      .references(() => people.id),
    baseRevisionId: uuid()
      .notNull()
      .references(() => revisions.id),
    targetRevisionId: uuid()
      .notNull()
      .references(() => revisions.id),
    settings: jsonb().$type<Record<string, unknown>>().notNull(),
    coreVersion: text().notNull(),
    surface: jsonb().$type<NonNullable<Proposal['surface']>>(),
    decisions: text().array().$type<CellDecision[]>().notNull().default([]),
    byHand: jsonb().$type<(number | null)[]>().notNull().default([]),
    revisionId: uuid().references(() => revisions.id),
    attempt: integer().notNull().default(0),
    version: integer().notNull().default(1),
    createdAt: createdAt(),
    learnedAt: instant(),
  },
  (table) => [unique().on(table.vehicleId, table.number)],
)

export const proposalLogs = pgTable(
  'proposal_logs',
  {
    proposalId: uuid()
      .notNull()
      .references(() => proposals.id, { onDelete: 'cascade' }),
    logId: uuid()
      .notNull()
      .references(() => logs.id),
    /** False for a log that was switched off on the workbench. */
    used: boolean().notNull().default(true),
  },
  (table) => [primaryKey({ columns: [table.proposalId, table.logId] })],
)

/** What the learner remembers of a log: its quadratic form, so that logs add up without their samples. */
export const logMemories = pgTable('log_memories', {
  logId: uuid()
    .primaryKey()
    .references(() => logs.id, { onDelete: 'cascade' }),
  /** SHA-256 of everything the form depends on; another key means it must be taken again. */
  key: text().notNull(),
  memory: bytes().notNull(),
  createdAt: createdAt(),
})
