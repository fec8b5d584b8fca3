/** The audit trail: append-only, which a trigger in the migrations enforces. */
import { bigserial, index, jsonb, pgTable, text, uuid } from 'drizzle-orm/pg-core'
import { people, workshops } from './accounts.ts'
import { createdAt } from './columns.ts'

export const auditEntries = pgTable(
  'audit_entries',
  {
    id: bigserial({ mode: 'number' }).primaryKey(),
    workshopId: uuid()
      .notNull()
      .references(() => workshops.id),
    at: createdAt(),
    personId: uuid().references(() => people.id),
    personName: text().notNull(),
    action: text().notNull(),
    subject: text().notNull(),
    /** Without a foreign key: an entry outlives what it speaks of. */
    vehicleId: uuid(),
    facts: jsonb().$type<Record<string, unknown>>().notNull().default({}),
  },
  (table) => [index().on(table.workshopId, table.id)],
)
