/** Tables of the tables noun: revisions of fuel and target tables. Signed rows never change, by trigger. */
import { doublePrecision, integer, jsonb, pgTable, text, unique, uuid } from 'drizzle-orm/pg-core'
import type { RevisionState } from '../../../../shared/lifecycle.ts'
import { people } from './accounts.ts'
import { bytes, createdAt, id, instant } from './columns.ts'
import { vehicles } from './vehicles.ts'

export interface CellProvenanceRow {
  readonly decision: ('none' | 'accepted' | 'kept' | 'by-hand' | 'pinned' | 'held' | 'open')[]
  readonly evidenceS: (number | null)[]
  readonly sigmaPct: (number | null)[]
}

export const revisions = pgTable(
  'revisions',
  {
    id: id(),
    vehicleId: uuid()
      .notNull()
      .references(() => vehicles.id),
    kind: text().$type<'ve' | 'target'>().notNull(),
    number: integer().notNull(),
    parentId: uuid(),
    state: text().$type<RevisionState>().notNull().default('draft'),
    authorId: uuid()
      .notNull()
      .references(() => people.id),
    origin: text().$type<'upload' | 'paste' | 'proposal' | 'hand' | 'seed' | 'restored'>().notNull(),
    note: text().notNull().default(''),
    rpmAxis: doublePrecision().array().notNull(),
    mapAxis: doublePrecision().array().notNull(),
    /** Float64 little-endian, row-major, row by MAP ascending. */
    cells: bytes().notNull(),
    checksum: text().notNull(),
    cellsChanged: integer().notNull().default(0),
    proposalId: uuid(),
    /** Ids, numbers and SHA-256 of the logs it was learned from, frozen here. */
    logs: jsonb().$type<{ id: string; number: number; title: string; sha256: string }[]>().notNull().default([]),
    settings: jsonb().$type<Record<string, unknown>>(),
    coreVersion: text(),
    provenance: jsonb().$type<CellProvenanceRow>(),
    createdAt: createdAt(),
    submittedAt: instant(),
    signedById: uuid().references(() => people.id),
    signedAt: instant(),
    signatureNote: text(),
    signatureName: text(),
  },
  (table) => [unique().on(table.vehicleId, table.kind, table.number)],
)
