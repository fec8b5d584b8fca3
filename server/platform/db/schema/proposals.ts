/** Tables of the proposals noun: frozen inputs, the learned surface, decisions. */
import { doublePrecision, integer, jsonb, pgTable, primaryKey, text, unique, uuid } from 'drizzle-orm/pg-core'
import type { Proposal } from '../../../../shared/contract/proposals.ts'
import type { CellDecision, ProposalState } from '../../../../shared/lifecycle.ts'
import { people } from './accounts.ts'
import { createdAt, id, instant } from './columns.ts'
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
  },
  (table) => [primaryKey({ columns: [table.proposalId, table.logId] })],
)
